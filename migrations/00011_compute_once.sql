-- Samples by their digest, so that they outlive the component that brought them and are
-- held once.
CREATE TABLE sample_series (
    id     INTEGER PRIMARY KEY,
    sha256 TEXT NOT NULL UNIQUE,
    data   BLOB NOT NULL
) STRICT;
INSERT OR IGNORE INTO sample_series (sha256, data) SELECT sha256, data FROM series ORDER BY component_id;
ALTER TABLE component ADD COLUMN series_id INTEGER REFERENCES sample_series (id);
UPDATE component SET series_id = (SELECT n.id FROM series s JOIN sample_series n ON n.sha256 = s.sha256 WHERE s.component_id = component.id);
DROP TABLE series;
ALTER TABLE sample_series RENAME TO series;
CREATE INDEX component_series ON component (series_id);

-- What was computed once, of a component or of a pair, in a generation. inputs says of
-- what: all that it depends on beside the generation, so that equal inputs need not be
-- computed again, and nothing that is here ever changes. failure is why it cannot be
-- computed. An id is never given twice, since inputs of pairs name those of their
-- components.
CREATE TABLE computation (
    id            INTEGER PRIMARY KEY AUTOINCREMENT,
    generation_id INTEGER NOT NULL REFERENCES generation (id),
    inputs        TEXT NOT NULL,
    failure       TEXT,
    UNIQUE (generation_id, inputs)
) STRICT;

-- Which computation is that of a record's role, of a component or of a rotated pair.
CREATE TABLE computed (
    record_id      INTEGER NOT NULL REFERENCES record (id),
    role           TEXT NOT NULL,
    generation_id  INTEGER NOT NULL REFERENCES generation (id),
    computation_id INTEGER NOT NULL REFERENCES computation (id),
    PRIMARY KEY (record_id, role, generation_id)
) STRICT, WITHOUT ROWID;
CREATE INDEX computed_role ON computed (generation_id, role, record_id, computation_id);
CREATE INDEX computed_computation ON computed (computation_id);

-- The inputs of components, and the failures, which have the inputs too.
CREATE VIEW component_inputs AS
SELECT c.id AS component_id, c.record_id, c.role,
       coalesce(s.sha256, 'lost ' || c.id) || printf(' %!.17g ', c.step_s)
           || iif(c.low_cut_hz IS NULL, '-', printf('%!.17g', c.low_cut_hz)) || ' '
           || iif(c.high_cut_hz IS NULL, '-', printf('%!.17g', c.high_cut_hz)) || ' ' || c.processing AS inputs
FROM component c LEFT JOIN series s ON s.id = c.series_id;

-- Those of what is taken of the horizontals of a record over all directions.
CREATE VIEW pair_inputs AS
SELECT a.record_id, r.column1 AS role, x.generation_id,
       r.column1 || ' ' || x.computation_id || ' ' || y.computation_id || ' '
           || iif(a.azimuth_deg IS NULL, '-', printf('%!.17g', a.azimuth_deg)) || ' '
           || iif(b.azimuth_deg IS NULL, '-', printf('%!.17g', b.azimuth_deg)) || ' '
           || coalesce(a.start_at, '-') || ' ' || coalesce(b.start_at, '-') AS inputs
FROM component a JOIN component b ON b.record_id = a.record_id AND a.role = 'h1' AND b.role = 'h2'
JOIN computed x ON x.record_id = a.record_id AND x.role = 'h1'
JOIN computed y ON y.record_id = a.record_id AND y.role = 'h2' AND y.generation_id = x.generation_id
CROSS JOIN (VALUES ('rotd50'), ('rotd100')) r;

INSERT OR IGNORE INTO computation (generation_id, inputs)
SELECT s.generation_id, i.inputs FROM component_inputs i JOIN spectrum s ON s.record_id = i.record_id AND s.role = i.role AND s.damping_position = 0;
INSERT OR IGNORE INTO computation (generation_id, inputs, failure)
SELECT f.generation_id, i.inputs, f.reason FROM component_inputs i JOIN failure f ON f.record_id = i.record_id AND f.role = i.role;
INSERT INTO computed (record_id, role, generation_id, computation_id)
SELECT i.record_id, i.role, k.generation_id, k.id FROM component_inputs i JOIN computation k ON k.inputs = i.inputs
WHERE EXISTS (SELECT 1 FROM spectrum s WHERE s.record_id = i.record_id AND s.role = i.role AND s.generation_id = k.generation_id)
   OR EXISTS (SELECT 1 FROM failure f WHERE f.record_id = i.record_id AND f.role = i.role AND f.generation_id = k.generation_id);
INSERT OR IGNORE INTO computation (generation_id, inputs)
SELECT s.generation_id, i.inputs FROM pair_inputs i JOIN spectrum s ON s.record_id = i.record_id AND s.role = i.role
    AND s.generation_id = i.generation_id AND s.damping_position = 0;
INSERT INTO computed (record_id, role, generation_id, computation_id)
SELECT i.record_id, i.role, k.generation_id, k.id FROM pair_inputs i JOIN computation k ON k.generation_id = i.generation_id AND k.inputs = i.inputs
WHERE EXISTS (SELECT 1 FROM spectrum s WHERE s.record_id = i.record_id AND s.role = i.role AND s.generation_id = k.generation_id);

