-- The shards that are being taken over: what the store has of them is neither what it was
-- nor what it is to be.
CREATE TABLE gathering (
    shard INTEGER PRIMARY KEY
) STRICT;
