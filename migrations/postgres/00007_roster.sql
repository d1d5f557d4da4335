-- Who is on duty when; and what the book has reckoned: when a site is short of people.

-- +goose Up

CREATE TABLE duties (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    person TEXT COLLATE "C" NOT NULL,
    from_time TEXT COLLATE "C" NOT NULL,
    to_time TEXT COLLATE "C" NOT NULL,
    duty TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX duties_ended ON duties (ended) WHERE ended > 0;

CREATE TABLE stocks (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    item TEXT COLLATE "C" NOT NULL,
    from_time TEXT COLLATE "C" NOT NULL,
    to_time TEXT COLLATE "C" NOT NULL,
    spans TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX stocks_ended ON stocks (ended) WHERE ended > 0;
