-- Spectra move into tiles of up to 63 computations of a generation, period by period, so that who
-- asks for some periods of all motions reads no others.
DROP VIEW ordinate;
ALTER TABLE spectrum RENAME TO spectrum_alone;

-- Where the spectra of a computation are; the checksum is of the three.
CREATE TABLE spectrum (
    computation_id INTEGER PRIMARY KEY,
    tile_id        INTEGER NOT NULL,
    place          INTEGER NOT NULL,
    crc32c         INTEGER NOT NULL
) STRICT;

-- Spectra of as many motions, each in a place from 0 on, that were stored together.
CREATE TABLE tile (
    id      INTEGER PRIMARY KEY,
    motions INTEGER NOT NULL
) STRICT;

-- Eight periods of a tile at one damping, of the last part those that are left: of each period the
-- SD in m of all motions, doubles of IEEE 754, the most significant byte first. The id is 2^20
-- times the tile's, 2^12 times the damping's position, and the part's number. Of 63 motions a row
-- fills a page of 4 kB.
CREATE TABLE tile_part (
    id     INTEGER PRIMARY KEY,
    sd_m   BLOB NOT NULL,
    crc32c INTEGER NOT NULL
) STRICT;

-- Computations in the order of their numbers, 63 a tile. Those without their first spectrum count
-- as lost, and are computed again.
INSERT INTO spectrum (computation_id, tile_id, place, crc32c)
WITH stored (id, generation_id) AS MATERIALIZED (
    SELECT x.id, x.generation_id FROM computation x WHERE EXISTS (SELECT 1 FROM spectrum_alone a WHERE a.id = 256 * x.id)
), first (generation_id, tile) AS MATERIALIZED (
    SELECT generation_id, 1 + coalesce(sum((n + 62) / 63) OVER (ORDER BY generation_id ROWS BETWEEN UNBOUNDED PRECEDING AND 1 PRECEDING), 0)
    FROM (SELECT generation_id, count(*) AS n FROM stored GROUP BY generation_id)
)
SELECT id, tile, place, crc32c(id, tile, place) FROM (
    SELECT n.id AS id, f.tile + n.position / 63 AS tile, n.position % 63 AS place
    FROM (SELECT id, generation_id, row_number() OVER (PARTITION BY generation_id ORDER BY id) - 1 AS position FROM stored) n
    JOIN first f ON f.generation_id = n.generation_id
);
CREATE UNIQUE INDEX spectrum_in_tile ON spectrum (tile_id, place);
INSERT INTO tile (id, motions) SELECT tile_id, count(*) FROM spectrum GROUP BY tile_id;

-- The program's own function makes a damping of a tile of spectra, for this step alone: of those
-- that are not what was stored, which are given as NULL, all bits of the ordinates are set. The
-- limits, which are none, keep what they limit from being computed wherever it is named.
INSERT INTO tile_part (id, sd_m, crc32c)
SELECT id, sd_m, crc32c(sd_m) FROM (
    SELECT (w.tile << 20) + (w.damping << 12) + (p.position >> 3) AS id, substr(w.sd_m, 8 * w.motions * p.position + 1, 64 * w.motions) AS sd_m
    FROM (
        SELECT t.id AS tile, t.motions AS motions, t.grid_id AS grid_id, d.position AS damping, (
            SELECT tiled_spectra(s.place, t.motions, t.periods, iif(a.crc32c = crc32c(a.sd_m) AND length(a.sd_m) = 8 * t.periods, a.sd_m, NULL))
            FROM spectrum s LEFT JOIN spectrum_alone a ON a.id = 256 * s.computation_id + d.position WHERE s.tile_id = t.id
        ) AS sd_m
        FROM (
            SELECT o.id AS id, o.motions AS motions, g.grid_id AS grid_id, (SELECT count(*) FROM grid_period p WHERE p.grid_id = g.grid_id) AS periods
            FROM tile o JOIN spectrum s ON s.tile_id = o.id AND s.place = 0 JOIN computation x ON x.id = s.computation_id JOIN generation g ON g.id = x.generation_id
            ORDER BY o.id LIMIT -1 OFFSET 0
        ) t CROSS JOIN grid_damping d ON d.grid_id = t.grid_id
        LIMIT -1 OFFSET 0
    ) w CROSS JOIN grid_period p ON p.grid_id = w.grid_id AND p.position % 8 = 0
    LIMIT -1 OFFSET 0
);
DROP TABLE spectrum_alone;

