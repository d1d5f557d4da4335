-- The first tables of a book, as they are in SQLite.
--
-- Days are text (YYYY-MM-DD) and instants are text in UTC with six decimals
-- (YYYY-MM-DDTHH:MM:SS.ffffffZ), so that both sort as they stand and can be read with any tool.
-- All text is compared byte by byte (COLLATE "C"), as SQLite does, whatever the database's locale.

-- +goose Up

-- What a book says of itself: its identity and the like.
CREATE TABLE meta (
    name TEXT COLLATE "C" NOT NULL PRIMARY KEY,
    value TEXT COLLATE "C" NOT NULL
);

-- The entries. Nothing here is ever changed or deleted.
CREATE TABLE entries (
    seq BIGINT NOT NULL PRIMARY KEY,
    id TEXT COLLATE "C" NOT NULL UNIQUE,
    kind TEXT COLLATE "C" NOT NULL,
    v BIGINT NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    supersedes TEXT COLLATE "C" NOT NULL,
    actor TEXT COLLATE "C" NOT NULL,
    recorded_at TEXT COLLATE "C" NOT NULL,
    bytes BYTEA NOT NULL
);
CREATE INDEX entries_kind ON entries (kind, seq);
CREATE INDEX entries_site ON entries (site, seq);
CREATE INDEX entries_actor ON entries (actor, seq);
CREATE INDEX entries_batch ON entries (batch) WHERE batch <> '';
-- Only what stands can be superseded, so an entry is superseded once at most.
CREATE UNIQUE INDEX entries_supersedes ON entries (supersedes) WHERE supersedes <> '';

-- The stored hashes of the tree over the entries.
CREATE TABLE tree (
    idx BIGINT NOT NULL PRIMARY KEY,
    hash BYTEA NOT NULL
);

-- The erasable values, of which the entries hold commitments.
CREATE TABLE veils (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    path TEXT COLLATE "C" NOT NULL,
    person TEXT COLLATE "C" NOT NULL,
    salt BYTEA,
    value BYTEA,
    erased BOOLEAN NOT NULL,
    PRIMARY KEY (seq, path),
    CHECK (erased = (salt IS NULL) AND erased = (value IS NULL))
);
CREATE INDEX veils_person ON veils (person) WHERE person <> '';

-- The projections: what the entries say, as rows. Each can be dropped and made again. seq is the
-- entry that wrote the row and n its place among the rows of that entry; ended is the entry that
-- superseded or withdrew it (0: it stands); touched is the entry that erased values in it.

