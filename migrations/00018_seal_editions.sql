-- What an edition shows, so that a question notices when a disk has changed a value, lost a
-- row, or shows one too many: the rows of each table, and for each column the sum of the
-- CRC-32C of its values, each behind the key of its row, as a JSON array. Part by part of
-- tables that are read so: of findings by flag, of what is computed by role. Beside them
-- stand the generation, and by role or flag what computations have of each kind.
CREATE TABLE edition_seal (
    edition_id INTEGER NOT NULL REFERENCES edition (id),
    name       TEXT NOT NULL,
    part       TEXT NOT NULL,
    rows       INTEGER NOT NULL,
    sums       TEXT NOT NULL,
    PRIMARY KEY (edition_id, name, part)
) STRICT, WITHOUT ROWID;

-- What a computation has beside its spectra: sums of the CRC-32C of its rows, kind by kind, 0
-- where there are none. The functions are the program's own.
CREATE TABLE computation_seal (
    computation_id INTEGER PRIMARY KEY REFERENCES computation (id),
    peaks          INTEGER NOT NULL,
    measures       INTEGER NOT NULL,
    conditioning   INTEGER NOT NULL,
    findings       INTEGER NOT NULL,
    failure        INTEGER NOT NULL
) STRICT;
INSERT INTO computation_seal (computation_id, peaks, measures, conditioning, findings, failure)
SELECT x.id,
    (SELECT coalesce(sum(crc32c(computation_id, name, value)), 0) FROM measure WHERE computation_id = x.id AND name IN ('pga_m_s2', 'pgv_m_s', 'pgd_m')) AS peaks,
    (SELECT coalesce(sum(crc32c(computation_id, name, value)), 0) FROM measure WHERE computation_id = x.id AND name NOT IN ('pga_m_s2', 'pgv_m_s', 'pgd_m')) AS measures,
    (SELECT coalesce(sum(crc32c(computation_id, step_s, samples, lead_s, low_cut_hz, high_cut_hz, long_s)), 0) FROM conditioning WHERE computation_id = x.id) AS conditioning,
    (SELECT coalesce(sum(crc32c(computation_id, flag, value, bound, words)), 0) FROM conditioned_finding WHERE computation_id = x.id) AS findings,
    iif(x.failure IS NULL, 0, crc32c(x.id, x.failure)) AS failure FROM computation x ORDER BY 1;

INSERT INTO edition_seal SELECT e.id, 'component', '', count(*),
    column_sums(2, t.record_id, t.role, t.since, t.id, t.record_id, t.role, t.axis, t.label, t.rank, t.azimuth_deg, t.channel, t.start_at, t.step_s, t.samples, t.unit, t.processing, t.low_cut_hz, t.high_cut_hz, t.header_peak_m_s2, t.warnings, t.source_id, t.source_line, t.motion_id, t.series_id)
    FROM edition e JOIN edition_component t ON t.until > e.id AND t.since <= e.id GROUP BY e.id;
INSERT INTO edition_seal SELECT e.id, 'computed', t.role, count(*),
    column_sums(2, t.role, t.record_id, t.since, t.record_id, t.role, t.computation_id)
    FROM edition e JOIN edition_computed t ON t.until > e.id AND t.since <= e.id GROUP BY e.id, t.role;
INSERT INTO edition_seal SELECT e.id, 'conditioning', k.role, count(*), json_array(sum(crc32c(k.record_id, k.role, s.conditioning))) FROM edition e JOIN edition_computed k ON k.until > e.id AND k.since <= e.id
    JOIN computation_seal s ON s.computation_id = k.computation_id WHERE s.conditioning <> 0 GROUP BY e.id, k.role;
INSERT INTO edition_seal SELECT e.id, 'event', '', count(*),
    column_sums(1, t.id, t.since, t.id, t.code, t.name, t.origin_time, t.latitude_deg, t.longitude_deg, t.depth_km, t.magnitude, t.magnitude_type, t.primary_id, t.own_origin)
    FROM edition e JOIN edition_event t ON t.until > e.id AND t.since <= e.id GROUP BY e.id;
INSERT INTO edition_seal SELECT e.id, 'failure', k.role, count(*), json_array(sum(crc32c(k.record_id, k.role, s.failure))) FROM edition e JOIN edition_computed k ON k.until > e.id AND k.since <= e.id
    JOIN computation_seal s ON s.computation_id = k.computation_id WHERE s.failure <> 0 GROUP BY e.id, k.role;
