-- The files that a study's runs wrote: of which edition, what was asked (a digest), and the
-- file as it was left, so that a run need not ask again; size_bytes is -1 of a file that was
-- left absent, since there was no answer. modified_ns is the time in ns since 1970.
CREATE TABLE written (
    path        TEXT PRIMARY KEY,
    edition_id  INTEGER NOT NULL,
    asked       TEXT NOT NULL,
    size_bytes  INTEGER NOT NULL,
    modified_ns INTEGER NOT NULL
) STRICT, WITHOUT ROWID;
