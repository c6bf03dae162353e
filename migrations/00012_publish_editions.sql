-- What a run leaves for questions, under the run's id: all that they read, of one
-- generation. Questions read the published one.
CREATE TABLE edition (
    id            INTEGER PRIMARY KEY REFERENCES run (id),
    generation_id INTEGER NOT NULL REFERENCES generation (id),
    state         TEXT NOT NULL CHECK (state IN ('held', 'published', 'superseded'))
) STRICT;
CREATE UNIQUE INDEX edition_published ON edition (state) WHERE state = 'published';

-- The edition that was published when a run had ended, or that it made and held back.
ALTER TABLE run ADD COLUMN edition_id INTEGER REFERENCES edition (id);

-- The rows that editions show, each in those from since on and before until, which is
-- 9223372036854775807 as long as the newest edition has it. Ids are those of the tables
-- of the same names at that time, which run brought a file is left out.
CREATE TABLE edition_event (
    until INTEGER NOT NULL, since INTEGER NOT NULL,
    id INTEGER NOT NULL, code TEXT NOT NULL, name TEXT, origin_time TEXT, latitude_deg REAL, longitude_deg REAL,
    depth_km REAL, magnitude REAL, magnitude_type TEXT, primary_id INTEGER, own_origin TEXT,
    PRIMARY KEY (until, id)
) STRICT, WITHOUT ROWID;

CREATE TABLE edition_station (
    until INTEGER NOT NULL, since INTEGER NOT NULL,
    id INTEGER NOT NULL, network TEXT NOT NULL, code TEXT NOT NULL, name TEXT, latitude_deg REAL, longitude_deg REAL,
    elevation_m REAL, vs30_m_s REAL, site_class TEXT,
    PRIMARY KEY (until, id)
) STRICT, WITHOUT ROWID;

CREATE TABLE edition_record (
    until INTEGER NOT NULL, since INTEGER NOT NULL,
    id INTEGER NOT NULL, code TEXT NOT NULL, event_id INTEGER, station_id INTEGER, instrument TEXT NOT NULL,
    siting TEXT NOT NULL, start_at TEXT, distance_km REAL, epicentral_km REAL, hypocentral_km REAL, rupture_km REAL, jb_km REAL,
    PRIMARY KEY (until, id)
) STRICT, WITHOUT ROWID;

CREATE TABLE edition_source_file (
    until INTEGER NOT NULL, since INTEGER NOT NULL,
    id INTEGER NOT NULL, sha256 TEXT NOT NULL, path TEXT NOT NULL, size_bytes INTEGER NOT NULL, modified_at TEXT,
    format TEXT NOT NULL,
    PRIMARY KEY (until, id)
) STRICT, WITHOUT ROWID;

CREATE TABLE edition_component (
    until INTEGER NOT NULL, since INTEGER NOT NULL,
    id INTEGER NOT NULL, record_id INTEGER NOT NULL, role TEXT NOT NULL, axis TEXT NOT NULL, label TEXT NOT NULL, rank INTEGER NOT NULL,
    azimuth_deg REAL, channel TEXT NOT NULL, start_at TEXT, step_s REAL NOT NULL, samples INTEGER NOT NULL, unit TEXT NOT NULL,
    processing TEXT NOT NULL, low_cut_hz REAL, high_cut_hz REAL, header_peak_m_s2 REAL, warnings TEXT NOT NULL,
    source_id INTEGER NOT NULL, source_line INTEGER NOT NULL, motion_id INTEGER, series_id INTEGER,
    PRIMARY KEY (until, id)
) STRICT, WITHOUT ROWID;
CREATE INDEX edition_component_role ON edition_component (until, record_id, role);

CREATE TABLE edition_finding (
    until INTEGER NOT NULL, since INTEGER NOT NULL,
    component_id INTEGER NOT NULL, flag TEXT NOT NULL, value REAL NOT NULL, bound REAL NOT NULL, words TEXT NOT NULL,
    PRIMARY KEY (until, component_id, flag)
) STRICT, WITHOUT ROWID;
CREATE INDEX edition_finding_flag ON edition_finding (until, flag);

CREATE TABLE edition_computed (
    until INTEGER NOT NULL, since INTEGER NOT NULL,
    record_id INTEGER NOT NULL, role TEXT NOT NULL, computation_id INTEGER NOT NULL,
    PRIMARY KEY (until, role, record_id)
) STRICT, WITHOUT ROWID;
CREATE INDEX edition_computed_record ON edition_computed (record_id, role, until);
CREATE INDEX edition_computed_computation ON edition_computed (computation_id, until);

CREATE TABLE edition_rejection (
    until INTEGER NOT NULL, since INTEGER NOT NULL,
    id INTEGER NOT NULL, path TEXT NOT NULL, line INTEGER NOT NULL, cause TEXT NOT NULL, sha256 TEXT,
    PRIMARY KEY (until, id)
) STRICT, WITHOUT ROWID;

