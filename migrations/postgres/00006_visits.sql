-- Who comes to visit, announced and escorted, and what became of each visit.

-- +goose Up

CREATE TABLE visits (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    visitor TEXT COLLATE "C" NOT NULL,
    employer TEXT COLLATE "C" NOT NULL,
    badge TEXT COLLATE "C" NOT NULL,
    kind TEXT COLLATE "C" NOT NULL,
    zones TEXT COLLATE "C" NOT NULL,
    from_time TEXT COLLATE "C" NOT NULL,
    to_time TEXT COLLATE "C" NOT NULL,
    escort TEXT COLLATE "C" NOT NULL,
    person TEXT COLLATE "C" NOT NULL,
    tools TEXT COLLATE "C" NOT NULL,
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
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    visit TEXT COLLATE "C" NOT NULL,
    step TEXT COLLATE "C" NOT NULL,
    at_time TEXT COLLATE "C" NOT NULL,
    screener TEXT COLLATE "C" NOT NULL,
    outcome TEXT COLLATE "C" NOT NULL,
    account TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX visit_steps_ended ON visit_steps (ended) WHERE ended > 0;