-- SD in m of a computation at one damping, 256 times the computation's id and the position
-- of the damping in the grid, at every period of the grid: ASCII decimals of 24 characters
-- each, exact in 17 digits; any SQLite client can cut one out with substr.
CREATE TABLE spectrum_of (
    id   INTEGER PRIMARY KEY,
    sd_m BLOB NOT NULL
) STRICT;
INSERT OR IGNORE INTO spectrum_of (id, sd_m)
SELECT 256 * k.computation_id + s.damping_position, s.sd_m FROM spectrum s
JOIN computed k ON k.record_id = s.record_id AND k.role = s.role AND k.generation_id = s.generation_id ORDER BY 1;

CREATE TABLE measure_of (
    computation_id INTEGER NOT NULL REFERENCES computation (id),
    name           TEXT NOT NULL,
    value          REAL NOT NULL,
    PRIMARY KEY (computation_id, name)
) STRICT, WITHOUT ROWID;
INSERT OR IGNORE INTO measure_of (computation_id, name, value)
SELECT k.computation_id, m.name, m.value FROM measure m
JOIN computed k ON k.record_id = m.record_id AND k.role = m.role AND k.generation_id = m.generation_id;

-- What the recipe did to a component before its spectrum was computed; see the table of
-- before.
CREATE TABLE conditioning_of (
    computation_id INTEGER PRIMARY KEY REFERENCES computation (id),
    step_s         REAL NOT NULL CHECK (step_s > 0),
    samples        INTEGER NOT NULL CHECK (samples > 0),
    lead_s         REAL NOT NULL,
    low_cut_hz     REAL CHECK (low_cut_hz > 0),
    high_cut_hz    REAL CHECK (high_cut_hz > 0),
    long_s         REAL CHECK (long_s > 0)
) STRICT;
INSERT OR IGNORE INTO conditioning_of
SELECT k.computation_id, c.step_s, c.samples, c.lead_s, c.low_cut_hz, c.high_cut_hz, c.long_s FROM conditioning c
JOIN computed k ON k.record_id = c.record_id AND k.role = c.role AND k.generation_id = c.generation_id;

CREATE TABLE conditioned_finding_of (
    computation_id INTEGER NOT NULL REFERENCES computation (id),
    flag           TEXT NOT NULL,
    value          REAL NOT NULL,
    bound          REAL NOT NULL,
    words          TEXT NOT NULL,
    PRIMARY KEY (computation_id, flag)
) STRICT, WITHOUT ROWID;
INSERT OR IGNORE INTO conditioned_finding_of
SELECT k.computation_id, f.flag, f.value, f.bound, f.words FROM conditioned_finding f
JOIN computed k ON k.record_id = f.record_id AND k.role = f.role AND k.generation_id = f.generation_id;

-- All of a block's SD of one computation; see the table of before.
CREATE TABLE off_grid_of (
    computation_id INTEGER NOT NULL REFERENCES computation (id),
    block_id       INTEGER NOT NULL REFERENCES off_grid_block (id),
    sd_m           BLOB NOT NULL,
    PRIMARY KEY (computation_id, block_id)
) STRICT, WITHOUT ROWID;
INSERT OR IGNORE INTO off_grid_of
SELECT k.computation_id, o.block_id, o.sd_m FROM off_grid o
JOIN computed k ON k.record_id = o.record_id AND k.role = o.role AND k.generation_id = o.generation_id;

DROP VIEW ordinate;
DROP TABLE spectrum;
DROP TABLE measure;
DROP TABLE conditioned_finding;
DROP TABLE conditioning;
DROP TABLE failure;
DROP TABLE off_grid;
ALTER TABLE spectrum_of RENAME TO spectrum;
ALTER TABLE measure_of RENAME TO measure;
ALTER TABLE conditioning_of RENAME TO conditioning;
ALTER TABLE conditioned_finding_of RENAME TO conditioned_finding;
CREATE INDEX conditioned_finding_flag ON conditioned_finding (flag);
ALTER TABLE off_grid_of RENAME TO off_grid;

CREATE VIEW ordinate AS
SELECT record, component, damping, period_s,
       sd_m,
       sd_m * omega_rad_s AS psv_m_s,
       sd_m * omega_rad_s * omega_rad_s / 9.80665 AS psa_g
FROM (
    SELECT r.code AS record, k.role AS component, d.damping AS damping,
           p.period_s AS period_s, p.omega_rad_s AS omega_rad_s,
           CAST(substr(s.sd_m, 24 * p.position + 1, 24) AS REAL) AS sd_m
    FROM generation g
    JOIN grid_damping d ON d.grid_id = g.grid_id
    JOIN computed k ON k.generation_id = g.id
    JOIN spectrum s ON s.id = 256 * k.computation_id + d.position
    JOIN record r ON r.id = k.record_id
    JOIN grid_period p ON p.grid_id = g.grid_id
    WHERE g.state = 'published'
);
