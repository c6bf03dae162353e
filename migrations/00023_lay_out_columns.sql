-- What questions read of an edition, column by column: of a table, or of a part of it by role
-- or flag, so many values at a time, packed by the program. It is made of the rows, which say
-- what an edition shows, and can be made again: of the newest edition and of the published one.
CREATE TABLE edition_column (
    edition_id INTEGER NOT NULL REFERENCES edition (id),
    name       TEXT NOT NULL,    -- of the table
    part       TEXT NOT NULL,    -- '' of tables that have none
    number     INTEGER NOT NULL, -- of the piece, from 0
    title      TEXT NOT NULL,    -- of the column
    data       BLOB NOT NULL,
    crc32c     INTEGER NOT NULL, -- of all that stands before it
    UNIQUE (edition_id, name, part, number, title)
) STRICT;
