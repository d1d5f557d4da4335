-- Who may enter which zone: standing permissions, from a moment on and, where it is known, up to one.

-- +goose Up

CREATE TABLE rights (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    person TEXT COLLATE "C" NOT NULL,
    zone TEXT COLLATE "C" NOT NULL,
    from_time TEXT COLLATE "C" NOT NULL,
    to_time TEXT COLLATE "C",
    PRIMARY KEY (seq, n)
);
CREATE INDEX rights_ended ON rights (ended) WHERE ended > 0;
