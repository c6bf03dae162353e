-- Which part of an archive the store has: shard number of count, or, where number is 0, what
-- was combined of such stores. state is of the latter: 'changed' from when other intake came
-- in, 'rebuilding' while the working state is made of it, up to what is reached, and 'whole'.
CREATE TABLE shard (
    id             INTEGER PRIMARY KEY CHECK (id = 1),
    number         INTEGER NOT NULL CHECK (number BETWEEN 0 AND count),
    count          INTEGER NOT NULL CHECK (count > 0),
    state          TEXT NOT NULL CHECK (state IN ('whole', 'changed', 'rebuilding')),
    reached_path   TEXT NOT NULL DEFAULT '',
    reached_member INTEGER NOT NULL DEFAULT -1
) STRICT;

-- What reading made of a file, or of a member of an archive by its place there, before
-- anything was decided by what else is held: what stores are combined by. said is JSON under
-- zstd, sha256 the digest of the JSON.
CREATE TABLE intake (
    id     INTEGER PRIMARY KEY,
    shard  INTEGER NOT NULL,
    path   TEXT NOT NULL,
    member INTEGER NOT NULL,
    said   BLOB NOT NULL,
    sha256 BLOB NOT NULL,
    UNIQUE (path, member, shard)
) STRICT;

CREATE TABLE intake_series (
    intake_id INTEGER NOT NULL REFERENCES intake (id),
    channel   INTEGER NOT NULL,
    samples   INTEGER NOT NULL,
    series_id INTEGER NOT NULL REFERENCES series (id),
    PRIMARY KEY (intake_id, channel)
) STRICT, WITHOUT ROWID;
CREATE INDEX intake_series_series ON intake_series (series_id);

-- What documents said of earthquakes when a shard was read.
CREATE TABLE intake_events (
    shard  INTEGER PRIMARY KEY,
    said   BLOB NOT NULL,
    sha256 BLOB NOT NULL
) STRICT;