-- One row a period of the published edition, as before. 9.80665 m/s² is g. A byte is its place
-- among all bytes. Eight are a whole number, << and | being done from left to right; its lower 52
-- bits are those of the mantissa, and products with powers of two are exact. What is asked for of
-- records is looked at before periods and parts are (CROSS JOIN).
CREATE VIEW ordinate AS
SELECT record, component, damping, period_s,
       sd_m,
       sd_m * omega_rad_s AS psv_m_s,
       sd_m * omega_rad_s * omega_rad_s / 9.80665 AS psa_g
FROM (
    SELECT record, component, damping, period_s, omega_rad_s,
           (SELECT ((bits & 0xFFFFFFFFFFFFF) + leading) * factor FROM (
                SELECT (instr(octets, substr(double, 1, 1)) - 1) << 8 |
                       (instr(octets, substr(double, 2, 1)) - 1) << 8 |
                       (instr(octets, substr(double, 3, 1)) - 1) << 8 |
                       (instr(octets, substr(double, 4, 1)) - 1) << 8 |
                       (instr(octets, substr(double, 5, 1)) - 1) << 8 |
                       (instr(octets, substr(double, 6, 1)) - 1) << 8 |
                       (instr(octets, substr(double, 7, 1)) - 1) << 8 |
                       (instr(octets, substr(double, 8, 1)) - 1) AS bits
            ) JOIN power ON exponent = bits >> 52) AS sd_m
    FROM (
        SELECT r.code AS record, k.role AS component, d.damping AS damping,
               p.period_s AS period_s, p.omega_rad_s AS omega_rad_s, octets,
               substr(w.sd_m, 8 * ((p.position & 7) * t.motions + s.place) + 1, 8) AS double
        FROM (SELECT x'000102030405060708090A0B0C0D0E0F101112131415161718191A1B1C1D1E1F202122232425262728292A2B2C2D2E2F303132333435363738393A3B3C3D3E3F404142434445464748494A4B4C4D4E4F505152535455565758595A5B5C5D5E5F606162636465666768696A6B6C6D6E6F707172737475767778797A7B7C7D7E7F808182838485868788898A8B8C8D8E8F909192939495969798999A9B9C9D9E9FA0A1A2A3A4A5A6A7A8A9AAABACADAEAFB0B1B2B3B4B5B6B7B8B9BABBBCBDBEBFC0C1C2C3C4C5C6C7C8C9CACBCCCDCECFD0D1D2D3D4D5D6D7D8D9DADBDCDDDEDFE0E1E2E3E4E5E6E7E8E9EAEBECEDEEEFF0F1F2F3F4F5F6F7F8F9FAFBFCFDFEFF' AS octets)
        CROSS JOIN edition e
        JOIN generation g ON g.id = e.generation_id
        JOIN grid_damping d ON d.grid_id = g.grid_id
        JOIN edition_computed k ON k.until > e.id AND k.since <= e.id
        JOIN spectrum s ON s.computation_id = k.computation_id
        JOIN tile t ON t.id = s.tile_id AND t.motions > s.place
        JOIN edition_record r ON r.until > e.id AND r.since <= e.id AND r.id = k.record_id
        CROSS JOIN grid_period p ON p.grid_id = g.grid_id
        CROSS JOIN tile_part w ON w.id = (s.tile_id << 20) + (d.position << 12) + (p.position >> 3)
        WHERE e.state = 'published'
    )
    WHERE length(double) = 8 AND double <> x'FFFFFFFFFFFFFFFF'
);
