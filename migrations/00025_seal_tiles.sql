-- How many motions a tile has decides where in its parts each of them is: the checksum is of both
-- numbers. -1, which is none, stays where the number does not go with the first part, so that what
-- is in such a tile counts as lost, and is computed again.
ALTER TABLE tile ADD COLUMN crc32c INTEGER NOT NULL DEFAULT -1;
UPDATE tile SET crc32c = crc32c(id, motions) WHERE motions BETWEEN 1 AND 63 AND EXISTS (
    SELECT 1 FROM spectrum s JOIN computation x ON x.id = s.computation_id JOIN generation g ON g.id = x.generation_id
    JOIN tile_part p ON p.id = tile.id << 20
    WHERE s.tile_id = tile.id AND length(p.sd_m) = 8 * motions * min(8, (SELECT count(*) FROM grid_period q WHERE q.grid_id = g.grid_id))
);
