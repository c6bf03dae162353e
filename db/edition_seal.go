package db

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"strings"
)

// sealedTable is a table of editions with its columns, that of since first, in the order of
// their sums. Rows are known by their key. What questions read part by part is sealed so: by
// the values of a column.
type sealedTable struct {
	columns []string
	key     []string
	part    string
}

// The columns stand here, and not in what SQLite says of the tables, so that they are those
// of the sums that are there; TestSealsHaveAllColumns compares.
var sealedTables = map[string]sealedTable{
	"event": {words(`since id code name origin_time latitude_deg longitude_deg depth_km magnitude magnitude_type primary_id own_origin`),
		words(`id`), ``},
	"station": {words(`since id network code name latitude_deg longitude_deg elevation_m vs30_m_s site_class`), words(`id`), ``},
	"record": {words(`since id code event_id station_id instrument siting start_at distance_km epicentral_km hypocentral_km rupture_km jb_km`),
		words(`id`), ``},
	"source_file": {words(`since id sha256 path size_bytes modified_at format`), words(`id`), ``},
	"component": {words(`since id record_id role axis label rank azimuth_deg channel start_at step_s samples unit processing low_cut_hz high_cut_hz
		header_peak_m_s2 warnings source_id source_line motion_id series_id`), words(`record_id role`), ``},
	"finding":   {words(`since component_id flag value bound words`), words(`component_id flag`), `flag`},
	"computed":  {words(`since record_id role computation_id`), words(`role record_id`), `role`},
	"rejection": {words(`since id path line cause sha256`), words(`id`), ``},
	"statement": {words(`since subject subject_id attribute stated_by value source`), words(`subject subject_id attribute stated_by value`), ``},
	"likeness":  {words(`since first_id second_id kind scale lag_s correlation band_correlation`), words(`first_id second_id`), ``},
}

func words(text string) []string { return strings.Fields(text) }

// What is sealed beside the tables: by which generation an edition is computed, and, in
// parts by role or flag, what its computations have of each kind. These have one sum, of
// checksums of the record, the role and the computation's own.
const sealedGeneration = "generation"

// The kinds of what a computation has, as columns of computation_seal.
const (
	sealedPeaks        = "peaks"
	sealedMeasures     = "measures" // but for the peaks
	sealedConditioning = "conditioning"
	sealedFindings     = "findings"
	sealedFailure      = "failure"
)

var computationSeals = []string{sealedPeaks, sealedMeasures, sealedConditioning, sealedFindings, sealedFailure}

// sealedFlags is of flags among the conditioned findings, part by part.
const sealedFlags = "flags"

// sealKey names what one row of edition_seal is of.
type sealKey struct{ name, part string }

// editionSeal is how many rows there were, and the sums of their checksums.
type editionSeal struct {
	rows int64
	sums []int64
}

// sealsNow are the queries that tell what rows of edition_seal an edition would get by what it
// shows, by name.
func sealsNow(id int64, shown tables) map[string]string {
	computed := shown("computed") + ` k JOIN `
	out := map[string]string{
		sealedGeneration: fmt.Sprintf(`SELECT '', 1, json_array(crc32c(g.id, r.name, r.hash, d.hash)) FROM edition e
			JOIN generation g ON g.id = e.generation_id JOIN recipe r ON r.id = g.recipe_id JOIN grid d ON d.id = g.grid_id WHERE e.id = %d`, id),
		sealedFlags: `SELECT f.flag, count(*), json_array(sum(crc32c(k.record_id, k.role, f.flag))) FROM ` + computed +
			`conditioned_finding f ON f.computation_id = k.computation_id GROUP BY f.flag`,
	}
	for name, t := range sealedTables {
		part, group := `''`, ` HAVING count(*) > 0`
		if t.part != "" {
			part, group = t.part, ` GROUP BY `+t.part
		}
		// No index has since: the rows that are read are those of the table.
		out[name] = fmt.Sprintf(`SELECT %s, count(*), column_sums(%d, %s, %s) FROM `, part, len(t.key), strings.Join(t.key, ", "), strings.Join(t.columns, ", ")) +
			shown(name) + group
	}
	for _, kind := range computationSeals {
		out[kind] = fmt.Sprintf(`SELECT k.role, count(*), json_array(sum(crc32c(k.record_id, k.role, s.%[1]s))) FROM `+computed+
			`computation_seal s ON s.computation_id = k.computation_id WHERE s.%[1]s <> 0 GROUP BY k.role`, kind)
	}
	return out
}

