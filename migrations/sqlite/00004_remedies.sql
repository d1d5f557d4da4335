-- Incidents and what is reported of them to outside bodies; remedies and what became of them; what is out of
-- service, and who signed it back. Texts stand in veils alone.

-- +goose Up

CREATE TABLE incidents (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    number BIGINT NOT NULL,
    kind TEXT NOT NULL,
    zone TEXT NOT NULL,
    severity TEXT NOT NULL,
    at_time TEXT NOT NULL,
    anonymous BOOLEAN NOT NULL,
    reporter TEXT NOT NULL,
    people TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX incidents_ended ON incidents (ended) WHERE ended > 0;

CREATE TABLE reports (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    incident BIGINT NOT NULL,
    code TEXT NOT NULL,
    on_day TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX reports_ended ON reports (ended) WHERE ended > 0;

CREATE TABLE remedies (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    number BIGINT NOT NULL,
    incident BIGINT NOT NULL,
    record TEXT NOT NULL,
    item TEXT NOT NULL,
    subject_site TEXT NOT NULL,
    subject_kind TEXT NOT NULL,
    subject_code TEXT NOT NULL,
    severity TEXT NOT NULL,
    owner TEXT NOT NULL,
    account TEXT NOT NULL,
    made TEXT NOT NULL,
    due TEXT NOT NULL,
    confirm BOOLEAN NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX remedies_ended ON remedies (ended) WHERE ended > 0;

CREATE TABLE remedy_steps (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    remedy BIGINT NOT NULL,
    step TEXT NOT NULL,
    on_day TEXT NOT NULL,
    account TEXT NOT NULL,
    done_by TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX remedy_steps_ended ON remedy_steps (ended) WHERE ended > 0;

CREATE TABLE outages (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    subject_site TEXT NOT NULL,
    subject_kind TEXT NOT NULL,
    subject_code TEXT NOT NULL,
    cause TEXT NOT NULL,
    record TEXT NOT NULL,
    from_time TEXT NOT NULL,
    another BOOLEAN NOT NULL,
    account TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX outages_ended ON outages (ended) WHERE ended > 0;

CREATE TABLE returns (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    outages TEXT NOT NULL,
    at_time TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX returns_ended ON returns (ended) WHERE ended > 0;
