-- The components on which the recipe of a generation cannot be carried out, and why: they
-- have no spectra there, and are not tried again.
CREATE TABLE failure (
    generation_id INTEGER NOT NULL REFERENCES generation (id),
    record_id     INTEGER NOT NULL REFERENCES record (id),
    role          TEXT NOT NULL,
    reason        TEXT NOT NULL,
    PRIMARY KEY (record_id, role, generation_id)
) STRICT, WITHOUT ROWID;
CREATE INDEX failure_generation ON failure (generation_id);
