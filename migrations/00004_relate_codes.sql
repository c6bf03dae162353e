-- Two archives may spell one station's code with letters of either case: versions of
-- one motion are found without regard to it.
DROP INDEX station_code;
CREATE INDEX station_code ON station (code COLLATE NOCASE);

-- QuakeML events of which a document said that there was no such thing, and when it said
-- so last, NULL where it did not say when: older versions do not count, in later runs too.
CREATE TABLE withdrawn_quake (
    public_id  TEXT PRIMARY KEY,
    created_at TEXT
) STRICT, WITHOUT ROWID;
