-- A generation whose spectra are older than the measures of intensity has none of these,
-- and would not get them, since nothing is computed twice. It is that of an earlier solver.
UPDATE generation SET solver = solver || ', without measures of intensity'
WHERE EXISTS (SELECT 1 FROM computed d WHERE d.generation_id = generation.id AND d.role IN ('h1', 'h2', 'v'))
  AND NOT EXISTS (SELECT 1 FROM computed d JOIN measure m ON m.computation_id = d.computation_id
                  WHERE d.generation_id = generation.id AND m.name = 'arias_m_s');
