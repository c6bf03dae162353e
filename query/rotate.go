package query

import (
	"context"
	"errors"
	"fmt"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// isRotated reports whether the motion is a horizontal pair over all directions.
func (m *motion) isRotated() bool { return Component(m.role).IsRotated() }

// isAssumed reports whether the motion rests on a right angle that nobody stated.
func (m *motion) isAssumed() bool {
	if !m.isRotated() {
		return false
	}
	relation, _ := between(m.members[0], m.members[1])
	return relation.Assumed
}

// between is how the second component lies to the first, by the rule of ingest.
func between(first, second *db.HeldComponent) (spectrum.Relation, error) {
	return spectrum.Between(horizontal(first), horizontal(second))
}

func horizontal(c *db.HeldComponent) spectrum.Horizontal {
	h := spectrum.Horizontal{StepS: c.StepS, Samples: c.Samples, Start: c.Start}
	if c.AzimuthDeg != nil {
		h.AzimuthDeg, h.AzimuthKnown = *c.AzimuthDeg, true
	}
	return h
}

// notRotatable says why two horizontals cannot be rotated, "" where they can.
func notRotatable(first, second *db.HeldComponent) string {
	_, err := between(first, second)
	if e, ok := errors.AsType[*spectrum.PairError](err); ok {
		return e.Reason
	}
	return ""
}

// pairSamples reads two horizontals that can be rotated and makes them fit for
// it, at steps of stepS.
func pairSamples(ctx context.Context, snapshot *db.Snapshot, first, second *db.HeldComponent) (p spectrum.Pair, stepS float64, err error) {
	relation, err := between(first, second)
	if err != nil {
		return p, 0, err
	}
	a, err := readConditioned(ctx, snapshot, first)
	if err != nil {
		return p, 0, err
	}
	b, err := readConditioned(ctx, snapshot, second)
	if err != nil {
		return p, 0, err
	}
	return spectrum.NewPair(a.Acceleration, b.Acceleration, a.SamplesBefore(b)+relation.Later(a.StepS), relation.Deg), a.StepS, nil
}

// findRotated notes peaks of rotated pairs. For ComponentAll these are all that
// are stored; for a rotated component, where its peaks are asked for, those that
// are stored and those of every other pair that is taken whatever its peaks are.
func (p *picker) findRotated(ctx context.Context, snapshot *db.Snapshot, details db.Details, held []db.HeldComponent) error {
	var roles []string
	c := p.selection.Component
	switch {
	case c == ComponentAll:
		roles = []string{db.RoleRotD50, db.RoleRotD100}
	case c.IsRotated() && details&db.DetailPeaks != 0:
		roles = []string{string(c)}
	}
	p.rotated, p.damaged = map[string]map[int64]db.Peaks{}, map[int64]bool{}
	for _, role := range roles {
		stored, err := snapshot.RotatedPeaks(ctx, role)
		if err != nil {
			return err
		}
		p.rotated[role] = stored
	}
	if len(roles) == 0 || !c.IsRotated() {
		return nil
	}
	return p.addPeaks(ctx, snapshot, held)
}

// addPeaks computes the peaks of those pairs that lack them and may be taken.
func (p *picker) addPeaks(ctx context.Context, snapshot *db.Snapshot, held []db.HeldComponent) error {
	var lacking []motion
	for components := range byRecord(held) {
		candidates, reason := p.candidatesOf(components)
		for i := range candidates {
			if m := &candidates[i]; m.rotated == nil && reason == "" {
				taken, err := p.mayTake(m)
				if err != nil {
					return err
				}
				if taken {
					lacking = append(lacking, *m)
				}
			}
		}
	}
	computed := make([]*spectrum.GroundPeaks, len(lacking))
	err := inParallel(ctx, len(lacking), func(ctx context.Context, i int) (err error) {
		computed[i], err = lacking[i].computePeaks(ctx, snapshot)
		if errors.Is(err, db.ErrDamaged) || errors.Is(err, errUnconditioned) {
			return nil
		}
		return err
	})
	if err != nil {
		return err
	}
	for i, peaks := range computed {
		if id := lacking[i].members[0].RecordID; peaks != nil {
			p.rotated[lacking[i].role][id] = db.Peaks(*peaks)
		} else {
			p.damaged[id] = true
		}
	}
	return nil
}

// mayTake reports whether a rotated motion is taken with some peaks.
func (p *picker) mayTake(m *motion) (bool, error) {
	unknown, met, err := p.ask(m)
	return met && p.sitings[m.members[0].Record.Siting] && (unknown == "" || isPeak(unknown)), err
}

// computePeaks is of a rotated motion.
func (m *motion) computePeaks(ctx context.Context, snapshot *db.Snapshot) (*spectrum.GroundPeaks, error) {
	p, stepS, err := pairSamples(ctx, snapshot, m.members[0], m.members[1])
	if err != nil {
		return nil, fmt.Errorf("compute peaks of %s %s: %w", m.record(), m.role, err)
	}
	median, maximum := p.Peaks(stepS)
	if Component(m.role) == ComponentRotD100 {
		return &maximum, nil
	}
	return &median, nil
}

// rotatedSD is the SD of a rotated motion.
func (m *motion) rotatedSD(ctx context.Context, snapshot *db.Snapshot, solvers *spectrum.Solvers) ([]float64, error) {
	p, stepS, err := pairSamples(ctx, snapshot, m.members[0], m.members[1])
	if err != nil {
		return nil, err
	}
	solver, err := solvers.Get(stepS)
	if err != nil {
		return nil, err
	}
	median, maximum := solver.RotD(p.A, p.B, solver.SD(nil, p.A), solver.SD(nil, p.B))
	if Component(m.role) == ComponentRotD100 {
		return maximum, nil
	}
	return median, nil
}
