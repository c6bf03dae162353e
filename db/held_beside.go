package db

import (
	"context"
	"errors"
	"fmt"
	"slices"
)

// What is read beside components: what was found in them, and what was computed of them.

// roleOf is a component of a record.
type roleOf struct {
	record int64
	role   string
}

// beside is what is known of components, findings by their ids.
type beside struct {
	conditioned map[roleOf]*Conditioning
	findings    map[int64][]Finding
	measures    map[roleOf]map[string]float64
	peaks       map[roleOf]Peaks // nil where nobody asked
}

// describe adds to a component what is known of it.
func (b *beside) describe(c *HeldComponent) {
	of := roleOf{c.RecordID, c.Role}
	c.Findings, c.Conditioning, c.Measures = b.findings[c.ID], b.conditioned[of], b.measures[of]
	if b.peaks != nil {
		var isThere bool
		if c.Peaks, isThere = b.peaks[of]; !isThere {
			c.Peaks = lostPeaks
		}
	}
}

// besideComponents reads what the details ask for.
func (s *Snapshot) besideComponents(ctx context.Context, details Details) (b beside, err error) {
	if details&DetailBand != 0 {
		if b.conditioned, err = s.conditionings(ctx); err != nil {
			return b, err
		}
	}
	if details&DetailFindings != 0 {
		if b.findings, err = s.findings(ctx); err != nil {
			return b, err
		}
		if err = s.addConditionedFindings(ctx, b.conditioned); err != nil {
			return b, err
		}
	}
	if details&DetailMeasures != 0 {
		if b.measures, err = s.measures(ctx); err != nil {
			return b, err
		}
	}
	if details&DetailPeaks != 0 {
		b.peaks, err = s.peaks(ctx, `k.role NOT IN ('`+RoleRotD50+`', '`+RoleRotD100+`')`, componentRole)
	}
	return b, err
}

// ofComputed joins what is computed in the generation to a table of it under the name x. The
// rows of one computation come together.
func (s *Snapshot) ofComputed(table string) string {
	return ` FROM ` + s.shown("computed") + ` k CROSS JOIN ` + table + ` x ON x.computation_id = k.computation_id`
}

// conditionings are those of the generation.
func (s *Snapshot) conditionings(ctx context.Context) (map[roleOf]*Conditioning, error) {
	var v conditioningRow
	out, seen := map[roleOf]*Conditioning{}, &attributedConditioning{s.attribution(sealedConditioning, anyRole), &v}
	err := s.scan(ctx, wanted{
		name: sealedConditioning, columns: words(`record_id role computation_id step_s samples lead_s low_cut_hz high_cut_hz long_s`),
		into: []any{&v.record, &v.role, &v.computation, &v.StepS, &v.Samples, &v.LeadS, &v.LowCutHz, &v.HighCutHz, &v.LongS}, seen: seen,
	}, func() error {
		out[v.roleOf] = new(v.Conditioning)
		return nil
	})
	return out, err
}

// conditioningRow is a conditioning as SQL gives it.
type conditioningRow struct {
	roleOf
	computation int64
	Conditioning
}

// attributedConditioning adds up conditionings.
type attributedConditioning struct {
	*attribution
	row *conditioningRow
}

func (a *attributedConditioning) add([]any) {
	a.conditioning(a.row.roleOf, a.row.computation, &a.row.Conditioning)
}

// findings are those of the components, by their ids and in the order of flags.
func (s *Snapshot) findings(ctx context.Context) (map[int64][]Finding, error) {
	out := map[int64][]Finding{}
	flags, err := s.flags(ctx)
	if err != nil {
		return nil, err
	}
	var id int64
	var v Finding
	for _, flag := range flags {
		err := s.scan(ctx, wanted{
			name: "finding", part: flag, columns: words(`component_id flag value bound words`), into: []any{&id, &v.Flag, &v.Value, &v.Bound, &v.Words},
		}, func() error {
			out[id] = append(out[id], v)
			return nil
		})
		if err != nil {
			return nil, err
		}
	}
	return out, nil
}

// flags are those of findings, in order: those that were stored and, where rows are read,
// those that these have, which must be among them.
func (s *Snapshot) flags(ctx context.Context) ([]string, error) {
	flags := s.partsOf("finding")
	if !s.isLaidOut {
		rows, err := s.tx.QueryContext(ctx, `SELECT DISTINCT flag FROM `+s.shown("finding"))
		if err != nil {
			return nil, fmt.Errorf("read findings: %w", err)
		}
		found, err := collect(rows, func(flag *string) []any { return []any{flag} })
		if err != nil {
			return nil, s.unread("finding", err)
		}
		for _, flag := range found {
			if s.seals != nil && !slices.Contains(flags, flag) {
				return nil, damage(s.Edition.ID, "finding", "a flag that was not stored")
			}
		}
		flags = append(flags, found...)
	}
	slices.Sort(flags)
	return slices.Compact(flags), nil
}

