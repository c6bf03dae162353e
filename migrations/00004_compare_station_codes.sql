-- Two archives may spell one station's code with letters of either case: versions of
-- one motion are found without regard to it.
DROP INDEX station_code;
CREATE INDEX station_code ON station (code COLLATE NOCASE);