INSERT INTO edition_seal SELECT e.id, 'finding', t.flag, count(*),
    column_sums(2, t.component_id, t.flag, t.since, t.component_id, t.flag, t.value, t.bound, t.words)
    FROM edition e JOIN edition_finding t ON t.until > e.id AND t.since <= e.id GROUP BY e.id, t.flag;
INSERT INTO edition_seal SELECT e.id, 'findings', k.role, count(*), json_array(sum(crc32c(k.record_id, k.role, s.findings))) FROM edition e JOIN edition_computed k ON k.until > e.id AND k.since <= e.id
    JOIN computation_seal s ON s.computation_id = k.computation_id WHERE s.findings <> 0 GROUP BY e.id, k.role;
INSERT INTO edition_seal SELECT e.id, 'flags', f.flag, count(*), json_array(sum(crc32c(k.record_id, k.role, f.flag))) FROM edition e JOIN edition_computed k ON k.until > e.id AND k.since <= e.id
    JOIN conditioned_finding f ON f.computation_id = k.computation_id GROUP BY e.id, f.flag;
INSERT INTO edition_seal SELECT e.id, 'generation', '', 1, json_array(crc32c(g.id, r.name, r.hash, d.hash)) FROM edition e JOIN generation g ON g.id = e.generation_id JOIN recipe r ON r.id = g.recipe_id JOIN grid d ON d.id = g.grid_id;
INSERT INTO edition_seal SELECT e.id, 'likeness', '', count(*),
    column_sums(2, t.first_id, t.second_id, t.since, t.first_id, t.second_id, t.kind, t.scale, t.lag_s, t.correlation, t.band_correlation)
    FROM edition e JOIN edition_likeness t ON t.until > e.id AND t.since <= e.id GROUP BY e.id;
INSERT INTO edition_seal SELECT e.id, 'measures', k.role, count(*), json_array(sum(crc32c(k.record_id, k.role, s.measures))) FROM edition e JOIN edition_computed k ON k.until > e.id AND k.since <= e.id
    JOIN computation_seal s ON s.computation_id = k.computation_id WHERE s.measures <> 0 GROUP BY e.id, k.role;
INSERT INTO edition_seal SELECT e.id, 'peaks', k.role, count(*), json_array(sum(crc32c(k.record_id, k.role, s.peaks))) FROM edition e JOIN edition_computed k ON k.until > e.id AND k.since <= e.id
    JOIN computation_seal s ON s.computation_id = k.computation_id WHERE s.peaks <> 0 GROUP BY e.id, k.role;
INSERT INTO edition_seal SELECT e.id, 'record', '', count(*),
    column_sums(1, t.id, t.since, t.id, t.code, t.event_id, t.station_id, t.instrument, t.siting, t.start_at, t.distance_km, t.epicentral_km, t.hypocentral_km, t.rupture_km, t.jb_km)
    FROM edition e JOIN edition_record t ON t.until > e.id AND t.since <= e.id GROUP BY e.id;
INSERT INTO edition_seal SELECT e.id, 'rejection', '', count(*),
    column_sums(1, t.id, t.since, t.id, t.path, t.line, t.cause, t.sha256)
    FROM edition e JOIN edition_rejection t ON t.until > e.id AND t.since <= e.id GROUP BY e.id;
INSERT INTO edition_seal SELECT e.id, 'source_file', '', count(*),
    column_sums(1, t.id, t.since, t.id, t.sha256, t.path, t.size_bytes, t.modified_at, t.format)
    FROM edition e JOIN edition_source_file t ON t.until > e.id AND t.since <= e.id GROUP BY e.id;
INSERT INTO edition_seal SELECT e.id, 'statement', '', count(*),
    column_sums(5, t.subject, t.subject_id, t.attribute, t.stated_by, t.value, t.since, t.subject, t.subject_id, t.attribute, t.stated_by, t.value, t.source)
    FROM edition e JOIN edition_statement t ON t.until > e.id AND t.since <= e.id GROUP BY e.id;
INSERT INTO edition_seal SELECT e.id, 'station', '', count(*),
    column_sums(1, t.id, t.since, t.id, t.network, t.code, t.name, t.latitude_deg, t.longitude_deg, t.elevation_m, t.vs30_m_s, t.site_class)
    FROM edition e JOIN edition_station t ON t.until > e.id AND t.since <= e.id GROUP BY e.id;
