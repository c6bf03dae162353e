-- What the recipe of a generation did to a component before its spectrum was computed:
-- the motion's step, length and lead over the component's first sample, and the corners
-- of the filters that the recipe applied, NULL for none; long_s is the longest period that
-- its high-pass filter leaves, NULL for no limit. A component that was left as it
-- was delivered has no row.
CREATE TABLE conditioning (
    generation_id INTEGER NOT NULL REFERENCES generation (id),
    record_id     INTEGER NOT NULL REFERENCES record (id),
    role          TEXT NOT NULL,
    step_s        REAL NOT NULL CHECK (step_s > 0),
    samples       INTEGER NOT NULL CHECK (samples > 0),
    lead_s        REAL NOT NULL,
    low_cut_hz    REAL CHECK (low_cut_hz > 0),
    high_cut_hz   REAL CHECK (high_cut_hz > 0),
    long_s        REAL CHECK (long_s > 0),
    PRIMARY KEY (record_id, role, generation_id)
) STRICT, WITHOUT ROWID;
CREATE INDEX conditioning_generation ON conditioning (generation_id);

-- The canonical form of a recipe became one with its name and states.
UPDATE recipe SET steps = '{"version":1,"name":"as-delivered","states":[],"steps":[]}', hash = '89047d45531101582ee5d208847608a5ad1dfba234a4d8c280f7ce1f7086215c' WHERE name = 'as-delivered';

-- What is wrong with a component as it was delivered: the value measured and the bound
-- that it is beyond, both without unit or in s.
CREATE TABLE finding (
    component_id INTEGER NOT NULL REFERENCES component (id),
    flag         TEXT NOT NULL,
    value        REAL NOT NULL,
    bound        REAL NOT NULL,
    words        TEXT NOT NULL,
    PRIMARY KEY (component_id, flag)
) STRICT, WITHOUT ROWID;
CREATE INDEX finding_flag ON finding (flag);
