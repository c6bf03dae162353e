package db

import (
	"context"
	"database/sql"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// InspectedSeries is a series and how many samples it has, by a component that it is of.
type InspectedSeries struct {
	ID      int64
	digest  string
	samples int
}

// Series returns the series that components have, in the working state or an edition, or
// that reading gave.
func (i *Inspection) Series(ctx context.Context) (out []InspectedSeries, err error) {
	err = look(ctx, i, "series", `SELECT s.id, s.sha256, n.samples FROM (SELECT series_id, samples FROM component UNION SELECT series_id, samples FROM edition_component UNION SELECT series_id, samples FROM intake_series) n
		JOIN series s ON s.id = n.series_id ORDER BY s.id`, nil,
		func(s *InspectedSeries) []any { return []any{&s.ID, &s.digest, &s.samples} }, func(s *InspectedSeries) { out = append(out, *s) })
	return out, err
}

// ReadSeries returns a function that says what is wrong with the samples, nil for nothing:
// to read takes the store, to decode a processor.
func (i *Inspection) ReadSeries(ctx context.Context, s InspectedSeries) (check func() error, err error) {
	var data []byte
	if err := i.tx.QueryRowContext(ctx, `SELECT data FROM series WHERE id = ?`, s.ID).Scan(&data); err != nil {
		return nil, err
	}
	return func() error {
		_, err := DecodeSamples(data, s.samples, s.digest)
		return err
	}, nil
}

// OfSeries is the fault of a series, with the component that it is of.
func (i *Inspection) OfSeries(ctx context.Context, s InspectedSeries, text string) Fault {
	f := Fault{Table: "series", Text: text}
	i.tx.QueryRowContext(ctx, `SELECT r.code, c.role FROM component c JOIN record r ON r.id = c.record_id WHERE c.series_id = ?1
		UNION ALL SELECT r.code, c.role FROM edition_component c JOIN edition_record r ON r.id = c.record_id WHERE c.series_id = ?1 LIMIT 1`, s.ID).Scan(&f.Record, &f.Role)
	return f // without a name where that cannot be read
}

// InspectedComputation is what was computed of a component, or of a pair, under both of
// its roles.
type InspectedComputation struct {
	ID           int64 // of a pair that of rotd50
	GenerationID int64
	Failure      string
	maximumID    int64 // of a pair, that of rotd100
	inputs       string
}

// IsPair reports whether it is of a pair.
func (c InspectedComputation) IsPair() bool { return c.maximumID != 0 }

// Computations returns what was computed in a generation, in the order in which it was.
func (i *Inspection) Computations(ctx context.Context, generationID int64) (out []InspectedComputation, err error) {
	if err := i.describe(ctx); err != nil {
		return nil, err
	}
	err = look(ctx, i, "computation", `SELECT x.id, x.generation_id, coalesce(x.failure, ''), coalesce(y.id, 0), x.inputs FROM computation x
		LEFT JOIN computation y ON y.generation_id = x.generation_id AND y.inputs = '`+RoleRotD100+`' || substr(x.inputs, length('`+RoleRotD50+`') + 1) AND x.inputs LIKE '`+RoleRotD50+` %'
		WHERE x.generation_id = ? AND x.inputs NOT LIKE '`+RoleRotD100+` %' ORDER BY x.id`, []any{generationID},
		func(c *InspectedComputation) []any {
			return []any{&c.ID, &c.GenerationID, &c.Failure, &c.maximumID, &c.inputs}
		},
		func(c *InspectedComputation) { out = append(out, *c) })
	return out, err
}

// Generations returns the store's generations.
func (i *Inspection) Generations(ctx context.Context) (out []Generation, err error) {
	var ids []int64
	err = look(ctx, i, "generation", `SELECT id FROM generation ORDER BY id`, nil, func(id *int64) []any { return []any{id} }, func(id *int64) { ids = append(ids, *id) })
	for _, id := range ids {
		g, errRead := generation(ctx, i.tx, id)
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		if errRead != nil {
			i.found(Fault{Table: "generation", Text: fmt.Sprintf("generation %d cannot be read: %v", id, errRead)})
			continue
		}
		out = append(out, g)
	}
	return out, err
}

// Of is a fault of a computation, with the component or pair that it is of.
func (i *Inspection) Of(ctx context.Context, c InspectedComputation, table, text string) Fault {
	f := Fault{Table: table, Text: text}
	i.tx.QueryRowContext(ctx, `SELECT r.code, k.role FROM computed k JOIN record r ON r.id = k.record_id WHERE k.computation_id = ?1
		UNION ALL SELECT r.code, k.role FROM edition_computed k JOIN edition_record r ON r.id = k.record_id WHERE k.computation_id = ?1 LIMIT 1`, c.ID).Scan(&f.Record, &f.Role)
	if f.Record == "" {
		f.Text = fmt.Sprintf("computation %d: %s", c.ID, text)
	}
	return f
}

// described is what a component's row says that is an input of something. The text of
// inputs has the same numbers, but for a last digit where the compiler fuses.
type described struct {
	samples                         int
	stepS                           float64
	lowCutHz, highCutHz, azimuthDeg sql.NullFloat64
	state, start                    string
}

func (i *Inspection) describe(ctx context.Context) error {
	if i.described != nil {
		return nil
	}
	i.described = map[string][]described{}
	type row struct {
		digest string
		described
	}
	const columns = `SELECT series_id, samples, step_s, low_cut_hz, high_cut_hz, azimuth_deg, processing, coalesce(start_at, '-') AS start FROM `
	return look(ctx, i, "component", `SELECT s.sha256, c.samples, c.step_s, c.low_cut_hz, c.high_cut_hz, c.azimuth_deg, c.processing, c.start FROM series s JOIN (
		`+columns+`component UNION `+columns+`edition_component) c ON c.series_id = s.id`, nil, func(v *row) []any {
		return []any{&v.digest, &v.samples, &v.stepS, &v.lowCutHz, &v.highCutHz, &v.azimuthDeg, &v.state, &v.start}
	}, func(v *row) { i.described[v.digest] = append(i.described[v.digest], v.described) })
}

// isThat reports whether text, of the inputs, stands for the number.
func isThat(text string, x sql.NullFloat64) bool {
	if text == "-" || !x.Valid {
		return text == "-" && !x.Valid
	}
	v, err := strconv.ParseFloat(text, 64)
	return err == nil && math.Abs(v-x.Float64) <= 1e-15*math.Abs(x.Float64)
}

// inputsOf finds the component of which the inputs of a computation speak; ok is false
// where no component has them any more, and nobody can see what was computed of it.
func (i *Inspection) inputsOf(inputs string) (digest string, d described, ok bool) {
	f := strings.SplitN(inputs, " ", 5)
	if len(f) < 5 {
		return "", d, false
	}
	for _, d := range i.described[f[0]] {
		if isThat(f[1], sql.NullFloat64{Float64: d.stepS, Valid: true}) && isThat(f[2], d.lowCutHz) && isThat(f[3], d.highCutHz) && d.state == f[4] {
			return f[0], d, true
		}
	}
	return "", d, false
}

// InspectedPair is a pair with the inputs of what is computed of it.
type InspectedPair struct {
	Pair
	Motions [2]StoredMotion
}

// Motion returns the delivered motion, of one of Computations, that a computation is of; ok is false where no
// component has its inputs any more.
func (i *Inspection) Motion(ctx context.Context, g Generation, c InspectedComputation) (m StoredMotion, ok bool, err error) {
	return i.motion(ctx, g, c.ID, c.inputs)
}

func (i *Inspection) motion(ctx context.Context, g Generation, id int64, inputs string) (m StoredMotion, ok bool, err error) {
	digest, d, ok := i.inputsOf(inputs)
	if !ok {
		return m, false, nil
	}
	m = StoredMotion{role: "computation " + strconv.FormatInt(id, 10), samples: d.samples, digest: digest, stepS: d.stepS, state: d.state,
		lowCutHz: d.lowCutHz, highCutHz: d.highCutHz, periods: len(g.Grid.PeriodsS), dampings: len(g.Grid.Dampings)}
	if err := i.tx.QueryRowContext(ctx, `SELECT data FROM series WHERE sha256 = ?`, digest).Scan(&m.data); err != nil {
		return m, false, err
	}
	m.sd, err = i.tiles.whole(ctx, id)
	return m, true, err
}

// Pair does for a pair what Motion does for a component.
func (i *Inspection) Pair(ctx context.Context, g Generation, c InspectedComputation) (p InspectedPair, ok bool, err error) {
	f := strings.Split(c.inputs, " ")
	if len(f) != 7 {
		return p, false, fmt.Errorf("inputs of computation %d: %q", c.ID, c.inputs)
	}
	for k, to := range []*PairComponent{&p.First, &p.Second} {
		id, err := strconv.ParseInt(f[1+k], 10, 64)
		if err != nil {
			return p, false, fmt.Errorf("inputs of computation %d: %w", c.ID, err)
		}
		var inputs string
		if err := i.tx.QueryRowContext(ctx, `SELECT inputs FROM computation WHERE id = ?`, id).Scan(&inputs); err != nil {
			return p, false, err
		}
		if p.Motions[k], ok, err = i.motion(ctx, g, id, inputs); err != nil || !ok {
			return p, false, err
		}
		if ok, err = i.pairComponent(to, &p.Motions[k], f[3+k], f[5+k]); err != nil || !ok {
			return p, false, err
		}
	}
	return p, true, nil
}

// pairComponent describes a component of a pair by the texts of its azimuth and start.
func (i *Inspection) pairComponent(c *PairComponent, m *StoredMotion, azimuth, start string) (ok bool, err error) {
	for _, d := range i.described[m.digest] {
		if d.stepS != m.stepS || d.samples != m.samples || d.start != start || !isThat(azimuth, d.azimuthDeg) {
			continue
		}
		*c = PairComponent{StepS: d.stepS, Samples: d.samples, AzimuthDeg: d.azimuthDeg.Float64, AzimuthKnown: d.azimuthDeg.Valid}
		if start != "-" {
			c.Start, err = parseTime(start)
		}
		return true, err
	}
	return false, nil
}

// Stored returns what the store has of a computation; maximum has that of rotd100, of a
// pair.
func (i *Inspection) Stored(ctx context.Context, c InspectedComputation) (s, maximum Spectra, err error) {
	s, err = i.spectra(ctx, c.ID)
	if err == nil && c.IsPair() {
		maximum, err = i.spectra(ctx, c.maximumID)
	}
	return s, maximum, err
}

func (i *Inspection) spectra(ctx context.Context, id int64) (s Spectra, err error) {
	if s.sd, err = i.tiles.whole(ctx, id); err != nil {
		return s, err
	}
	rows, err := i.tx.QueryContext(ctx, `SELECT name, value FROM measure WHERE computation_id = ?`, id)
	if err != nil {
		return s, err
	}
	type measure struct {
		name  string
		value float64
	}
	measures, err := collect(rows, func(m *measure) []any { return []any{&m.name, &m.value} })
	if err != nil {
		return s, err
	}
	s.measures = map[string]float64{}
	for _, m := range measures {
		s.measures[m.name] = m.value
	}
	rows, err = i.tx.QueryContext(ctx, `SELECT step_s, samples, lead_s, low_cut_hz, high_cut_hz, long_s FROM conditioning WHERE computation_id = ?`, id)
	if err != nil {
		return s, err
	}
	conditioned, err := collect(rows, func(k *Conditioning) []any {
		return []any{&k.StepS, &k.Samples, &k.LeadS, &k.LowCutHz, &k.HighCutHz, &k.LongS}
	})
	if err != nil || len(conditioned) == 0 {
		return s, err
	}
	s.conditioning = &conditioned[0]
	rows, err = i.tx.QueryContext(ctx, `SELECT flag, value, bound, words FROM conditioned_finding WHERE computation_id = ? ORDER BY flag`, id)
	if err != nil {
		return s, err
	}
	s.conditioning.Findings, err = collect(rows, func(f *Finding) []any { return []any{&f.Flag, &f.Value, &f.Bound, &f.Words} })
	return s, err
}
