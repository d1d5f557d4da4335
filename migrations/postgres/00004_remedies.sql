-- Incidents and what is reported of them to outside bodies; remedies and what became of them; what is out of
-- service, and who signed it back. Texts stand in veils alone.

-- +goose Up

CREATE TABLE incidents (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    number BIGINT NOT NULL,
    kind TEXT COLLATE "C" NOT NULL,
    zone TEXT COLLATE "C" NOT NULL,
    severity TEXT COLLATE "C" NOT NULL,
    at_time TEXT COLLATE "C" NOT NULL,
    anonymous BOOLEAN NOT NULL,
    reporter TEXT COLLATE "C" NOT NULL,
    people TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX incidents_ended ON incidents (ended) WHERE ended > 0;

CREATE TABLE reports (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    incident BIGINT NOT NULL,
    code TEXT COLLATE "C" NOT NULL,
    on_day TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX reports_ended ON reports (ended) WHERE ended > 0;

CREATE TABLE remedies (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    number BIGINT NOT NULL,
    incident BIGINT NOT NULL,
    record TEXT COLLATE "C" NOT NULL,
    item TEXT COLLATE "C" NOT NULL,
    subject_site TEXT COLLATE "C" NOT NULL,
    subject_kind TEXT COLLATE "C" NOT NULL,
    subject_code TEXT COLLATE "C" NOT NULL,
    severity TEXT COLLATE "C" NOT NULL,
    owner TEXT COLLATE "C" NOT NULL,
    account TEXT COLLATE "C" NOT NULL,
    made TEXT COLLATE "C" NOT NULL,
    due TEXT COLLATE "C" NOT NULL,
    confirm BOOLEAN NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX remedies_ended ON remedies (ended) WHERE ended > 0;

CREATE TABLE remedy_steps (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    remedy BIGINT NOT NULL,
    step TEXT COLLATE "C" NOT NULL,
    on_day TEXT COLLATE "C" NOT NULL,
    account TEXT COLLATE "C" NOT NULL,
    done_by TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX remedy_steps_ended ON remedy_steps (ended) WHERE ended > 0;

CREATE TABLE outages (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    subject_site TEXT COLLATE "C" NOT NULL,
    subject_kind TEXT COLLATE "C" NOT NULL,
    subject_code TEXT COLLATE "C" NOT NULL,
    cause TEXT COLLATE "C" NOT NULL,
    record TEXT COLLATE "C" NOT NULL,
    from_time TEXT COLLATE "C" NOT NULL,
    another BOOLEAN NOT NULL,
    account TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX outages_ended ON outages (ended) WHERE ended > 0;

CREATE TABLE returns (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    outages TEXT COLLATE "C" NOT NULL,
    at_time TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX returns_ended ON returns (ended) WHERE ended > 0;