// sealEdition notes what the newest edition shows.
func (t *Tx) sealEdition(ctx context.Context, id int64) error {
	for name, query := range sealsNow(id, ofEdition(id, true)) {
		if err := t.exec(ctx, `INSERT INTO edition_seal (edition_id, name, part, rows, sums) SELECT ?, '`+name+`', * FROM (`+query+`)`, id); err != nil {
			return fmt.Errorf("seal edition: %s: %w", name, err)
		}
	}
	return nil
}

// readSeals are the rows that a query gives of edition_seal, or would give it.
func readSeals(ctx context.Context, q queryer, query string, id int64) (map[sealKey]editionSeal, error) {
	rows, err := q.QueryContext(ctx, query)
	if err != nil {
		return nil, fmt.Errorf("read checksums: %w", err)
	}
	type row struct {
		sealKey
		rows int64
		sums string
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.name, &v.part, &v.rows, &v.sums} })
	if err != nil {
		return nil, fmt.Errorf("read checksums: %w", err)
	}
	out := make(map[sealKey]editionSeal, len(found))
	for _, v := range found {
		s := editionSeal{rows: v.rows}
		if err := json.Unmarshal([]byte(v.sums), &s.sums); err != nil {
			return nil, fmt.Errorf("%w: checksums of edition %d, %s: %w", ErrAltered, id, v.name, err)
		}
		out[v.sealKey] = s
	}
	return out, nil
}

// sealsOf are the seals that an edition got when it was made.
func sealsOf(ctx context.Context, q queryer, id int64) (map[sealKey]editionSeal, error) {
	return readSeals(ctx, q, fmt.Sprintf(`SELECT name, part, rows, sums FROM edition_seal WHERE edition_id = %d`, id), id)
}

// unlike says what an edition has of a name that it had not when it was made, "" for
// nothing.
func unlike(ctx context.Context, q queryer, id int64, shown tables, name string, was map[sealKey]editionSeal) (string, error) {
	is, err := readSeals(ctx, q, `SELECT '`+name+`', * FROM (`+sealsNow(id, shown)[name]+`)`, id)
	if err != nil {
		return "", err
	}
	for key := range was {
		if _, ok := is[key]; !ok && key.name == name {
			is[key] = editionSeal{}
		}
	}
	for key, now := range is {
		if text := key.differs(was[key], now, sealedTables[name].columns); text != "" {
			return text, nil
		}
	}
	return "", nil
}

// differs says how two seals differ, the second that of these columns.
func (k sealKey) differs(was, is editionSeal, columns []string) string {
	of := ""
	if k.part != "" {
		of = " of " + k.part
	}
	if was.rows != is.rows {
		return fmt.Sprintf("%d rows%s, and were %d", is.rows, of, was.rows)
	}
	for i, sum := range is.sums {
		switch {
		case i < len(was.sums) && was.sums[i] == sum:
		case i < len(columns):
			return fmt.Sprintf("%s%s is not what was stored", columns[i], of)
		default:
			return "not what was stored" + of
		}
	}
	return ""
}

// damage is the error of what an edition has no more as it was.
func damage(edition int64, name, text string) error {
	return fmt.Errorf("%w: edition %d, %s: %s; swaybook verify lists all", ErrAltered, edition, name, text)
}

// unread is the error of what could not be read of a table: SQLite's, or that a value cannot
// be what was stored.
func (s *Snapshot) unread(name string, err error) error {
	if err == nil || errors.Is(err, ErrAltered) {
		return err
	}
	if s.seals == nil || codeOf(err) != 0 || errors.Is(err, context.Canceled) || errors.Is(err, context.DeadlineExceeded) {
		return fmt.Errorf("read %s: %w", name, err)
	}
	return damage(s.Edition.ID, name, err.Error())
}

