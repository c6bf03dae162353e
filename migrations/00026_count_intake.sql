-- Of how many files the intake of a shard is, and the sum of their keys' checksums, so that a file
-- that was lost with all that tells of it is missed: in a shard of its own, since its last run
-- ended; in what is combined of each shard, since it was taken over.
ALTER TABLE shard ADD COLUMN files INTEGER NOT NULL DEFAULT 0;
ALTER TABLE shard ADD COLUMN keys INTEGER NOT NULL DEFAULT 0;
ALTER TABLE gathered ADD COLUMN files INTEGER NOT NULL DEFAULT 0;
ALTER TABLE gathered ADD COLUMN keys INTEGER NOT NULL DEFAULT 0;
UPDATE shard SET (files, keys) = (SELECT count(*), coalesce(sum(crc32c(i.path, i.member)), 0) FROM intake i WHERE i.shard = shard.number) WHERE number > 0;
UPDATE gathered SET (files, keys) = (SELECT count(*), coalesce(sum(crc32c(i.path, i.member)), 0) FROM intake i WHERE i.shard = gathered.shard);
