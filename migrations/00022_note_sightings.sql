-- What a shard saw: every file, or member of an archive by its place there, of whatever shard
-- it is; sum is of its content and of what decided how it was read. Shards that are combined
-- must have seen the same.
CREATE TABLE sighting (
    path   TEXT NOT NULL,
    member INTEGER NOT NULL,
    sum    BLOB NOT NULL,
    PRIMARY KEY (path, member)
) STRICT, WITHOUT ROWID;

-- The shards of which a store that combines them has something. One that is being taken over
-- is not whole: what is there of it is neither what it was nor what it is to be. sightings is
-- the digest of what it saw, NULL where nobody noted that.
CREATE TABLE gathered (
    shard     INTEGER PRIMARY KEY,
    is_whole  INTEGER NOT NULL CHECK (is_whole IN (0, 1)),
    sightings BLOB
) STRICT;
INSERT INTO gathered (shard, is_whole)
    SELECT shard, 1 FROM intake_events WHERE (SELECT number FROM shard) = 0;

-- Shards of studies are to read their files once more, to note what they see.
UPDATE followed SET whole = 0 WHERE (SELECT number FROM shard) > 0;
