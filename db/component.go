package db

import (
	"context"
	"encoding/json"
	"fmt"
	"time"
)

// Held returns the path under which content with this digest was first read;
// ok is false where it is not held.
func (s *Store) Held(ctx context.Context, sha256 string) (path string, ok bool, err error) {
	return held(ctx, s.read, sha256)
}

// Held is Store.Held as this transaction sees it.
func (t *Tx) Held(ctx context.Context, sha256 string) (path string, ok bool, err error) {
	return held(ctx, t.tx, sha256)
}

func held(ctx context.Context, q queryer, sha256 string) (string, bool, error) {
	rows, err := q.QueryContext(ctx, `SELECT path FROM source_file WHERE sha256 = ?`, sha256)
	if err != nil {
		return "", false, fmt.Errorf("look up digest: %w", err)
	}
	paths, err := collect(rows, func(p *string) []any { return []any{p} })
	if err != nil || len(paths) == 0 {
		return "", false, err
	}
	return paths[0], true, nil
}

// AddComponent stores a component, its samples (from EncodeSamples), nil where the store has
// them, and what was computed of them, nil where that is left to later.
func (t *Tx) AddComponent(ctx context.Context, recordID int64, c Component, data []byte, digest string, generation int64, computed *Spectra) error {
	warnings, err := json.Marshal(append([]string{}, c.Warnings...))
	if err != nil {
		return err
	}
	seriesID, err := t.putSeries(ctx, data, digest)
	if err != nil {
		return err
	}
	id, err := t.insert(ctx, `INSERT INTO component (record_id, role, axis, label, rank, azimuth_deg, channel, start_at, step_s, samples, unit, processing,
			low_cut_hz, high_cut_hz, header_peak_m_s2, warnings, source_id, source_line, series_id)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
		recordID, c.Role, c.Axis, c.Label, c.Rank, c.AzimuthDeg, c.Channel, timeText(c.Start), c.StepS, c.Samples, c.Unit, c.Processing,
		c.LowCutHz, c.HighCutHz, c.HeaderPeak, string(warnings), c.SourceID, c.SourceLine, seriesID)
	if err != nil {
		return fmt.Errorf("store component: %w", err)
	}
	for _, f := range c.Findings {
		err := t.exec(ctx, `INSERT INTO finding (component_id, flag, value, bound, words) VALUES (?, ?, ?, ?, ?)`, id, f.Flag, f.Value, f.Bound, f.Words)
		if err != nil {
			return fmt.Errorf("store finding: %w", err)
		}
	}
	if computed == nil {
		return nil
	}
	return t.addComputed(ctx, componentInputs, recordID, c.Role, generation, *computed)
}

// putSeries stores samples, which are held once. Without data they are held.
func (t *Tx) putSeries(ctx context.Context, data []byte, digest string) (int64, error) {
	if data == nil {
		id, err := t.idOf(ctx, `SELECT id FROM series WHERE sha256 = ?`, digest)
		if err == nil && id == 0 {
			err = fmt.Errorf("no samples with digest %s: %w", digest, ErrDamaged)
		}
		return id, err
	}
	id, err := t.put(ctx, `INSERT INTO series (sha256, data) VALUES (?, ?) ON CONFLICT (sha256) DO UPDATE SET sha256 = sha256 RETURNING id`, digest, data)
	if err != nil {
		return 0, fmt.Errorf("store samples: %w", err)
	}
	return id, nil
}

// FlagDuplicated is of components of one record with the same samples.
const FlagDuplicated = "duplicated"

// FlagTwins notes with the record's components that have samples of this digest that
// another one, which comes now, has them too. It returns what is to be noted with that
// one, nothing where there are none.
func (t *Tx) FlagTwins(ctx context.Context, recordID int64, digest string) ([]Finding, error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT c.id FROM component c JOIN series s ON s.id = c.series_id WHERE c.record_id = ? AND s.sha256 = ?`, recordID, digest)
	if err != nil {
		return nil, fmt.Errorf("find equal components: %w", err)
	}
	twins, err := collect(rows, func(id *int64) []any { return []any{id} })
	if err != nil || len(twins) == 0 {
		return nil, err
	}
	f := Finding{Flag: FlagDuplicated, Value: float64(len(twins)), Words: "another component of the record has the same samples"}
	for _, id := range twins {
		err := t.exec(ctx, `INSERT OR IGNORE INTO finding (component_id, flag, value, bound, words) VALUES (?, ?, ?, ?, ?)`, id, f.Flag, f.Value, f.Bound, f.Words)
		if err != nil {
			return nil, fmt.Errorf("store finding: %w", err)
		}
	}
	return []Finding{f}, nil
}

// StoredRecord is a record's identity in the store with its components in the
// order in which they were stored.
type StoredRecord struct {
	ID         int64 // 0 where there is none
	Code       string
	Start      time.Time
	Components []Component
}