// addConditionedFindings adds to the conditionings what was found in the motions that
// they left, in the order of flags.
func (s *Snapshot) addConditionedFindings(ctx context.Context, to map[roleOf]*Conditioning) error {
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, k.computation_id, x.flag, x.value, x.bound, x.words`+s.ofComputed("conditioned_finding")+` ORDER BY k.record_id, k.role, x.flag`)
	if err != nil {
		return fmt.Errorf("read findings: %w", err)
	}
	type row struct {
		roleOf
		computation int64
		Finding
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.record, &v.role, &v.computation, &v.Flag, &v.Value, &v.Bound, &v.Words}
	})
	if err != nil {
		return s.unread("conditioned_finding", err)
	}
	seen := s.attribution(sealedFindings, anyRole)
	for i := range found {
		v := &found[i]
		seen.finding(v.roleOf, v.computation, &v.Finding)
		if k := to[v.roleOf]; k != nil {
			k.Findings = append(k.Findings, v.Finding)
		}
	}
	return seen.check()
}

// Flag adds to components that were read without DetailFindings those findings that have
// one of these flags, the flag alone, and to their conditionings, where those were read,
// those of the conditioned motion: a question over thousands of components screens for a
// few flags, which few have.
func (s *Snapshot) Flag(ctx context.Context, components []HeldComponent, flags []string) error {
	delivered, left := map[int64][]Finding{}, map[roleOf][]Finding{}
	for _, flag := range flags {
		if err := s.flagDelivered(ctx, delivered, flag); err != nil {
			return err
		}
		if err := s.flagLeft(ctx, left, flag); err != nil {
			return err
		}
	}
	if len(delivered)+len(left) == 0 {
		return nil
	}
	for i := range components {
		c := &components[i]
		c.Findings = delivered[c.ID]
		if c.Conditioning != nil {
			c.Conditioning.Findings = left[roleOf{c.RecordID, c.Role}]
		}
	}
	return nil
}

// flagDelivered adds the flag to the components that have it, by their ids.
func (s *Snapshot) flagDelivered(ctx context.Context, flagged map[int64][]Finding, flag string) error {
	var id int64
	var of string
	return s.scan(ctx, wanted{name: "finding", part: flag, columns: words(`component_id flag`), into: []any{&id, &of}}, func() error {
		flagged[id] = append(flagged[id], Finding{Flag: flag})
		return nil
	})
}

// flagLeft adds the flag to the components whose conditioned motion has it.
func (s *Snapshot) flagLeft(ctx context.Context, flagged map[roleOf][]Finding, flag string) error {
	var v roleOf
	var of string
	seen := &attributedFlags{snapshot: s, flag: flag, is: editionSeal{sums: []int64{0}}}
	return s.scan(ctx, wanted{
		name: sealedFlags, part: flag, columns: words(`record_id role flag`), into: []any{&v.record, &v.role, &of}, seen: seen,
	}, func() error {
		flagged[v] = append(flagged[v], Finding{Flag: flag})
		return nil
	})
}

// attributedFlags adds up which conditioned motions have a flag.
type attributedFlags struct {
	sealer
	snapshot *Snapshot
	flag     string
	is       editionSeal
}

func (a *attributedFlags) add(into []any) {
	a.is.rows++
	a.is.sums[0] += a.row(into...)
}

func (a *attributedFlags) check() error {
	return a.snapshot.isAsSealed(sealKey{sealedFlags, a.flag}, a.is)
}

// measures are those of the generation but for the peaks.
func (s *Snapshot) measures(ctx context.Context) (map[roleOf]map[string]float64, error) {
	out := map[roleOf]map[string]float64{}
	err := s.eachMeasure(ctx, s.attribution(sealedMeasures, anyRole), `x.name NOT IN `+peakNames, func(of roleOf, name string, value float64) {
		if out[of] == nil {
			out[of] = map[string]float64{}
		}
		out[of][name] = value
	})
	return out, err
}

// eachMeasure calls f with the measures that meet a condition.
func (s *Snapshot) eachMeasure(ctx context.Context, seen *attribution, condition string, f func(of roleOf, name string, value float64), args ...any) error {
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, k.computation_id, x.name, x.value`+s.ofComputed("measure")+` WHERE `+condition, args...)
	if err != nil {
		return fmt.Errorf("read measures: %w", err)
	}
	defer rows.Close()
	var of roleOf
	var computation int64
	var name string
	var value float64
	into := []any{&of.record, &of.role, &computation, &name, &value}
	for rows.Next() {
		if err := rows.Scan(into...); err != nil {
			return s.unread("measure", err)
		}
		seen.measure(of, computation, name, value)
		f(of, name, value)
	}
	return s.unread("measure", errors.Join(rows.Err(), seen.check()))
}

// RotatedPeaks returns the peaks that are stored under a role of RotD, by the
// record's id: those of the records whose spectra of that role are stored.
func (s *Snapshot) RotatedPeaks(ctx context.Context, role string) (map[int64]Peaks, error) {
	found, err := s.peaks(ctx, `k.role = ?`, func(r string) bool { return r == role }, role)
	out := make(map[int64]Peaks, len(found))
	for of, p := range found {
		out[of.record] = p
	}
	return out, err
}

// peaks are those of the roles that meet a condition, and are wanted.
func (s *Snapshot) peaks(ctx context.Context, condition string, wants func(role string) bool, args ...any) (map[roleOf]Peaks, error) {
	out := map[roleOf]Peaks{}
	err := s.eachMeasure(ctx, s.attribution(sealedPeaks, wants), `x.name IN `+peakNames+` AND `+condition, func(of roleOf, name string, value float64) {
		p, ok := out[of]
		if !ok {
			p = lostPeaks
		}
		switch name {
		case MeasurePGA:
			p.PGA = value
		case MeasurePGV:
			p.PGV = value
		case MeasurePGD:
			p.PGD = value
		}
		out[of] = p
	}, args...)
	return out, err
}

// computations are those of a role by record, read once.
func (s *Snapshot) computations(ctx context.Context, role string) (map[int64]int64, error) {
	all, err := s.located(ctx, role)
	if err != nil {
		return nil, err
	}
	s.known.Lock()
	defer s.known.Unlock()
	if s.computed[role] == nil {
		out := make(map[int64]int64, len(all))
		for _, l := range all {
			out[l.record] = l.computation
		}
		s.computed[role] = out
	}
	return s.computed[role], nil
}
