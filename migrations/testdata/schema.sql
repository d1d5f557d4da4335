CREATE TABLE accounts (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    id TEXT NOT NULL,
    name TEXT NOT NULL,
    role TEXT NOT NULL,
    sites TEXT NOT NULL,
    person TEXT NOT NULL,
    until_day TEXT,
    disabled BOOLEAN NOT NULL,
    touched BIGINT NOT NULL,
    PRIMARY KEY (seq, n)
);

CREATE INDEX accounts_ended ON accounts (ended) WHERE ended > 0;

CREATE INDEX accounts_touched ON accounts (touched) WHERE touched > 0;

CREATE TABLE attempts (
    who TEXT NOT NULL PRIMARY KEY,
    tries BIGINT NOT NULL,
    last_try TEXT NOT NULL
);

CREATE TABLE batches (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    what TEXT NOT NULL,
    file TEXT NOT NULL,
    row_count BIGINT NOT NULL,
    actor TEXT NOT NULL,
    at TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);

CREATE INDEX batches_ended ON batches (ended) WHERE ended > 0;

CREATE TABLE credentials (
    account TEXT NOT NULL PRIMARY KEY,
    hash TEXT NOT NULL,
    changed TEXT NOT NULL
);

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

CREATE TABLE entries (
    seq INTEGER PRIMARY KEY,
    id TEXT NOT NULL UNIQUE,
    kind TEXT NOT NULL,
    v BIGINT NOT NULL,
    site TEXT NOT NULL,
    batch TEXT NOT NULL,
    supersedes TEXT NOT NULL,
    actor TEXT NOT NULL,
    recorded_at TEXT NOT NULL,
    bytes BLOB NOT NULL
);

CREATE INDEX entries_actor ON entries (actor, seq);

CREATE INDEX entries_batch ON entries (batch) WHERE batch <> '';

CREATE INDEX entries_kind ON entries (kind, seq);

CREATE INDEX entries_site ON entries (site, seq);

CREATE UNIQUE INDEX entries_supersedes ON entries (supersedes) WHERE supersedes <> '';

CREATE INDEX entries_version ON entries (kind, v);

CREATE TABLE events (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    subject_site TEXT NOT NULL,
    subject_kind TEXT NOT NULL,
    subject_code TEXT NOT NULL,
    event TEXT NOT NULL,
    on_day TEXT NOT NULL,
    at_time TEXT,
    PRIMARY KEY (seq, n)
);

CREATE INDEX events_ended ON events (ended) WHERE ended > 0;

CREATE TABLE excusals (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    subject_site TEXT NOT NULL,
    subject_kind TEXT NOT NULL,
    subject_code TEXT NOT NULL,
    item TEXT NOT NULL,
    from_day TEXT NOT NULL,
    to_day TEXT,
    opens BOOLEAN NOT NULL,
    waiting BOOLEAN NOT NULL,
    PRIMARY KEY (seq, n)
);

CREATE INDEX excusals_ended ON excusals (ended) WHERE ended > 0;

CREATE TABLE facts (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    kind TEXT NOT NULL,
    code TEXT NOT NULL,
    fact TEXT NOT NULL,
    from_day TEXT NOT NULL,
    value TEXT NOT NULL,
    touched BIGINT NOT NULL,
    PRIMARY KEY (seq, n)
);

CREATE INDEX facts_ended ON facts (ended) WHERE ended > 0;

CREATE INDEX facts_touched ON facts (touched) WHERE touched > 0;

CREATE TABLE fixtures (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    code TEXT NOT NULL,
    kind TEXT NOT NULL,
    name TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);

CREATE INDEX fixtures_ended ON fixtures (ended) WHERE ended > 0;

CREATE TABLE flags (
    site TEXT NOT NULL,
    item TEXT NOT NULL,
    kind TEXT NOT NULL,
    code TEXT NOT NULL,
    standing TEXT NOT NULL,
    owner TEXT NOT NULL,
    due TEXT,
    opened TEXT NOT NULL,
    cleared TEXT,
    reopened BIGINT NOT NULL,
    PRIMARY KEY (site, item, kind, code)
);

CREATE TABLE holders (
    batch TEXT NOT NULL,
    badge TEXT NOT NULL,
    door TEXT NOT NULL,
    PRIMARY KEY (batch, badge, door)
);

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

