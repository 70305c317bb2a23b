-- SPDX-License-Identifier: GPL-3.0-or-later
-- The enduring tables of a register: append-only, hash-chained, never migrated.
-- Compiled into the library and compared with the file's own schema on opening.
-- docs/journal-format.md has the bytes that are hashed; schema/derived.sql shows
-- the tables that are made from these and can be dropped at any time.
--
-- Every hash is BLAKE2b-256 in lower-case hex.

CREATE TABLE meta(
    key TEXT NOT NULL PRIMARY KEY, -- what is told about the file: application, format, hash
    value TEXT NOT NULL            -- fixed when the file is made
) STRICT, WITHOUT ROWID;

CREATE TABLE entry(
    seq INTEGER PRIMARY KEY,       -- number of the entry: 1, 2, 3, ... without gaps
    utc INTEGER NOT NULL,          -- when it was written, in seconds since 1970-01-01T00:00:00Z
    author TEXT NOT NULL,          -- who wrote it
    reason TEXT NOT NULL,          -- why
    command TEXT NOT NULL,         -- the command that made it
    tool TEXT NOT NULL,            -- the program and its version
    changes INTEGER NOT NULL,      -- rows of version with this seq
    observations INTEGER NOT NULL, -- rows of observation with this seq
    withdrawals INTEGER NOT NULL,  -- rows of withdrawal with this seq
    records INTEGER NOT NULL,      -- rows of record with this seq
    digest TEXT NOT NULL,          -- hash over all those rows
    prev TEXT NOT NULL,            -- hash of the entry before; of the first: 64 zeros
    hash TEXT NOT NULL             -- hash over all columns above
) STRICT;

CREATE TABLE body(
    hash TEXT NOT NULL PRIMARY KEY, -- hash over kind, format and json
    kind TEXT NOT NULL,             -- kind of object: hazard, element, ...
    format INTEGER NOT NULL,        -- format of the json: which fields mean what
    json TEXT NOT NULL              -- canonical JSON of one version of an object
) STRICT;

CREATE TABLE version(
    seq INTEGER NOT NULL REFERENCES entry(seq), -- the entry that made this version
    kind TEXT NOT NULL,                         -- kind of the object
    id TEXT NOT NULL,                           -- id of the object
    body TEXT REFERENCES body(hash),            -- its body from then on; NULL: removed
    PRIMARY KEY(seq, kind, id)
) STRICT, WITHOUT ROWID;

CREATE INDEX version_of_id ON version(id, kind, seq, body);
CREATE INDEX version_of_body ON version(body);

CREATE TABLE observation(
    number INTEGER PRIMARY KEY,                 -- order of arrival: 1, 2, 3, ...
    seq INTEGER NOT NULL REFERENCES entry(seq), -- the entry that brought it
    ident TEXT NOT NULL UNIQUE,                 -- its key at the source, or one made of it
    day TEXT NOT NULL,                          -- when it happened, YYYY-MM-DD
    what TEXT NOT NULL,                         -- kind of observation: fault, test, trip, ...
    subject TEXT NOT NULL,                      -- id of the object that it is about
    result TEXT NOT NULL,                       -- what came out; empty: nothing beside the count
    count INTEGER NOT NULL,                     -- how many; 1 where a row is one event
    note TEXT NOT NULL                          -- anything else
) STRICT;

CREATE INDEX observation_of_seq ON observation(seq);

CREATE TABLE withdrawal(
    observation INTEGER PRIMARY KEY REFERENCES observation(number), -- what is withdrawn
    seq INTEGER NOT NULL REFERENCES entry(seq),                     -- the entry that withdrew it
    replaced_by INTEGER REFERENCES observation(number)              -- what counts instead, or NULL
) STRICT;

CREATE INDEX withdrawal_of_seq ON withdrawal(seq);

CREATE TABLE record(
    id TEXT NOT NULL PRIMARY KEY,               -- name of the record of a decision
    seq INTEGER NOT NULL REFERENCES entry(seq), -- the entry that it was written with
    manifest TEXT NOT NULL,                     -- canonical JSON: what was decided, on which bodies
    results TEXT NOT NULL,                      -- canonical JSON: the figures as they were
    text TEXT NOT NULL,                         -- the report as it was read
    supersedes TEXT REFERENCES record(id)       -- the record that this one replaces; NULL: none
) STRICT;

