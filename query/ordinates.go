package query

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"slices"
	"sync"

	"golang.org/x/sync/errgroup"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// ordinates holds the SD in m of motions at periods. Values of one period
// stand together, since that is how statistics read them.
type ordinates struct {
	periodsS []float64
	motions  int
	sd       []float64
}

func newOrdinates(periodsS []float64, motions int) *ordinates {
	return &ordinates{periodsS: periodsS, motions: motions, sd: make([]float64, len(periodsS)*motions)}
}

// at returns the values of all motions at a period.
func (o *ordinates) at(period int) []float64 {
	return o.sd[period*o.motions : (period+1)*o.motions]
}

// Measure is the quantity of a spectrum.
type Measure string

// Spectral displacement in m, pseudo-velocity in m/s and pseudo-acceleration in
// g.
const (
	MeasureSD  Measure = "sd"
	MeasurePSV Measure = "psv"
	MeasurePSA Measure = "psa"
)

// ParseMeasure reads "sd", "psv" or "psa". The empty text gives MeasurePSA.
func ParseMeasure(text string) (Measure, error) {
	if text == "" {
		return MeasurePSA, nil
	}
	m := Measure(text)
	return m, m.validate()
}

func (m Measure) validate() error {
	if m == MeasureSD || m == MeasurePSV || m == MeasurePSA {
		return nil
	}
	return usage("measure", "unknown measure %q; accepted: sd, psv, psa", string(m))
}

// omega is 2π/T, the number that the store keeps beside each period.
func omega(periodS float64) float64 { return 2 * math.Pi / periodS }

// of returns the measure of an SD in m at ω in rad/s, in the order of operations
// of the store's view, so that both give the same bits.
func (m Measure) of(sd, omega float64) float64 {
	switch m {
	case MeasurePSV:
		return sd * omega
	case MeasurePSA:
		return sd * omega * omega / StandardGravity
	}
	return sd
}

// source is where ordinates of a damping come from: one snapshot of a store.
type source struct {
	snapshot *db.Snapshot
	damping  float64
	method   Method
}

// gridPosition returns the position of the damping in the grid, -1 where
// spectra of it are not stored by this method.
func (s *source) gridPosition() int {
	if s.method != spectrum.NigamJennings {
		return -1
	}
	return slices.Index(s.snapshot.Generation.Grid.Dampings, s.damping)
}

// load returns the SD of the motions at the periods: read from the store where
// damping and period are on its grid, computed from the stored samples
// otherwise.
func (s *source) load(ctx context.Context, motions []motion, periodsS []float64) (*ordinates, error) {
	o := newOrdinates(periodsS, len(motions))
	var stored, missing []int // positions in periodsS
	position := s.gridPosition()
	columns := columnsOf(s.snapshot.Generation.Grid.PeriodsS, periodsS)
	for i, column := range columns {
		if position >= 0 && column >= 0 {
			stored = append(stored, i)
		} else {
			missing = append(missing, i)
		}
	}
	if len(stored) > 0 {
		if err := s.read(ctx, o, motions, position, columns, stored); err != nil {
			return nil, err
		}
	}
	if len(missing) > 0 {
		if err := s.compute(ctx, o, motions, missing); err != nil {
			return nil, err
		}
	}
	return o, nil
}

// columnsOf returns the position in grid of each period, -1 for one off it.
func columnsOf(grid, periodsS []float64) []int {
	at := make(map[float64]int, len(grid))
	for i, p := range grid {
		at[p] = i
	}
	out := make([]int, len(periodsS))
	for i, p := range periodsS {
		column, ok := at[p]
		if !ok {
			column = -1
		}
		out[i] = column
	}
	return out
}

