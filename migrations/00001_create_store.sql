-- Times are UTC, RFC 3339 text. NULL means that nobody stated the value.

CREATE TABLE event (
    id             INTEGER PRIMARY KEY,
    code           TEXT NOT NULL UNIQUE,
    name           TEXT,
    origin_time    TEXT,
    latitude_deg   REAL,
    longitude_deg  REAL,
    depth_km       REAL,
    magnitude      REAL,
    magnitude_type TEXT
) STRICT;

CREATE TABLE station (
    id            INTEGER PRIMARY KEY,
    network       TEXT NOT NULL,
    code          TEXT NOT NULL,
    name          TEXT,
    latitude_deg  REAL,
    longitude_deg REAL,
    elevation_m   REAL,
    vs30_m_s      REAL,
    UNIQUE (network, code)
) STRICT;

-- One execution of ingest.
CREATE TABLE run (
    id         INTEGER PRIMARY KEY,
    kind       TEXT NOT NULL,
    program    TEXT NOT NULL,
    started_at TEXT NOT NULL,
    ended_at   TEXT,
    outcome    TEXT NOT NULL CHECK (outcome IN ('running', 'done', 'interrupted', 'failed')),
    counts     TEXT NOT NULL DEFAULT '{}' CHECK (json_valid(counts))
) STRICT;

-- A file whose channels are stored. The content is the identity, the path is
-- where it was first read.
CREATE TABLE source_file (
    id          INTEGER PRIMARY KEY,
    sha256      TEXT NOT NULL UNIQUE,
    path        TEXT NOT NULL,
    size_bytes  INTEGER NOT NULL,
    modified_at TEXT,
    format      TEXT NOT NULL,
    run_id      INTEGER NOT NULL REFERENCES run (id)
) STRICT;
CREATE INDEX source_file_run ON source_file (run_id);

-- A file, or one channel of it, that could not be stored, and why.
CREATE TABLE rejection (
    id     INTEGER PRIMARY KEY,
    path   TEXT NOT NULL,
    line   INTEGER NOT NULL,
    cause  TEXT NOT NULL,
    sha256 TEXT,
    run_id INTEGER NOT NULL REFERENCES run (id),
    UNIQUE (path, line, cause)
) STRICT;
CREATE INDEX rejection_run ON rejection (run_id);

-- One event at one instrument.
CREATE TABLE record (
    id          INTEGER PRIMARY KEY,
    code        TEXT NOT NULL UNIQUE,
    event_id    INTEGER REFERENCES event (id),
    station_id  INTEGER REFERENCES station (id),
    instrument  TEXT NOT NULL,
    siting      TEXT NOT NULL CHECK (siting IN ('free-field', 'ground', 'structure', 'borehole', 'unknown')),
    start_at    TEXT,
    distance_km REAL
) STRICT;
CREATE INDEX record_event ON record (event_id);
CREATE INDEX record_station ON record (station_id);

CREATE TABLE component (
    id              INTEGER PRIMARY KEY,
    record_id       INTEGER NOT NULL REFERENCES record (id),
    role            TEXT NOT NULL,
    axis            TEXT NOT NULL CHECK (axis IN ('horizontal', 'vertical', 'unknown')),
    label           TEXT NOT NULL,
    rank            INTEGER NOT NULL CHECK (rank IN (0, 1, 2)),
    azimuth_deg     REAL,
    channel         TEXT NOT NULL,
    start_at        TEXT,
    step_s          REAL NOT NULL CHECK (step_s > 0),
    samples         INTEGER NOT NULL CHECK (samples > 0),
    unit            TEXT NOT NULL,
    processing      TEXT NOT NULL,
    low_cut_hz      REAL,
    high_cut_hz     REAL,
    header_peak_m_s2 REAL,
    warnings        TEXT NOT NULL DEFAULT '[]' CHECK (json_valid(warnings)),
    source_id       INTEGER NOT NULL REFERENCES source_file (id),
    source_line     INTEGER NOT NULL,
    UNIQUE (record_id, role)
) STRICT;
CREATE INDEX component_source ON component (source_id);