CREATE INDEX record_of_seq ON record(seq);

CREATE TABLE signature(
    number INTEGER PRIMARY KEY, -- order of arrival: 1, 2, 3, ...
    of TEXT NOT NULL,           -- hash of what is signed
    role TEXT NOT NULL,         -- as what it was signed: author, reviewer, ...
    key TEXT NOT NULL,          -- public key in hex
    sig TEXT NOT NULL,          -- signature in hex
    utc INTEGER NOT NULL,       -- when, in seconds since 1970-01-01T00:00:00Z
    prev TEXT NOT NULL,         -- hash of the row before; of the first: 64 zeros
    hash TEXT NOT NULL          -- hash over all columns above
) STRICT;

CREATE TABLE seal(
    number INTEGER PRIMARY KEY,                 -- order of arrival: 1, 2, 3, ...
    seq INTEGER NOT NULL REFERENCES entry(seq), -- the entry up to which it seals
    text TEXT NOT NULL,                         -- what is sealed, as it is kept outside
    sig TEXT NOT NULL,                          -- signature in hex; empty: none
    prev TEXT NOT NULL,                         -- hash of the row before; of the first: 64 zeros
    hash TEXT NOT NULL                          -- hash over all columns above
) STRICT;

CREATE TRIGGER meta_no_update BEFORE UPDATE ON meta
BEGIN SELECT raise(ABORT, 'table meta is append-only'); END;
CREATE TRIGGER meta_no_delete BEFORE DELETE ON meta
BEGIN SELECT raise(ABORT, 'table meta is append-only'); END;
CREATE TRIGGER entry_no_update BEFORE UPDATE ON entry
BEGIN SELECT raise(ABORT, 'table entry is append-only'); END;
CREATE TRIGGER entry_no_delete BEFORE DELETE ON entry
BEGIN SELECT raise(ABORT, 'table entry is append-only'); END;
CREATE TRIGGER body_no_update BEFORE UPDATE ON body
BEGIN SELECT raise(ABORT, 'table body is append-only'); END;
CREATE TRIGGER body_no_delete BEFORE DELETE ON body
BEGIN SELECT raise(ABORT, 'table body is append-only'); END;
CREATE TRIGGER version_no_update BEFORE UPDATE ON version
BEGIN SELECT raise(ABORT, 'table version is append-only'); END;
CREATE TRIGGER version_no_delete BEFORE DELETE ON version
BEGIN SELECT raise(ABORT, 'table version is append-only'); END;
CREATE TRIGGER observation_no_update BEFORE UPDATE ON observation
BEGIN SELECT raise(ABORT, 'table observation is append-only'); END;
CREATE TRIGGER observation_no_delete BEFORE DELETE ON observation
BEGIN SELECT raise(ABORT, 'table observation is append-only'); END;
CREATE TRIGGER withdrawal_no_update BEFORE UPDATE ON withdrawal
BEGIN SELECT raise(ABORT, 'table withdrawal is append-only'); END;
CREATE TRIGGER withdrawal_no_delete BEFORE DELETE ON withdrawal
BEGIN SELECT raise(ABORT, 'table withdrawal is append-only'); END;
CREATE TRIGGER record_no_update BEFORE UPDATE ON record
BEGIN SELECT raise(ABORT, 'table record is append-only'); END;
CREATE TRIGGER record_no_delete BEFORE DELETE ON record
BEGIN SELECT raise(ABORT, 'table record is append-only'); END;
CREATE TRIGGER signature_no_update BEFORE UPDATE ON signature
BEGIN SELECT raise(ABORT, 'table signature is append-only'); END;
CREATE TRIGGER signature_no_delete BEFORE DELETE ON signature
BEGIN SELECT raise(ABORT, 'table signature is append-only'); END;
CREATE TRIGGER seal_no_update BEFORE UPDATE ON seal
BEGIN SELECT raise(ABORT, 'table seal is append-only'); END;
CREATE TRIGGER seal_no_delete BEFORE DELETE ON seal
BEGIN SELECT raise(ABORT, 'table seal is append-only'); END;

INSERT INTO meta(key, value) VALUES
    ('application', 'ohmen'), ('format', '1'), ('hash', 'BLAKE2b-256');
