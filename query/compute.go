package query

import (
	"context"
	"errors"
	"fmt"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/spectrum"
)

// task is to compute oscillators.
type task struct {
	oscillators []spectrum.Oscillator
	positions   []int   // of each among the ordinates
	keeper      *keeper // nil where nothing is kept
}

// newTask is to compute some of the oscillators of o, given by position.
func newTask(o *ordinates, positions []int) *task {
	t := &task{positions: positions}
	for _, p := range positions {
		t.oscillators = append(t.oscillators, o.oscillators[p])
	}
	return t
}

// compute carries the task out for some of the motions of o, given by position, and notes
// those whose samples do not allow it. A motion is the unit of work; the samples of at
// most GOMAXPROCS motions are in memory. The snapshot is one connection, whose calls
// database/sql carries out one at a time; decompression and solving run side by side.
func (s *source) compute(ctx context.Context, o *ordinates, motions []motion, out *unfit, which []int, t *task) error {
	if len(t.oscillators) == 0 {
		return nil
	}
	solvers := spectrum.NewSolvers(s.method, t.oscillators)
	return inParallel(ctx, len(which), func(ctx context.Context, k int) error {
		m := &motions[which[k]]
		if out.has(which[k]) {
			return nil
		}
		err := solve(ctx, solvers, s.snapshot, m, func(c *computed) {
			o.put(which[k], m, c.isFirst, t.positions, c.sd)
			if t.keeper != nil {
				t.keeper.add(ctx, c)
			}
		})
		if errors.Is(err, db.ErrDamaged) {
			out.add(which[k], reasonDamaged)
			return nil
		}
		if errors.Is(err, errUnconditioned) {
			out.add(which[k], errUnconditioned.Error())
			return nil
		}
		if step, ok := errors.AsType[*spectrum.StepError](err); ok {
			out.add(which[k], step.Error())
			return nil
		}
		if err != nil {
			return fmt.Errorf("compute spectrum of %s %s: %w", m.record(), m.role, err)
		}
		return nil
	})
}

// computed is the SD in m, one an oscillator, of a record and role.
type computed struct {
	recordID int64
	role     string
	sd       []float64
	isFirst  bool // of the motion's spectra
}

// solve hands over what is computed of what the motion is made of: of each component, or
// of the rotated pair at once.
func solve(ctx context.Context, solvers *spectrum.Solvers, snapshot *db.Snapshot, m *motion, put func(*computed)) error {
	if m.isRotated() {
		sd, err := m.rotatedSD(ctx, snapshot, solvers)
		if err == nil {
			put(&computed{m.members[0].RecordID, m.role, sd, true})
		}
		return err
	}
	for k, c := range m.members {
		conditioned, err := readConditioned(ctx, snapshot, c)
		if err != nil {
			return err
		}
		solver, err := solvers.Get(conditioned.StepS)
		if err != nil {
			return err
		}
		put(&computed{c.RecordID, c.Role, solver.SD(nil, conditioned.Acceleration), k == 0})
	}
	return nil
}

// readConditioned reads a component's motion and carries out the recipe of the
// generation, as was done before its stored spectra were computed.
func readConditioned(ctx context.Context, snapshot *db.Snapshot, c *db.HeldComponent) (condition.Conditioned, error) {
	recipe, err := condition.FromCanonical(snapshot.Generation.Recipe.Steps)
	if err != nil {
		return condition.Conditioned{}, err
	}
	delivered, err := snapshot.Motion(ctx, c.ID)
	if err != nil {
		return condition.Conditioned{}, err
	}
	out, err := recipe.Apply(condition.Component(delivered))
	if err != nil {
		return out, fmt.Errorf("%w: %w", errUnconditioned, err)
	}
	return out, nil
}

// errUnconditioned is of components on which the recipe cannot be carried out.
var errUnconditioned = errors.New("the recipe cannot condition it, see query records --rejected")
