-- Who says what of an event, a station or a record: one row for each value that
-- somebody states. The columns of these tables hold what is taken of it, so that
-- what disagrees can be shown. Values are text: numbers in full digits, a position
-- as latitude and longitude in degrees, a magnitude with its type, times in UTC.
CREATE TABLE statement (
    subject    TEXT NOT NULL CHECK (subject IN ('event', 'station', 'record')),
    subject_id INTEGER NOT NULL,
    attribute  TEXT NOT NULL,
    stated_by  TEXT NOT NULL CHECK (stated_by IN ('catalogue', 'metadata', 'computed', 'header')),
    value      TEXT NOT NULL,
    source     TEXT NOT NULL,
    PRIMARY KEY (subject, subject_id, attribute, stated_by, value)
) STRICT, WITHOUT ROWID;
CREATE INDEX statement_value ON statement (attribute, value) WHERE attribute = 'identifier';

INSERT INTO statement
SELECT 'event', id, 'name', 'header', name, '' FROM event WHERE name IS NOT NULL UNION ALL
SELECT 'event', id, 'origin_time', 'header', origin_time, '' FROM event WHERE origin_time IS NOT NULL UNION ALL
SELECT 'event', id, 'position', 'header', latitude_deg || ' ' || longitude_deg, '' FROM event WHERE latitude_deg + longitude_deg IS NOT NULL UNION ALL
SELECT 'event', id, 'depth_km', 'header', CAST(depth_km AS TEXT), '' FROM event WHERE depth_km IS NOT NULL UNION ALL
SELECT 'event', id, 'magnitude', 'header', trim(magnitude || ' ' || coalesce(magnitude_type, '')), '' FROM event WHERE magnitude IS NOT NULL UNION ALL
SELECT 'station', id, 'name', 'header', name, '' FROM station WHERE name IS NOT NULL UNION ALL
SELECT 'station', id, 'position', 'header', latitude_deg || ' ' || longitude_deg, '' FROM station WHERE latitude_deg + longitude_deg IS NOT NULL UNION ALL
SELECT 'station', id, 'elevation_m', 'header', CAST(elevation_m AS TEXT), '' FROM station WHERE elevation_m IS NOT NULL UNION ALL
SELECT 'station', id, 'vs30_m_s', 'header', CAST(vs30_m_s AS TEXT), '' FROM station WHERE vs30_m_s IS NOT NULL UNION ALL
SELECT 'record', id, 'distance_km', 'header', CAST(distance_km AS TEXT), '' FROM record WHERE distance_km IS NOT NULL;

-- Two codes of one earthquake: primary_id is the event that stands for both, NULL
-- where the event stands for itself.
ALTER TABLE event ADD COLUMN primary_id INTEGER REFERENCES event (id);
CREATE INDEX event_primary ON event (primary_id);
CREATE INDEX event_origin ON event (origin_time);

-- The ground type or site class that somebody states, in their words.
ALTER TABLE station ADD COLUMN site_class TEXT;

-- Distances of known kind; distance_km is the best of what is there.
ALTER TABLE record ADD COLUMN epicentral_km REAL;
ALTER TABLE record ADD COLUMN hypocentral_km REAL;
ALTER TABLE record ADD COLUMN rupture_km REAL;
ALTER TABLE record ADD COLUMN jb_km REAL;

-- How alike the samples of two components are that may be one motion: of one
-- event, station and direction, or of equal samples. first_id < second_id.
CREATE TABLE likeness (
    first_id    INTEGER NOT NULL REFERENCES component (id),
    second_id   INTEGER NOT NULL REFERENCES component (id),
    kind        TEXT NOT NULL CHECK (kind IN ('different', 'similar', 'scaled', 'identical')),
    scale       REAL NOT NULL,
    correlation REAL NOT NULL,
    PRIMARY KEY (first_id, second_id)
) STRICT, WITHOUT ROWID;
CREATE INDEX series_digest ON series (sha256);

-- The component that statistics take of the same motion, NULL where that is this.
ALTER TABLE component ADD COLUMN duplicate_of INTEGER REFERENCES component (id);
CREATE INDEX component_duplicate ON component (record_id, role) WHERE duplicate_of IS NOT NULL;
