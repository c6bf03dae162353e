package db

import (
	"context"
	"errors"
	"fmt"
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
		b.measures, err = s.measures(ctx)
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
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, k.computation_id, x.step_s, x.samples, x.lead_s, x.low_cut_hz, x.high_cut_hz, x.long_s`+s.ofComputed("conditioning"))
	if err != nil {
		return nil, fmt.Errorf("read conditioning: %w", err)
	}
	type row struct {
		roleOf
		computation int64
		Conditioning
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.record, &v.role, &v.computation, &v.StepS, &v.Samples, &v.LeadS, &v.LowCutHz, &v.HighCutHz, &v.LongS}
	})
	if err != nil {
		return nil, s.unread("conditioning", err)
	}
	out, seen := make(map[roleOf]*Conditioning, len(found)), s.attribution(sealedConditioning, anyRole)
	for i := range found {
		v := &found[i]
		seen.conditioning(v.roleOf, v.computation, &v.Conditioning)
		out[v.roleOf] = &v.Conditioning
	}
	return out, seen.check()
}

// findings are those of the components, by their ids and in the order of flags.
func (s *Snapshot) findings(ctx context.Context) (map[int64][]Finding, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT component_id, flag, value, bound, words FROM `+s.shown("finding")+` ORDER BY component_id, flag`)
	if err != nil {
		return nil, fmt.Errorf("read findings: %w", err)
	}
	type row struct {
		component int64
		Finding
	}
	fields := func(v *row) []any { return []any{&v.component, &v.Flag, &v.Value, &v.Bound, &v.Words} }
	found, err := collect(rows, fields)
	if err != nil {
		return nil, s.unread("finding", err)
	}
	out, seen := map[int64][]Finding{}, map[string]*tally{}
	for _, flag := range s.partsOf("finding") {
		seen[flag] = s.tally("finding", flag, "component_id", "flag", "value", "bound", "words")
	}
	for i := range found {
		v := &found[i]
		t, isKnown := seen[v.Flag]
		if !isKnown && s.seals != nil {
			return nil, damage(s.Edition.ID, "finding", "a flag that was not stored")
		}
		t.add(fields(v))
		out[v.component] = append(out[v.component], v.Finding)
	}
	for _, t := range seen {
		if err := t.check(); err != nil {
			return nil, err
		}
	}
	return out, nil
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
	rows, err := s.tx.QueryContext(ctx, `SELECT component_id, flag FROM `+s.shown("finding")+` WHERE flag = ?`, flag)
	if err != nil {
		return fmt.Errorf("read findings: %w", err)
	}
	type row struct {
		component int64
		flag      string
	}
	found, err := collectSeen(rows, s.tally("finding", flag, "component_id", "flag"), func(v *row) []any { return []any{&v.component, &v.flag} })
	if err != nil {
		return s.unread("finding", err)
	}
	for _, v := range found {
		flagged[v.component] = append(flagged[v.component], Finding{Flag: flag})
	}
	return nil
}

// flagLeft adds the flag to the components whose conditioned motion has it.
func (s *Snapshot) flagLeft(ctx context.Context, flagged map[roleOf][]Finding, flag string) error {
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, f.flag FROM conditioned_finding f JOIN `+s.shown("computed")+` k ON k.computation_id = f.computation_id WHERE f.flag = ?`, flag)
	if err != nil {
		return fmt.Errorf("read findings: %w", err)
	}
	type row struct {
		roleOf
		flag string
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.record, &v.role, &v.flag} })
	if err != nil {
		return s.unread("conditioned_finding", err)
	}
	is := editionSeal{sums: []int64{0}}
	var b sealer
	for _, v := range found {
		is.rows++
		is.sums[0] += b.row(v.record, v.role, v.flag)
		flagged[v.roleOf] = append(flagged[v.roleOf], Finding{Flag: flag})
	}
	return s.isAsSealed(sealKey{sealedFlags, flag}, is)
}

// measures are those of the generation but for the peaks.
func (s *Snapshot) measures(ctx context.Context) (map[roleOf]map[string]float64, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, k.computation_id, x.name, x.value`+s.ofComputed("measure")+` WHERE x.name NOT IN `+peakNames)
	if err != nil {
		return nil, fmt.Errorf("read measures: %w", err)
	}
	defer rows.Close()
	out, seen := map[roleOf]map[string]float64{}, s.attribution(sealedMeasures, anyRole)
	var of, last roleOf
	var m map[string]float64
	var computation int64
	var name string
	var value float64
	into := []any{&of.record, &of.role, &computation, &name, &value}
	for rows.Next() {
		if err := rows.Scan(into...); err != nil {
			return nil, s.unread("measure", err)
		}
		seen.measure(of, computation, name, value)
		if of != last {
			m, last = map[string]float64{}, of
			out[of] = m
		}
		m[name] = value
	}
	return out, s.unread("measure", errors.Join(rows.Err(), seen.check()))
}

// RotatedPeaks returns the peaks that are stored under a role of RotD, by the
// record's id: those of the records whose spectra of that role are stored.
func (s *Snapshot) RotatedPeaks(ctx context.Context, role string) (map[int64]Peaks, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, k.computation_id, x.name, x.value`+s.ofComputed("measure")+` WHERE k.role = ? AND x.name IN `+peakNames, role)
	if err != nil {
		return nil, fmt.Errorf("read rotated peaks: %w", err)
	}
	type row struct {
		roleOf
		computation int64
		name        string
		value       float64
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.record, &v.role, &v.computation, &v.name, &v.value} })
	if err != nil {
		return nil, s.unread("measure", err)
	}
	out, seen := map[int64]Peaks{}, s.attribution(sealedPeaks, func(r string) bool { return r == role })
	for _, v := range found {
		seen.measure(v.roleOf, v.computation, v.name, v.value)
		p, ok := out[v.record]
		if !ok {
			p = lostPeaks
		}
		switch v.name {
		case MeasurePGA:
			p.PGA = v.value
		case MeasurePGV:
			p.PGV = v.value
		case MeasurePGD:
			p.PGD = v.value
		}
		out[v.record] = p
	}
	return out, seen.check()
}

// computations are those of a role by record, read once.
func (s *Snapshot) computations(ctx context.Context, role string) (map[int64]int64, error) {
	s.known.Lock()
	defer s.known.Unlock()
	if out := s.computed[role]; out != nil {
		return out, nil
	}
	rows, err := s.tx.QueryContext(ctx, `SELECT record_id, role, computation_id FROM `+s.shown("computed")+` WHERE role = ?`, role)
	if err != nil {
		return nil, fmt.Errorf("read computations: %w", err)
	}
	type row struct {
		roleOf
		id int64
	}
	found, err := collectSeen(rows, s.tally("computed", role, "record_id", "role", "computation_id"), func(v *row) []any { return []any{&v.record, &v.role, &v.id} })
	if err != nil {
		return nil, s.unread("computed", err)
	}
	out := make(map[int64]int64, len(found))
	for _, v := range found {
		out[v.record] = v.id
	}
	s.computed[role] = out
	return out, nil
}