// sealed takes the seals of the snapshot's edition, against which it is read from then on, as
// is what is laid out of it.
func (s *Snapshot) sealed(ctx context.Context) (err error) {
	if s.seals, err = sealsOf(ctx, s.tx, s.Edition.ID); err != nil {
		return err
	}
	if err := s.isOfSealedGeneration(); err != nil {
		return err
	}
	// Of an edition that has become another none of them knows.
	var editions, seals string
	err = s.tx.QueryRowContext(ctx, `SELECT (SELECT json_group_array(id) FROM (SELECT id FROM edition ORDER BY id)),
		(SELECT json_group_array(edition_id) FROM (SELECT edition_id FROM edition_seal WHERE name = '`+sealedGeneration+`' ORDER BY edition_id))`).Scan(&editions, &seals)
	if err == nil && editions != seals {
		err = fmt.Errorf("%w: editions %s, of which %s have checksums", ErrAltered, editions, seals)
	}
	if err == nil {
		s.isLaidOut, err = isLaidOut(ctx, s.tx, s.Edition.ID)
	}
	return err
}

// isOfSealedGeneration says whether the snapshot's generation is that which its edition was made of.
func (s *Snapshot) isOfSealedGeneration() error {
	g := &s.Generation
	is := editionSeal{1, []int64{new(sealer).row(g.ID, g.Recipe.Name, g.Recipe.Hash(), g.Grid.Hash())}}
	return s.isAsSealed(sealKey{name: sealedGeneration}, is)
}

// whole looks whether all that the edition shows of some tables is what it showed when it was
// made, and whether their indices have it too, for questions that SQL answers.
func (s *Snapshot) whole(ctx context.Context, names ...string) error {
	if s.seals == nil {
		return nil
	}
	return wholeOf(ctx, s.tx, s.Edition.ID, s.shown, s.seals, names...)
}

// wholeOnce is whole for what many ask.
func (s *Snapshot) wholeOnce(ctx context.Context, name string) error {
	if s.seals == nil {
		return nil
	}
	s.known.Lock()
	defer s.known.Unlock()
	if s.isWhole[name] {
		return nil
	}
	err := s.whole(ctx, name)
	if err == nil {
		s.isWhole[name] = true
	}
	return err
}

func wholeOf(ctx context.Context, q queryer, id int64, shown tables, seals map[sealKey]editionSeal, names ...string) error {
	for _, name := range names {
		text, err := unlike(ctx, q, id, shown, name, seals)
		if err == nil && text == "" {
			text, err = unlikeIndices(ctx, q, name)
		}
		if err == nil && text != "" {
			err = damage(id, name, text)
		}
		if err != nil {
			return err
		}
	}
	return nil
}

// unlikeIndices says what the indices of an edition's table lack of it, "" for nothing.
func unlikeIndices(ctx context.Context, q queryer, name string) (text string, err error) {
	if _, isTable := sealedTables[name]; !isTable {
		return "", nil
	}
	if err := q.QueryRowContext(ctx, `SELECT integrity_check FROM pragma_integrity_check('edition_`+name+`') LIMIT 1`).Scan(&text); err != nil {
		return "", err
	}
	if text == "ok" {
		return "", nil
	}
	return text, nil
}

// isAsSealed says whether what was added up is what was stored.
func (s *Snapshot) isAsSealed(key sealKey, is editionSeal) error {
	if s.seals == nil {
		return nil
	}
	was, isKnown := s.seals[key]
	if text := key.differs(was, is, nil); text != "" && (isKnown || is.rows != 0) {
		return damage(s.Edition.ID, key.name, text)
	}
	return nil
}

// partsOf are the parts of a table that are sealed.
func (s *Snapshot) partsOf(name string) (out []string) {
	for key := range s.seals {
		if key.name == name {
			out = append(out, key.part)
		}
	}
	return out
}
