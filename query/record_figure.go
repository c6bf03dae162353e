package query

import (
	"context"
	"errors"
	"math"

	"swaybook/db"
	"swaybook/pipeline/intensity"
	"swaybook/pipeline/spectrum"
)

// RecordFigure is what figures of a record show beside what is known of it.
type RecordFigure struct {
	Traces   []RecordTrace
	PeriodsS []float64 // of the grid, ascending
	Spectra  []RecordSpectrum
}

// RecordTrace is the motion of a component of which its spectra were computed.
type RecordTrace struct {
	Component string
	// FromS is when it begins after the first sample that any component was delivered with.
	FromS, StepS float64
	Acceleration []float64 // m/s²
	Ground       spectrum.GroundMotion
	Shares       []float64 // of Arias intensity, by sample
	Marks        []RecordMark
}

// RecordMark is a share of Arias intensity and the time by which it has come, counted from
// the trace's first sample.
type RecordMark struct{ Share, AtS float64 }

// markedShares are those between which significant durations lie.
var markedShares = []float64{0.05, 0.75, 0.95}

// RecordSpectrum is the spectrum of a role at one damping.
type RecordSpectrum struct {
	Component string
	Damping   float64
	SD        []float64 // m, by period
	IsUsable  []bool    // by period: inside the usable band
}

// figure reads the motions of the components and the spectra of all roles: of one component
// that is asked for at all dampings of the grid, of a whole record at the one nearest to 5 %.
func (q *RecordQuestion) figure(ctx context.Context, snapshot *db.Snapshot, a *RecordAnswer, starts map[string]float64) (*RecordFigure, error) {
	f := &RecordFigure{}
	for i := range a.motions {
		if a.motions[i].isRotated() {
			continue
		}
		c := a.motions[i].members[0]
		trace, err := newTrace(ctx, snapshot, c, starts[c.Role])
		if errors.Is(err, db.ErrDamaged) || errors.Is(err, errUnconditioned) {
			a.Lacking = append(a.Lacking, LackingRow{c.Role, "trace: " + err.Error()})
			continue
		}
		if err != nil {
			return nil, err
		}
		f.Traces = append(f.Traces, trace)
	}
	grid := &snapshot.Generation.Grid
	dampings := grid.Dampings
	if q.Component == "" {
		dampings = []float64{nearestTo(dampings, usualDamping)}
	}
	f.PeriodsS = ascending(grid.PeriodsS)
	return f, f.addSpectra(ctx, snapshot, a, dampings)
}

// nearestTo is the value that is nearest to x, the first of equally near ones; NaN of none.
func nearestTo(values []float64, x float64) float64 {
	best := math.NaN()
	for _, v := range values {
		if !(math.Abs(v-x) >= math.Abs(best-x)) {
			best = v
		}
	}
	return best
}

func newTrace(ctx context.Context, snapshot *db.Snapshot, c *db.HeldComponent, startS float64) (RecordTrace, error) {
	m, err := readConditioned(ctx, snapshot, c)
	if err != nil {
		return RecordTrace{}, err
	}
	energy := intensity.EnergyOf(m.Acceleration, m.StepS)
	t := RecordTrace{
		Component: c.Role, FromS: startS - m.LeadS, StepS: m.StepS, Acceleration: m.Acceleration,
		Ground: spectrum.Integrate(m.StepS, m.Acceleration), Shares: energy.Shares(),
	}
	for _, share := range markedShares {
		t.Marks = append(t.Marks, RecordMark{share, energy.When(share)})
	}
	return t, nil
}

func (f *RecordFigure) addSpectra(ctx context.Context, snapshot *db.Snapshot, a *RecordAnswer, dampings []float64) error {
	var oscillators []spectrum.Oscillator
	for _, damping := range dampings {
		oscillators = append(oscillators, dampedBy(damping, f.PeriodsS)...)
	}
	s := source{snapshot: snapshot}
	o, unfit, err := s.loadMotions(ctx, a.motions, oscillators)
	if err != nil {
		return err
	}
	for i := range a.motions {
		m := &a.motions[i]
		if reason, isOut := unfit[i]; isOut {
			a.Lacking = append(a.Lacking, LackingRow{m.role, "spectra: " + reason})
			continue
		}
		band := m.usableBand()
		usable := make([]bool, len(f.PeriodsS))
		for p, t := range f.PeriodsS {
			usable[p] = band.has(t)
		}
		for d, damping := range dampings {
			sd := make([]float64, len(f.PeriodsS))
			for p := range sd {
				sd[p] = o.at(d*len(sd) + p)[i]
			}
			f.Spectra = append(f.Spectra, RecordSpectrum{m.role, damping, sd, usable})
		}
	}
	return nil
}
