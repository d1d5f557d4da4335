-- What the doors' own system knows: who went through which door, and who can open which. Neither is part of the
-- book, whose entries say only that they were brought in. And from when a badge is whose.

-- +goose Up

-- at_micro counts microseconds since 1970 in UTC. Exports that overlap bring the same row again.
CREATE TABLE passages (
    site TEXT NOT NULL,
    at_micro BIGINT NOT NULL,
    door TEXT NOT NULL,
    badge TEXT NOT NULL,
    direction TEXT NOT NULL,
    batch TEXT NOT NULL,
    PRIMARY KEY (site, at_micro, door, badge, direction)
);

CREATE TABLE holders (
    batch TEXT NOT NULL,
    badge TEXT NOT NULL,
    door TEXT NOT NULL,
    PRIMARY KEY (batch, badge, door)
);

ALTER TABLE people ADD COLUMN
    from_day TEXT;

-- What a safety officer has explained.
CREATE TABLE marks (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    at_time TEXT NOT NULL,
    door TEXT NOT NULL,
    badge TEXT NOT NULL,
    touched BIGINT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX marks_ended ON marks (ended) WHERE ended > 0;
CREATE INDEX marks_touched ON marks (touched) WHERE touched > 0;
