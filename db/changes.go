package db

import (
	"context"
	"fmt"
	"maps"
	"slices"
	"strings"
)

// Change is how things of one kind differ between two editions, by codes.
type Change struct{ Added, Removed, Changed []string }

// Changes are what differs between two editions. Components, and what was computed anew of
// those that both have, go by the record's code and the role, files by their paths.
type Changes struct {
	Records, Components, Events, Stations, Files, Rejections Change
	Recomputed                                               []string
}

// RunDetails is a run with what its edition is made by and what it changed.
type RunDetails struct {
	Run
	Generation Generation // the edition's
	// Before is the edition before, the last that is kept, and BeforeGeneration what it is
	// made by; 0 where there was none, or where the run left the edition of another.
	Before           int64
	BeforeGeneration Generation
	// Changes are nil where no edition is kept, or none of those that were before it.
	Changes *Changes
}

// RunDetails returns a run. The error is a *NoEditionError where there is none of this
// number.
func (s *Store) RunDetails(ctx context.Context, id int64) (*RunDetails, error) {
	runs, err := s.Runs(ctx)
	if err != nil {
		return nil, err
	}
	at := slices.IndexFunc(runs, func(r Run) bool { return r.ID == id })
	if at < 0 {
		return nil, noEdition(ctx, s.read, id)
	}
	d := &RunDetails{Run: runs[at]}
	if d.Edition == 0 {
		return d, nil
	}
	err = s.ViewAsOf(ctx, id, func(v *Snapshot) error {
		d.Edition, d.EditionState, d.Generation = v.Edition.ID, v.Edition.State, v.Generation
		if d.Edition != id {
			d.Changes = &Changes{} // the run made no edition
			return nil
		}
		before, ok, err := editionBy(ctx, v.tx, `id < ? ORDER BY id DESC LIMIT 1`, id)
		if err != nil {
			return err
		}
		if !ok && slices.ContainsFunc(runs[:at], func(r Run) bool { return r.EditionState == EditionGone }) {
			return nil
		}
		if ok {
			d.Before = before.ID
			if d.BeforeGeneration, err = generation(ctx, v.tx, before.GenerationID); err != nil {
				return err
			}
		}
		d.Changes, err = v.changesSince(ctx, before.ID)
		return err
	})
	return d, err
}

// ChangesSince returns how what a run left differs from an earlier edition. The error is a
// *NoEditionError where the run's is not kept.
func (s *Store) ChangesSince(ctx context.Context, before, run int64) (c *Changes, err error) {
	err = s.ViewAsOf(ctx, run, func(v *Snapshot) error {
		c, err = v.changesSince(ctx, before)
		return err
	})
	return c, err
}

// stationKey is what stations are known by.
const stationKey = `ltrim(t.network || '.' || t.code, '.')`

// StationCodes are the codes of stations, as Changes have them, by the codes of records that
// any of the editions has.
func (s *Store) StationCodes(ctx context.Context, runs ...int64) (map[string]string, error) {
	out := map[string]string{}
	for _, run := range runs {
		err := s.ViewAsOf(ctx, run, func(v *Snapshot) error {
			if err := v.whole(ctx, "record", "station"); err != nil {
				return err
			}
			rows, err := v.tx.QueryContext(ctx, `SELECT r.code, `+stationKey+` FROM `+v.shown("record")+` r JOIN `+v.shown("station")+` t ON t.id = r.station_id`)
			if err != nil {
				return fmt.Errorf("read stations: %w", err)
			}
			found, err := collect(rows, func(v *[2]string) []any { return []any{&v[0], &v[1]} })
			for _, one := range found {
				out[one[0]] = one[1]
			}
			return err
		})
		if err != nil {
			return nil, err
		}
	}
	return out, nil
}

