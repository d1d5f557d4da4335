-- Who may enter which zone: standing permissions, from a moment on and, where it is known, up to one.

-- +goose Up

CREATE TABLE rights (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    person TEXT NOT NULL,
    zone TEXT NOT NULL,
    from_time TEXT NOT NULL,
    to_time TEXT,
    PRIMARY KEY (seq, n)
);
CREATE INDEX rights_ended ON rights (ended) WHERE ended > 0;