// FindRecord returns the record with this code; ok is false where there is
// none.
func (t *Tx) FindRecord(ctx context.Context, code string) (r StoredRecord, ok bool, err error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT id, coalesce(start_at, '') FROM record WHERE code = ?`, code)
	if err != nil {
		return r, false, fmt.Errorf("find record: %w", err)
	}
	type row struct {
		id    int64
		start string
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.id, &v.start} })
	if err != nil || len(found) == 0 {
		return r, false, err
	}
	r.ID, r.Code = found[0].id, code
	if r.Start, err = parseTime(found[0].start); err != nil {
		return r, false, err
	}
	r.Components, err = t.components(ctx, r.ID)
	return r, true, err
}

// FindTrigger returns the record of a later trigger under the base code, as
// base_Thhmmss, that starts nearest to at and no further away than tolerance; ok
// is false where there is none.
func (t *Tx) FindTrigger(ctx context.Context, base string, at time.Time, tolerance time.Duration) (r StoredRecord, ok bool, err error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT code, coalesce(start_at, '') FROM record
		WHERE code GLOB ? || '_T[0-9][0-9][0-9][0-9][0-9][0-9]' ORDER BY code`, base)
	if err != nil {
		return r, false, fmt.Errorf("find trigger: %w", err)
	}
	type row struct{ code, start string }
	found, err := collect(rows, func(v *row) []any { return []any{&v.code, &v.start} })
	if err != nil {
		return r, false, err
	}
	code, nearest := "", tolerance+1
	for _, v := range found {
		start, err := parseTime(v.start)
		if err != nil {
			return r, false, err
		}
		if d := start.Sub(at).Abs(); d < nearest {
			code, nearest = v.code, d
		}
	}
	if code == "" {
		return r, false, nil
	}
	return t.FindRecord(ctx, code)
}

func (t *Tx) components(ctx context.Context, recordID int64) ([]Component, error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT c.role, c.axis, c.label, c.rank, c.azimuth_deg, c.channel, c.step_s, c.samples, c.processing, coalesce(c.start_at, ''), s.path, s.sha256, s.format
		FROM component c JOIN source_file s ON s.id = c.source_id WHERE c.record_id = ? ORDER BY c.id`, recordID)
	if err != nil {
		return nil, fmt.Errorf("read components: %w", err)
	}
	type row struct {
		Component
		start string
	}
	found, err := collect(rows, func(c *row) []any {
		return []any{&c.Role, &c.Axis, &c.Label, &c.Rank, &c.AzimuthDeg, &c.Channel, &c.StepS, &c.Samples, &c.Processing, &c.start, &c.SourcePath, &c.SourceSHA256, &c.SourceFormat}
	})
	if err != nil {
		return nil, err
	}
	out := make([]Component, len(found))
	for i, c := range found {
		out[i] = c.Component
		if out[i].Start, err = parseTime(c.start); err != nil {
			return nil, err
		}
	}
	return out, nil
}

// DescribeComponent replaces a component's axis, label, rank and azimuth by
// those of c, and its corner frequencies where c states them. What was computed of other
// inputs is its no more: see Adopt.
func (t *Tx) DescribeComponent(ctx context.Context, componentID int64, c Component) error {
	err := t.exec(ctx, `UPDATE component SET axis = ?, label = ?, rank = ?, azimuth_deg = ?,
		low_cut_hz = coalesce(?, low_cut_hz), high_cut_hz = coalesce(?, high_cut_hz) WHERE id = ?`,
		c.Axis, c.Label, c.Rank, c.AzimuthDeg, c.LowCutHz, c.HighCutHz, componentID)
	if err != nil {
		return fmt.Errorf("describe component: %w", err)
	}
	return t.forgetOutdated(ctx, componentID)
}

// roleTables hold rows by record and role.
var roleTables = []string{"component", "computed"}

// MoveComponents gives components of one record, by their roles, to another, where they
// have the roles that these are the keys of, with their spectra and measures. What their
// files, by paths, state of the record goes along, and stays where nothing that stays says
// otherwise: of equal statements one file's is kept. What was rotated of either record's
// horizontals is removed.
func (t *Tx) MoveComponents(ctx context.Context, from, to int64, roles map[string]string, paths []string) error {
	if err := t.forgetRotated(ctx, from, to); err != nil {
		return err
	}
	for _, table := range roleTables {
		for role, other := range roles {
			if err := t.exec(ctx, `UPDATE `+table+` SET record_id = ?, role = ? WHERE record_id = ? AND role = ?`, to, other, from, role); err != nil {
				return fmt.Errorf("move %s: %w", table, err)
			}
		}
	}
	for _, path := range paths {
		err := t.exec(ctx, `INSERT INTO statement SELECT subject, ?, attribute, stated_by, value, source FROM statement
			WHERE subject = ? AND subject_id = ? AND source = ? ON CONFLICT DO NOTHING`, to, SubjectRecord, from, path)
		if err == nil {
			err = t.exec(ctx, `DELETE FROM statement WHERE subject = ?1 AND subject_id = ?2 AND source = ?3 AND EXISTS (
				SELECT 1 FROM component c JOIN source_file f ON f.id = c.source_id JOIN statement o ON o.source = f.path
				WHERE c.record_id = ?2 AND o.subject = ?1 AND o.subject_id = ?2 AND o.attribute = statement.attribute AND o.stated_by = statement.stated_by)`,
				SubjectRecord, from, path)
		}
		if err != nil {
			return fmt.Errorf("move statements: %w", err)
		}
	}
	return nil
}

// SetRoles renames roles of a record's components, with their spectra and
// measures: what has a key's role gets the value's. Roles may change places. What
// was rotated of the record's horizontals is removed, since these are others now.
func (t *Tx) SetRoles(ctx context.Context, recordID int64, renamed map[string]string) error {
	if len(renamed) == 0 {
		return nil
	}
	if err := t.forgetRotated(ctx, recordID); err != nil {
		return err
	}
	// Two steps through names that nothing else has, since roles are unique in a
	// record at every moment.
	const between = "was "
	for _, table := range roleTables {
		query := `UPDATE ` + table + ` SET role = ? WHERE record_id = ? AND role = ?`
		for old := range renamed {
			if err := t.exec(ctx, query, between+old, recordID, old); err != nil {
				return fmt.Errorf("rename role: %w", err)
			}
		}
		for old, role := range renamed {
			if err := t.exec(ctx, query, role, recordID, between+old); err != nil {
				return fmt.Errorf("rename role: %w", err)
			}
		}
	}
	return nil
}