CREATE TABLE sites (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    code TEXT COLLATE "C" NOT NULL,
    name TEXT COLLATE "C" NOT NULL,
    time_zone TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX sites_ended ON sites (ended) WHERE ended > 0;

CREATE TABLE versions (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    number BIGINT NOT NULL,
    in_force_from TEXT COLLATE "C" NOT NULL,
    retroactive BOOLEAN NOT NULL,
    source BYTEA NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX versions_ended ON versions (ended) WHERE ended > 0;

CREATE TABLE people (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    code TEXT COLLATE "C" NOT NULL,
    name TEXT COLLATE "C" NOT NULL,
    email TEXT COLLATE "C" NOT NULL,
    badge TEXT COLLATE "C" NOT NULL,
    erased BOOLEAN NOT NULL,
    touched BIGINT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX people_ended ON people (ended) WHERE ended > 0;
CREATE INDEX people_touched ON people (touched) WHERE touched > 0;

CREATE TABLE fixtures (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    code TEXT COLLATE "C" NOT NULL,
    kind TEXT COLLATE "C" NOT NULL,
    name TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX fixtures_ended ON fixtures (ended) WHERE ended > 0;

CREATE TABLE stints (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    kind TEXT COLLATE "C" NOT NULL,
    code TEXT COLLATE "C" NOT NULL,
    first_day TEXT COLLATE "C",
    last_day TEXT COLLATE "C",
    PRIMARY KEY (seq, n)
);
CREATE INDEX stints_ended ON stints (ended) WHERE ended > 0;

CREATE TABLE facts (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    kind TEXT COLLATE "C" NOT NULL,
    code TEXT COLLATE "C" NOT NULL,
    fact TEXT COLLATE "C" NOT NULL,
    from_day TEXT COLLATE "C" NOT NULL,
    value TEXT COLLATE "C" NOT NULL,
    touched BIGINT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX facts_ended ON facts (ended) WHERE ended > 0;
CREATE INDEX facts_touched ON facts (touched) WHERE touched > 0;

CREATE TABLE records (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    ord BIGINT NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    subject_site TEXT COLLATE "C" NOT NULL,
    subject_kind TEXT COLLATE "C" NOT NULL,
    subject_code TEXT COLLATE "C" NOT NULL,
    what TEXT COLLATE "C" NOT NULL,
    on_day TEXT COLLATE "C" NOT NULL,
    at_time TEXT COLLATE "C",
    passed BOOLEAN NOT NULL,
    remark BOOLEAN NOT NULL,
    until_day TEXT COLLATE "C",
    open_zones TEXT COLLATE "C" NOT NULL,
    session TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX records_ended ON records (ended) WHERE ended > 0;

CREATE TABLE events (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    subject_site TEXT COLLATE "C" NOT NULL,
    subject_kind TEXT COLLATE "C" NOT NULL,
    subject_code TEXT COLLATE "C" NOT NULL,
    event TEXT COLLATE "C" NOT NULL,
    on_day TEXT COLLATE "C" NOT NULL,
    at_time TEXT COLLATE "C",
    PRIMARY KEY (seq, n)
);
CREATE INDEX events_ended ON events (ended) WHERE ended > 0;

CREATE TABLE excusals (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    subject_site TEXT COLLATE "C" NOT NULL,
    subject_kind TEXT COLLATE "C" NOT NULL,
    subject_code TEXT COLLATE "C" NOT NULL,
    item TEXT COLLATE "C" NOT NULL,
    from_day TEXT COLLATE "C" NOT NULL,
    to_day TEXT COLLATE "C",
    opens BOOLEAN NOT NULL,
    waiting BOOLEAN NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX excusals_ended ON excusals (ended) WHERE ended > 0;

CREATE TABLE plans (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    what TEXT COLLATE "C" NOT NULL,
    crew TEXT COLLATE "C" NOT NULL,
    on_day TEXT COLLATE "C" NOT NULL,
    at_clock TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX plans_ended ON plans (ended) WHERE ended > 0;

CREATE TABLE accounts (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    id TEXT COLLATE "C" NOT NULL,
    name TEXT COLLATE "C" NOT NULL,
    role TEXT COLLATE "C" NOT NULL,
    sites TEXT COLLATE "C" NOT NULL,
    person TEXT COLLATE "C" NOT NULL,
    until_day TEXT COLLATE "C",
    disabled BOOLEAN NOT NULL,
    touched BIGINT NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX accounts_ended ON accounts (ended) WHERE ended > 0;
CREATE INDEX accounts_touched ON accounts (touched) WHERE touched > 0;

CREATE TABLE batches (
    seq BIGINT NOT NULL REFERENCES entries (seq),
    n BIGINT NOT NULL,
    ended BIGINT NOT NULL,
    entry TEXT COLLATE "C" NOT NULL,
    batch TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    what TEXT COLLATE "C" NOT NULL,
    file TEXT COLLATE "C" NOT NULL,
    row_count BIGINT NOT NULL,
    actor TEXT COLLATE "C" NOT NULL,
    at TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (seq, n)
);
CREATE INDEX batches_ended ON batches (ended) WHERE ended > 0;

-- What the program needs to run. None of it is part of the book: losing it loses no record.

CREATE TABLE credentials (
    account TEXT COLLATE "C" NOT NULL PRIMARY KEY,
    hash TEXT COLLATE "C" NOT NULL,
    changed TEXT COLLATE "C" NOT NULL
);

CREATE TABLE links (
    hash TEXT COLLATE "C" NOT NULL PRIMARY KEY,
    account TEXT COLLATE "C" NOT NULL,
    expires TEXT COLLATE "C" NOT NULL,
    used TEXT COLLATE "C"
);

CREATE TABLE sessions (
    hash TEXT COLLATE "C" NOT NULL PRIMARY KEY,
    account TEXT COLLATE "C" NOT NULL,
    began TEXT COLLATE "C" NOT NULL,
    expires TEXT COLLATE "C" NOT NULL,
    last_seen TEXT COLLATE "C" NOT NULL
);
CREATE INDEX sessions_account ON sessions (account);

CREATE TABLE attempts (
    who TEXT COLLATE "C" NOT NULL PRIMARY KEY,
    tries BIGINT NOT NULL,
    last_try TEXT COLLATE "C" NOT NULL
);

CREATE TABLE flags (
    site TEXT COLLATE "C" NOT NULL,
    item TEXT COLLATE "C" NOT NULL,
    kind TEXT COLLATE "C" NOT NULL,
    code TEXT COLLATE "C" NOT NULL,
    standing TEXT COLLATE "C" NOT NULL,
    owner TEXT COLLATE "C" NOT NULL,
    due TEXT COLLATE "C",
    opened TEXT COLLATE "C" NOT NULL,
    cleared TEXT COLLATE "C",
    reopened BIGINT NOT NULL,
    PRIMARY KEY (site, item, kind, code)
);

CREATE TABLE runs (
    job TEXT COLLATE "C" NOT NULL,
    site TEXT COLLATE "C" NOT NULL,
    due TEXT COLLATE "C" NOT NULL,
    started TEXT COLLATE "C" NOT NULL,
    finished TEXT COLLATE "C",
    outcome TEXT COLLATE "C" NOT NULL,
    message TEXT COLLATE "C" NOT NULL,
    PRIMARY KEY (job, site, due)
);
CREATE INDEX runs_started ON runs (started);