// read fills in the stored periods of o.
func (s *source) read(ctx context.Context, o *ordinates, motions []motion, position int, columns, stored []int) error {
	wanted := make(map[db.SpectrumKey]bool, 2*len(motions))
	owner := make(map[db.SpectrumKey]int, 2*len(motions))
	lacking := make([]int, len(motions)) // members whose spectrum has not come yet
	for i := range motions {
		for _, c := range motions[i].members {
			key := db.SpectrumKey{RecordID: c.RecordID, Role: c.Role}
			wanted[key], owner[key] = true, i
			lacking[i]++
		}
	}
	err := s.snapshot.Spectra(ctx, position, wanted, func(key db.SpectrumKey, sd []float64) error {
		i := owner[key]
		m := &motions[i]
		first := lacking[i] == len(m.members)
		lacking[i]--
		for _, p := range stored {
			m.put(&o.at(p)[i], sd[columns[p]], first)
		}
		return nil
	})
	if err != nil {
		return err
	}
	for i, n := range lacking {
		if n != 0 {
			return fmt.Errorf("read spectra: the store lacks a spectrum of record %s", motions[i].record())
		}
	}
	return nil
}

// put takes in the ordinate of one member of the motion.
func (m *motion) put(into *float64, sd float64, first bool) {
	if first {
		*into = sd
		return
	}
	*into = combine(Component(m.role), *into, sd)
}

// compute fills in the missing periods of o from samples. A motion is the unit
// of work; the samples of at most GOMAXPROCS components are in memory. The
// snapshot is one connection, whose calls database/sql carries out one at a
// time; decompression and solving run side by side.
func (s *source) compute(ctx context.Context, o *ordinates, motions []motion, missing []int) error {
	oscillators := make([]spectrum.Oscillator, len(missing))
	for i, p := range missing {
		oscillators[i] = spectrum.Oscillator{PeriodS: o.periodsS[p], Damping: s.damping}
	}
	solvers := &solvers{method: s.method, oscillators: oscillators}
	return inParallel(ctx, len(motions), func(ctx context.Context, i int) error {
		m := &motions[i]
		for k, c := range m.members {
			sd, err := solvers.solve(ctx, s.snapshot, c)
			if err != nil {
				return err
			}
			for j, p := range missing {
				m.put(&o.at(p)[i], sd[j], k == 0)
			}
		}
		return nil
	})
}

// solvers makes one solver a sampling step, when it is first needed.
type solvers struct {
	method      Method
	oscillators []spectrum.Oscillator
	mutex       sync.Mutex
	byStep      map[float64]func() (*spectrum.Solver, error)
}

func (s *solvers) get(stepS float64) (*spectrum.Solver, error) {
	s.mutex.Lock()
	if s.byStep == nil {
		s.byStep = map[float64]func() (*spectrum.Solver, error){}
	}
	build, ok := s.byStep[stepS]
	if !ok {
		build = sync.OnceValues(func() (*spectrum.Solver, error) {
			return spectrum.NewSolver(s.method, stepS, s.oscillators)
		})
		s.byStep[stepS] = build
	}
	s.mutex.Unlock()
	return build()
}

// solve returns the SD of a component, one an oscillator.
func (s *solvers) solve(ctx context.Context, snapshot *db.Snapshot, c *db.HeldComponent) ([]float64, error) {
	solver, err := s.get(c.StepS)
	if err != nil {
		return nil, fmt.Errorf("compute spectrum of %s %s: %w", c.Record.Code, c.Role, err)
	}
	samples, err := snapshot.Samples(ctx, c.ID)
	if err != nil {
		return nil, fmt.Errorf("compute spectrum of %s %s: %w", c.Record.Code, c.Role, err)
	}
	return solver.SD(nil, samples), nil
}

// inParallel calls f for 0 … n-1 from as many goroutines as there are
// processors and returns the first error, after all have ended.
func inParallel(ctx context.Context, n int, f func(ctx context.Context, i int) error) error {
	group, inner := errgroup.WithContext(ctx)
	group.SetLimit(runtime.GOMAXPROCS(0))
	for i := range n {
		if inner.Err() != nil {
			break
		}
		group.Go(func() error { return f(inner, i) })
	}
	if err := group.Wait(); err != nil {
		return err
	}
	return ctx.Err()
}