CREATE TABLE links (
    hash TEXT NOT NULL PRIMARY KEY,
    account TEXT NOT NULL,
    expires TEXT NOT NULL,
    used TEXT
);

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

CREATE TABLE meta (
    name TEXT NOT NULL PRIMARY KEY,
    value TEXT NOT NULL
);

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

CREATE TABLE passages (
    site TEXT NOT NULL,
    at_micro BIGINT NOT NULL,
    door TEXT NOT NULL,
    badge TEXT NOT NULL,
    direction TEXT NOT NULL,
    batch TEXT NOT NULL,
    PRIMARY KEY (site, at_micro, door, badge, direction)
);

CREATE TABLE people (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    code TEXT NOT NULL,
    name TEXT NOT NULL,
    email TEXT NOT NULL,
    badge TEXT NOT NULL,
    erased BOOLEAN NOT NULL,
    touched BIGINT NOT NULL, from_day TEXT,
    PRIMARY KEY (seq, n)
);

CREATE INDEX people_ended ON people (ended) WHERE ended > 0;

CREATE INDEX people_touched ON people (touched) WHERE touched > 0;

CREATE TABLE plans (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    what TEXT NOT NULL,
    crew TEXT NOT NULL,
    on_day TEXT NOT NULL,
    at_clock TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);

CREATE INDEX plans_ended ON plans (ended) WHERE ended > 0;

CREATE TABLE records (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    ord BIGINT NOT NULL,
    site TEXT NOT NULL,
    subject_site TEXT NOT NULL,
    subject_kind TEXT NOT NULL,
    subject_code TEXT NOT NULL,
    what TEXT NOT NULL,
    on_day TEXT NOT NULL,
    at_time TEXT,
    passed BOOLEAN NOT NULL,
    remark BOOLEAN NOT NULL,
    until_day TEXT,
    open_zones TEXT NOT NULL,
    session TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);

CREATE INDEX records_ended ON records (ended) WHERE ended > 0;

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

CREATE TABLE runs (
    job TEXT NOT NULL,
    site TEXT NOT NULL,
    due TEXT NOT NULL,
    started TEXT NOT NULL,
    finished TEXT,
    outcome TEXT NOT NULL,
    message TEXT NOT NULL,
    PRIMARY KEY (job, site, due)
);

CREATE INDEX runs_started ON runs (started);

CREATE TABLE sessions (
    hash TEXT NOT NULL PRIMARY KEY,
    account TEXT NOT NULL,
    began TEXT NOT NULL,
    expires TEXT NOT NULL,
    last_seen TEXT NOT NULL
);

CREATE INDEX sessions_account ON sessions (account);

CREATE TABLE sites (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    code TEXT NOT NULL,
    name TEXT NOT NULL,
    time_zone TEXT NOT NULL,
    PRIMARY KEY (seq, n)
);

CREATE INDEX sites_ended ON sites (ended) WHERE ended > 0;

CREATE TABLE stints (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    kind TEXT NOT NULL,
    code TEXT NOT NULL,
    first_day TEXT,
    last_day TEXT,
    PRIMARY KEY (seq, n)
);

CREATE INDEX stints_ended ON stints (ended) WHERE ended > 0;

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

CREATE TABLE tree (
    idx INTEGER PRIMARY KEY,
    hash BLOB NOT NULL
);

CREATE TABLE veils (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    path TEXT NOT NULL,
    person TEXT NOT NULL,
    salt BLOB,
    value BLOB,
    erased BOOLEAN NOT NULL,
    PRIMARY KEY (seq, path),
    CHECK (erased = (salt IS NULL) AND erased = (value IS NULL))
);

CREATE INDEX veils_person ON veils (person) WHERE person <> '';

CREATE TABLE versions (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT NOT NULL,
    batch TEXT NOT NULL,
    site TEXT NOT NULL,
    number BIGINT NOT NULL,
    in_force_from TEXT NOT NULL,
    retroactive BOOLEAN NOT NULL,
    source BLOB NOT NULL,
    PRIMARY KEY (seq, n)
);

CREATE INDEX versions_ended ON versions (ended) WHERE ended > 0;

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

