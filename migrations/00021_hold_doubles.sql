-- SD in m of a computation at one damping, of all periods of the grid, become doubles of IEEE
-- 754, the most significant byte first: hex() shows sign, exponent and mantissa in this order.
-- The decimals of 24 characters that stood here are read by the program's own functions, for
-- this step alone, to the doubles of which they were written. What is not what was stored
-- stays so: none of its ordinates is there any more, and no checksum is -1.
UPDATE spectrum SET (crc32c, sd_m) = (
    -- The limit, which is none, keeps sd from being computed wherever it is named.
    SELECT iif(sd IS NULL, -1, crc32c(sd)), coalesce(sd, x'') FROM (
        SELECT iif(crc32c(sd_m) = crc32c, doubles_of_decimals(sd_m), NULL) AS sd LIMIT -1 OFFSET 0
    )
);

-- Of each exponent that a double which is not negative can have, as it is stored: the leading
-- bit, which is not, and what the 53 bits, as a whole number, are to be multiplied by, 2 to
-- the exponent less 1075. 0 is that of subnormal numbers, whose leading bit is none. All that
-- is computed here is exact.
CREATE TABLE power (
    exponent INTEGER PRIMARY KEY,
    leading  INTEGER NOT NULL,
    factor   REAL NOT NULL
) STRICT;
INSERT INTO power (exponent, leading, factor)
WITH RECURSIVE
    down (exponent, factor) AS (VALUES (1075, 1.0) UNION ALL SELECT exponent - 1, factor / 2 FROM down WHERE exponent > 1),
    up (exponent, factor) AS (VALUES (1076, 2.0) UNION ALL SELECT exponent + 1, factor * 2 FROM up WHERE exponent < 2046)
SELECT exponent, 1 << 52, factor FROM down UNION ALL
SELECT exponent, 1 << 52, factor FROM up UNION ALL
SELECT 0, 0, factor FROM down WHERE exponent = 1;

DROP VIEW ordinate;
-- One row a period of the published edition. 9.80665 m/s² is g. A byte is its place among all
-- bytes. Eight are a whole number, << and | being done from left to right; its lower 52 bits
-- are those of the mantissa, and products with powers of two are exact.
CREATE VIEW ordinate AS
SELECT record, component, damping, period_s,
       sd_m,
       sd_m * omega_rad_s AS psv_m_s,
       sd_m * omega_rad_s * omega_rad_s / 9.80665 AS psa_g
FROM (
    SELECT r.code AS record, k.role AS component, d.damping AS damping,
           p.period_s AS period_s, p.omega_rad_s AS omega_rad_s,
           (SELECT ((bits & 0xFFFFFFFFFFFFF) + leading) * factor FROM (
                SELECT (instr(octets, substr(s.sd_m, 8 * p.position + 1, 1)) - 1) << 8 |
                       (instr(octets, substr(s.sd_m, 8 * p.position + 2, 1)) - 1) << 8 |
                       (instr(octets, substr(s.sd_m, 8 * p.position + 3, 1)) - 1) << 8 |
                       (instr(octets, substr(s.sd_m, 8 * p.position + 4, 1)) - 1) << 8 |
                       (instr(octets, substr(s.sd_m, 8 * p.position + 5, 1)) - 1) << 8 |
                       (instr(octets, substr(s.sd_m, 8 * p.position + 6, 1)) - 1) << 8 |
                       (instr(octets, substr(s.sd_m, 8 * p.position + 7, 1)) - 1) << 8 |
                       (instr(octets, substr(s.sd_m, 8 * p.position + 8, 1)) - 1) AS bits
            ) JOIN power ON exponent = bits >> 52) AS sd_m
    FROM (SELECT x'000102030405060708090A0B0C0D0E0F101112131415161718191A1B1C1D1E1F202122232425262728292A2B2C2D2E2F303132333435363738393A3B3C3D3E3F404142434445464748494A4B4C4D4E4F505152535455565758595A5B5C5D5E5F606162636465666768696A6B6C6D6E6F707172737475767778797A7B7C7D7E7F808182838485868788898A8B8C8D8E8F909192939495969798999A9B9C9D9E9FA0A1A2A3A4A5A6A7A8A9AAABACADAEAFB0B1B2B3B4B5B6B7B8B9BABBBCBDBEBFC0C1C2C3C4C5C6C7C8C9CACBCCCDCECFD0D1D2D3D4D5D6D7D8D9DADBDCDDDEDFE0E1E2E3E4E5E6E7E8E9EAEBECEDEEEFF0F1F2F3F4F5F6F7F8F9FAFBFCFDFEFF' AS octets)
    CROSS JOIN edition e
    JOIN generation g ON g.id = e.generation_id
    JOIN grid_damping d ON d.grid_id = g.grid_id
    JOIN edition_computed k ON k.until > e.id AND k.since <= e.id
    JOIN spectrum s ON s.id = 256 * k.computation_id + d.position
    JOIN edition_record r ON r.until > e.id AND r.since <= e.id AND r.id = k.record_id
    JOIN grid_period p ON p.grid_id = g.grid_id
    WHERE e.state = 'published' AND length(s.sd_m) >= 8 * (p.position + 1)
);
