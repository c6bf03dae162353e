-- Who says what of an event, a station or a record: one row for each value that
-- somebody states. The columns of these tables hold what is taken of it, so that
-- what disagrees can be shown. Values are text: numbers in full digits, a position
-- as latitude and longitude in degrees, a magnitude with its type, times in UTC.
-- Stores of before hold none: their solver is an earlier one, and they are refused.
CREATE TABLE statement (
    subject    TEXT NOT NULL CHECK (subject IN ('event', 'station', 'record')),
    subject_id INTEGER NOT NULL,
    attribute  TEXT NOT NULL,
    stated_by  TEXT NOT NULL CHECK (stated_by IN ('catalogue', 'metadata', 'computed', 'header')),
    value      TEXT NOT NULL,
    source     TEXT NOT NULL,
    PRIMARY KEY (subject, subject_id, attribute, stated_by, value)
) STRICT, WITHOUT ROWID;
CREATE INDEX statement_identifier ON statement (value) WHERE attribute = 'identifier';

-- Two codes of one earthquake: primary_id is the event that stands for both, NULL
-- where the event stands for itself. own_origin is the origin time by what is stated
-- under the event's own code; origin_time that of all codes.
ALTER TABLE event ADD COLUMN primary_id INTEGER REFERENCES event (id);
ALTER TABLE event ADD COLUMN own_origin TEXT;
CREATE INDEX event_primary ON event (primary_id) WHERE primary_id IS NOT NULL;
CREATE INDEX event_origin ON event (own_origin);

-- The ground type or site class that somebody states, in their words.
ALTER TABLE station ADD COLUMN site_class TEXT;
CREATE INDEX station_code ON station (code);

-- Distances of known kind; distance_km is the best of what is there.
ALTER TABLE record ADD COLUMN epicentral_km REAL;
ALTER TABLE record ADD COLUMN hypocentral_km REAL;
ALTER TABLE record ADD COLUMN rupture_km REAL;
ALTER TABLE record ADD COLUMN jb_km REAL;

-- The records of an event at a station: of either alone there may be thousands.
DROP INDEX record_event;
CREATE INDEX record_event ON record (event_id, station_id);

-- How alike the samples of two components are that may be one motion: of one
-- event, station and direction, or of equal samples, as they are and between two
-- corners (package likeness). first_id < second_id. The samples of the first begin
-- lag_s after those of the second where they are most alike.
CREATE TABLE likeness (
    first_id         INTEGER NOT NULL REFERENCES component (id),
    second_id        INTEGER NOT NULL REFERENCES component (id),
    kind             TEXT NOT NULL CHECK (kind IN ('different', 'near', 'similar', 'scaled', 'identical')),
    scale            REAL NOT NULL,
    lag_s            REAL NOT NULL,
    correlation      REAL NOT NULL,
    band_correlation REAL NOT NULL,
    PRIMARY KEY (first_id, second_id)
) STRICT, WITHOUT ROWID;
CREATE INDEX series_digest ON series (sha256);

-- Components with one motion_id hold the same motion, of which statistics take one;
-- it is the least of their ids. NULL where there is no other.
ALTER TABLE component ADD COLUMN motion_id INTEGER REFERENCES component (id);
CREATE INDEX component_motion ON component (motion_id) WHERE motion_id IS NOT NULL;

-- The QuakeML events that may be an event, of which the nearest to what catalogue and
-- headers state of it makes the statements of metadata. came is 1 where its waves
-- reached a station while a record of the event ran; code is that which it gives.
-- created_at is when this version of it came about, NULL where nobody says.
CREATE TABLE quake (
    event_id       INTEGER NOT NULL REFERENCES event (id),
    public_id      TEXT NOT NULL,
    code           TEXT NOT NULL,
    came           INTEGER NOT NULL CHECK (came IN (0, 1)),
    name           TEXT,
    origin_time    TEXT NOT NULL,
    latitude_deg   REAL,
    longitude_deg  REAL,
    depth_km       REAL,
    magnitude      REAL,
    magnitude_type TEXT,
    created_at     TEXT,
    PRIMARY KEY (event_id, public_id)
) STRICT, WITHOUT ROWID;