CREATE TABLE edition_statement (
    until INTEGER NOT NULL, since INTEGER NOT NULL,
    subject TEXT NOT NULL, subject_id INTEGER NOT NULL, attribute TEXT NOT NULL, stated_by TEXT NOT NULL, value TEXT NOT NULL, source TEXT NOT NULL,
    PRIMARY KEY (until, subject, subject_id, attribute, stated_by, value)
) STRICT, WITHOUT ROWID;

CREATE TABLE edition_likeness (
    until INTEGER NOT NULL, since INTEGER NOT NULL,
    first_id INTEGER NOT NULL, second_id INTEGER NOT NULL, kind TEXT NOT NULL, scale REAL NOT NULL, lag_s REAL NOT NULL,
    correlation REAL NOT NULL, band_correlation REAL NOT NULL,
    PRIMARY KEY (until, first_id, second_id)
) STRICT, WITHOUT ROWID;

-- For editions that are not the newest: rows of an id are few, those of a time many.
CREATE INDEX edition_event_id ON edition_event (id, until);
CREATE INDEX edition_station_id ON edition_station (id, until);
CREATE INDEX edition_record_id ON edition_record (id, until);
CREATE INDEX edition_source_file_id ON edition_source_file (id, until);
CREATE INDEX edition_component_id ON edition_component (id, until);
CREATE INDEX edition_component_record ON edition_component (record_id, role, until);

-- What was shown is the first edition, that of the last run.
INSERT INTO edition (id, generation_id, state)
SELECT (SELECT max(id) FROM run), id, 'published' FROM generation WHERE state = 'published';
UPDATE run SET edition_id = (SELECT id FROM edition) WHERE id = (SELECT max(id) FROM run);
INSERT INTO edition_event SELECT 9223372036854775807, e.id, t.id, t.code, t.name, t.origin_time, t.latitude_deg, t.longitude_deg, t.depth_km, t.magnitude, t.magnitude_type, t.primary_id, t.own_origin FROM edition e, event t;
INSERT INTO edition_station SELECT 9223372036854775807, e.id, t.id, t.network, t.code, t.name, t.latitude_deg, t.longitude_deg, t.elevation_m, t.vs30_m_s, t.site_class FROM edition e, station t;
INSERT INTO edition_record SELECT 9223372036854775807, e.id, t.id, t.code, t.event_id, t.station_id, t.instrument, t.siting, t.start_at, t.distance_km, t.epicentral_km, t.hypocentral_km, t.rupture_km, t.jb_km FROM edition e, record t;
INSERT INTO edition_source_file SELECT 9223372036854775807, e.id, t.id, t.sha256, t.path, t.size_bytes, t.modified_at, t.format FROM edition e, source_file t;
INSERT INTO edition_component SELECT 9223372036854775807, e.id, t.id, t.record_id, t.role, t.axis, t.label, t.rank, t.azimuth_deg, t.channel, t.start_at, t.step_s, t.samples, t.unit, t.processing, t.low_cut_hz, t.high_cut_hz, t.header_peak_m_s2, t.warnings, t.source_id, t.source_line, t.motion_id, t.series_id FROM edition e, component t;
INSERT INTO edition_finding SELECT 9223372036854775807, e.id, t.component_id, t.flag, t.value, t.bound, t.words FROM edition e, finding t;
INSERT INTO edition_computed SELECT 9223372036854775807, e.id, t.record_id, t.role, t.computation_id FROM edition e, computed t WHERE t.generation_id = e.generation_id;
INSERT INTO edition_rejection SELECT 9223372036854775807, e.id, t.id, t.path, t.line, t.cause, t.sha256 FROM edition e, rejection t;
INSERT INTO edition_statement SELECT 9223372036854775807, e.id, t.subject, t.subject_id, t.attribute, t.stated_by, t.value, t.source FROM edition e, statement t;
INSERT INTO edition_likeness SELECT 9223372036854775807, e.id, t.first_id, t.second_id, t.kind, t.scale, t.lag_s, t.correlation, t.band_correlation FROM edition e, likeness t;

DROP VIEW ordinate;
DROP INDEX generation_published;
ALTER TABLE generation DROP COLUMN state;

-- One row a period of the published edition. 9.80665 m/s² is g.
CREATE VIEW ordinate AS
SELECT record, component, damping, period_s,
       sd_m,
       sd_m * omega_rad_s AS psv_m_s,
       sd_m * omega_rad_s * omega_rad_s / 9.80665 AS psa_g
FROM (
    SELECT r.code AS record, k.role AS component, d.damping AS damping,
           p.period_s AS period_s, p.omega_rad_s AS omega_rad_s,
           CAST(substr(s.sd_m, 24 * p.position + 1, 24) AS REAL) AS sd_m
    FROM edition e
    JOIN generation g ON g.id = e.generation_id
    JOIN grid_damping d ON d.grid_id = g.grid_id
    JOIN edition_computed k ON k.until > e.id AND k.since <= e.id
    JOIN spectrum s ON s.id = 256 * k.computation_id + d.position
    JOIN edition_record r ON r.until > e.id AND r.since <= e.id AND r.id = k.record_id
    JOIN grid_period p ON p.grid_id = g.grid_id
    WHERE e.state = 'published'
);