-- The samples in m/s², compressed without loss. The digest is the SHA-256 of
-- the samples as little-endian IEEE 754 doubles.
CREATE TABLE series (
    component_id INTEGER PRIMARY KEY REFERENCES component (id),
    sha256       TEXT NOT NULL,
    data         BLOB NOT NULL
) STRICT;

CREATE TABLE recipe (
    id    INTEGER PRIMARY KEY,
    hash  TEXT NOT NULL UNIQUE,
    name  TEXT NOT NULL,
    steps TEXT NOT NULL CHECK (json_valid(steps))
) STRICT;

CREATE TABLE grid (
    id   INTEGER PRIMARY KEY,
    hash TEXT NOT NULL UNIQUE
) STRICT;

CREATE TABLE grid_period (
    grid_id     INTEGER NOT NULL REFERENCES grid (id),
    position    INTEGER NOT NULL,
    period_s    REAL NOT NULL CHECK (period_s > 0),
    omega_rad_s REAL NOT NULL CHECK (omega_rad_s > 0),
    PRIMARY KEY (grid_id, position)
) STRICT, WITHOUT ROWID;

CREATE TABLE grid_damping (
    grid_id  INTEGER NOT NULL REFERENCES grid (id),
    position INTEGER NOT NULL,
    damping  REAL NOT NULL CHECK (damping >= 0 AND damping < 1),
    PRIMARY KEY (grid_id, position)
) STRICT, WITHOUT ROWID;

-- All that was computed under one recipe, grid and solver. Queries read the
-- published one.
CREATE TABLE generation (
    id        INTEGER PRIMARY KEY,
    recipe_id INTEGER NOT NULL REFERENCES recipe (id),
    grid_id   INTEGER NOT NULL REFERENCES grid (id),
    solver    TEXT NOT NULL,
    state     TEXT NOT NULL CHECK (state IN ('building', 'published', 'superseded')),
    UNIQUE (recipe_id, grid_id, solver)
) STRICT;
CREATE UNIQUE INDEX generation_published ON generation (state) WHERE state = 'published';
CREATE INDEX generation_grid ON generation (grid_id);

-- SD in m at every period of the grid, as ASCII decimals of 24 characters
-- each, in the order of grid_period.position: exact in 17 digits, and any
-- SQLite client can cut one out with substr.
CREATE TABLE spectrum (
    id               INTEGER PRIMARY KEY,
    generation_id    INTEGER NOT NULL REFERENCES generation (id),
    damping_position INTEGER NOT NULL,
    role             TEXT NOT NULL,
    record_id        INTEGER NOT NULL REFERENCES record (id),
    sd_m             BLOB NOT NULL,
    UNIQUE (generation_id, damping_position, role, record_id)
) STRICT;
CREATE INDEX spectrum_record ON spectrum (record_id);

CREATE TABLE measure (
    generation_id INTEGER NOT NULL REFERENCES generation (id),
    record_id     INTEGER NOT NULL REFERENCES record (id),
    role          TEXT NOT NULL,
    name          TEXT NOT NULL,
    value         REAL NOT NULL,
    PRIMARY KEY (record_id, role, generation_id, name)
) STRICT, WITHOUT ROWID;
CREATE INDEX measure_generation ON measure (generation_id);

-- One row a period of the published generation. 9.80665 m/s² is g.
CREATE VIEW ordinate AS
SELECT record, component, damping, period_s,
       sd_m,
       sd_m * omega_rad_s AS psv_m_s,
       sd_m * omega_rad_s * omega_rad_s / 9.80665 AS psa_g
FROM (
    SELECT r.code AS record, s.role AS component, d.damping AS damping,
           p.period_s AS period_s, p.omega_rad_s AS omega_rad_s,
           CAST(substr(s.sd_m, 24 * p.position + 1, 24) AS REAL) AS sd_m
    FROM generation g
    JOIN grid_damping d ON d.grid_id = g.grid_id
    JOIN spectrum s ON s.generation_id = g.id AND s.damping_position = d.position
    JOIN record r ON r.id = s.record_id
    JOIN grid_period p ON p.grid_id = g.grid_id
    WHERE g.state = 'published'
);
