-- SD in m of oscillators off the grid, kept from the first question that needed them.
-- A block is a list of oscillators, each a period in s and a damping ratio, as
-- little-endian doubles. kept counts the values that were kept of it, and four more a
-- row. An id is never
-- given twice, so that no value can be taken for that of another oscillator.
CREATE TABLE off_grid_block (
    id            INTEGER PRIMARY KEY AUTOINCREMENT,
    generation_id INTEGER NOT NULL REFERENCES generation (id),
    oscillators   BLOB NOT NULL,
    kept          INTEGER NOT NULL DEFAULT 0
) STRICT;
CREATE INDEX off_grid_block_generation ON off_grid_block (generation_id);

-- All of a block's SD of one record and role, in the order of its oscillators, as
-- little-endian doubles and their CRC-32C.
CREATE TABLE off_grid (
    record_id     INTEGER NOT NULL REFERENCES record (id),
    role          TEXT NOT NULL,
    generation_id INTEGER NOT NULL REFERENCES generation (id),
    block_id      INTEGER NOT NULL REFERENCES off_grid_block (id),
    sd_m          BLOB NOT NULL,
    PRIMARY KEY (record_id, role, generation_id, block_id)
) STRICT, WITHOUT ROWID;
