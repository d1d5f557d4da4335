-- Who is on duty when; and what the book has reckoned: when a site is short of people.

-- +goose Up

CREATE TABLE duties (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    person TEXT NOT NULL,
    from_time TEXT NOT NULL,
    to_time TEXT NOT NULL,
    duty TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX duties_ended ON duties (ended) WHERE ended > 0;

CREATE TABLE stocks (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    item TEXT NOT NULL,
    from_time TEXT NOT NULL,
    to_time TEXT NOT NULL,
    spans TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX stocks_ended ON stocks (ended) WHERE ended > 0;
