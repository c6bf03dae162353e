-- SD in m of a computation at one damping, as before, with the CRC-32C of the text: a digit
-- that a disk has turned into another one reads as well as the right one. The checksum
-- stands before the text, since what is behind that costs another look at its pages. The
-- view does without it. The function is the program's own, for this step alone.
DROP VIEW ordinate;
CREATE TABLE spectrum_sealed (
    id     INTEGER PRIMARY KEY,
    crc32c INTEGER NOT NULL,
    sd_m   BLOB NOT NULL
) STRICT;
INSERT INTO spectrum_sealed (id, crc32c, sd_m) SELECT id, crc32c(sd_m), sd_m FROM spectrum ORDER BY id;
DROP TABLE spectrum;
ALTER TABLE spectrum_sealed RENAME TO spectrum;

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