// changesSince compares the snapshot's edition with an earlier one, 0 for an empty one.
func (s *Snapshot) changesSince(ctx context.Context, before int64) (*Changes, error) {
	if err := s.wholeSince(ctx, before); err != nil {
		return nil, err
	}
	c := &Changes{}
	var findings, computed Change
	for _, kind := range []struct {
		into *Change
		comparison
	}{
		{&c.Records, comparison{table: "record", key: `t.code`, ignore: []string{"id", "event_id", "station_id"},
			beside: []string{`event e ON e.id = t.event_id`, `station s ON s.id = t.station_id`}, says: []string{`e.code`, `s.network`, `s.code`}}},
		{&c.Events, comparison{table: "event", key: `t.code`, ignore: []string{"id", "primary_id"}, beside: []string{`event e ON e.id = t.primary_id`}, says: []string{`e.code`}}},
		{&c.Stations, comparison{table: "station", key: stationKey, ignore: []string{"id"}}},
		{&c.Files, comparison{table: "source_file", key: `t.path`, ignore: []string{"id"}}},
		{&c.Rejections, comparison{table: "rejection", key: `t.path || ':' || t.line || ': ' || t.cause`, ignore: []string{"id"}}},
		// Which other components hold the motion is theirs to say, whether there is one counts.
		{&c.Components, comparison{table: "component", key: `r.code || ' ' || t.role`, ignore: []string{"id", "record_id", "source_id", "motion_id"},
			beside: []string{`record r ON r.id = t.record_id`}, says: []string{`t.motion_id IS NULL`}}},
		{&findings, comparison{table: "finding", key: `r.code || ' ' || c.role`, ignore: []string{"component_id"},
			beside: []string{`component c ON c.id = t.component_id`, `record r ON r.id = c.record_id`}}},
		{&computed, comparison{table: "computed", key: `r.code || ' ' || t.role`, ignore: []string{"record_id"}, beside: []string{`record r ON r.id = t.record_id`}}},
	} {
		come, err := s.rowsOf(ctx, kind.comparison, s.shown, fmt.Sprintf(`until > %d AND since <= %[1]d AND since > %d`, s.Edition.ID, before))
		if err != nil {
			return nil, err
		}
		gone, err := s.rowsOf(ctx, kind.comparison, ofEdition(before, false), fmt.Sprintf(`until > %d AND since <= %[1]d AND until <= %d`, before, s.Edition.ID))
		if err != nil {
			return nil, err
		}
		*kind.into = compare(gone, come)
	}
	c.Recomputed = computed.Changed
	c.Components.Changed = withFindings(&c.Components, &findings)
	return c, nil
}

// wholeSince looks whether both editions are what they were when they were made.
func (s *Snapshot) wholeSince(ctx context.Context, before int64) error {
	names := slices.Sorted(maps.Keys(sealedTables))
	if err := s.whole(ctx, names...); err != nil || before == 0 {
		return err
	}
	seals, err := sealsOf(ctx, s.tx, before)
	if err != nil {
		return err
	}
	return wholeOf(ctx, s.tx, before, ofEdition(before, false), seals, names...)
}

// comparison says how rows t of an edition's table are compared: by what people know them
// by, since ids are another edition's for the same things where a run has read all anew.
type comparison struct {
	table, key string
	beside     []string // tables that the key and says need, and how they are found
	ignore     []string // columns that do not count
	says       []string // what counts instead
}

// rowsOf are the rows of an edition's table that meet a condition, by key: what they say.
func (s *Snapshot) rowsOf(ctx context.Context, c comparison, shown tables, condition string) (map[string]string, error) {
	columns, err := columnsOf(ctx, s.tx, "edition_"+c.table)
	if err != nil {
		return nil, fmt.Errorf("compare editions: %w", err)
	}
	says := c.says
	for _, name := range columns {
		if !slices.Contains(c.ignore, name) {
			says = append(says, "t."+name)
		}
	}
	// quote gives what restores every double.
	query := `SELECT ` + c.key + `, quote(` + strings.Join(says, `) || ' ' || quote(`) + `) FROM (SELECT * FROM edition_` + c.table + ` WHERE ` + condition + `) t`
	for _, join := range c.beside {
		name, rest, _ := strings.Cut(join, " ")
		query += ` LEFT JOIN ` + shown(name) + ` ` + rest
	}
	rows, err := s.tx.QueryContext(ctx, query+` ORDER BY 1, 2`)
	if err != nil {
		return nil, fmt.Errorf("compare editions: %s: %w", c.table, err)
	}
	found, err := collect(rows, func(v *[2]string) []any { return []any{&v[0], &v[1]} })
	if err != nil {
		return nil, fmt.Errorf("compare editions: %s: %w", c.table, err)
	}
	out := make(map[string]string, len(found))
	for _, v := range found {
		out[v[0]] += v[1] + "\n" // of findings a component has several
	}
	return out, nil
}

// compare sorts what went and what came by what that means.
func compare(gone, come map[string]string) (c Change) {
	for _, key := range slices.Sorted(maps.Keys(come)) {
		if before, ok := gone[key]; !ok {
			c.Added = append(c.Added, key)
		} else if before != come[key] {
			c.Changed = append(c.Changed, key)
		}
	}
	for _, key := range slices.Sorted(maps.Keys(gone)) {
		if _, ok := come[key]; !ok {
			c.Removed = append(c.Removed, key)
		}
	}
	return c
}

// withFindings are the components that changed, with those that differ in what was found of
// them only.
func withFindings(components, findings *Change) []string {
	known := map[string]bool{}
	for _, key := range slices.Concat(components.Added, components.Removed) {
		known[key] = true
	}
	all := map[string]bool{}
	for _, key := range slices.Concat(components.Changed, findings.Added, findings.Removed, findings.Changed) {
		all[key] = !known[key]
	}
	maps.DeleteFunc(all, func(_ string, isChanged bool) bool { return !isChanged })
	return slices.Sorted(maps.Keys(all))
}
