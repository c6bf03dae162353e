-- The study that keeps the store: its name and file, and the digest of what decides,
-- beside the files, how these are read. whole is 0 from when a run turns the working state
-- over until it has read all files anew.
CREATE TABLE followed (
    id      INTEGER PRIMARY KEY CHECK (id = 1),
    name    TEXT NOT NULL,
    file    TEXT NOT NULL,
    decided TEXT NOT NULL,
    whole   INTEGER NOT NULL CHECK (whole IN (0, 1))
) STRICT;

-- The files of the study as they were before they were last read; modified_ns is the time
-- in ns since 1970, and -1 where a file had changed so shortly before that it may have
-- changed again unseen.
CREATE TABLE seen (
    path        TEXT PRIMARY KEY,
    size_bytes  INTEGER NOT NULL,
    modified_ns INTEGER NOT NULL
) STRICT, WITHOUT ROWID;
