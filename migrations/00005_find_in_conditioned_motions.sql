-- What is found in a component's motion as the recipe of a generation left it, like
-- finding of the motion as it was delivered. A component without a row in conditioning
-- was left as it was delivered, and has none here.
CREATE TABLE conditioned_finding (
    generation_id INTEGER NOT NULL REFERENCES generation (id),
    record_id     INTEGER NOT NULL REFERENCES record (id),
    role          TEXT NOT NULL,
    flag          TEXT NOT NULL,
    value         REAL NOT NULL,
    bound         REAL NOT NULL,
    words         TEXT NOT NULL,
    PRIMARY KEY (record_id, role, generation_id, flag)
) STRICT, WITHOUT ROWID;
CREATE INDEX conditioned_finding_flag ON conditioned_finding (generation_id, flag);

-- Of generations from before nobody measured it: a high-pass filter counts as having
-- mended everything, other steps nothing.
INSERT INTO conditioned_finding (generation_id, record_id, role, flag, value, bound, words)
SELECT k.generation_id, k.record_id, k.role, f.flag, f.value, f.bound, f.words
FROM conditioning k
JOIN component c ON c.record_id = k.record_id AND c.role = k.role
JOIN finding f ON f.component_id = c.id
WHERE k.long_s IS NULL AND f.flag IN ('offset', 'baseline_step', 'drift');
