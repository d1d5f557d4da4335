-- Who comes to visit, announced and escorted, and what became of each visit.

-- +goose Up

CREATE TABLE visits (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    visitor TEXT NOT NULL,
    employer TEXT NOT NULL,
    badge TEXT NOT NULL,
    kind TEXT NOT NULL,
    zones TEXT NOT NULL,
    from_time TEXT NOT NULL,
    to_time TEXT NOT NULL,
    escort TEXT NOT NULL,
    person TEXT NOT NULL,
    tools TEXT NOT NULL,
    late BOOLEAN NOT NULL,
    touched BIGINT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX visits_ended ON visits (ended) WHERE ended > 0;
CREATE INDEX visits_touched ON visits (touched) WHERE touched > 0;

CREATE TABLE visit_steps (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    visit TEXT NOT NULL,
    step TEXT NOT NULL,
    at_time TEXT NOT NULL,
    screener TEXT NOT NULL,
    outcome TEXT NOT NULL,
    account TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX visit_steps_ended ON visit_steps (ended) WHERE ended > 0;
