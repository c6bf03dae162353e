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
	_, known := betweenDeg(m.members[0], m.members[1])
	return !known
}

// betweenDeg is the angle in degrees from the first component to the second, a
// right angle where an azimuth is unknown. Ingest rotates by the same rule.
func betweenDeg(first, second *db.HeldComponent) (deg float64, known bool) {
	if first.AzimuthDeg == nil || second.AzimuthDeg == nil {
		return 90, false
	}
	return *second.AzimuthDeg - *first.AzimuthDeg, true
}

// notRotatable says why two horizontals cannot be rotated, "" where they can.
func notRotatable(first, second *db.HeldComponent) string {
	if first.StepS != second.StepS {
		return "horizontal components of different time steps"
	}
	between, _ := betweenDeg(first, second)
	if _, _, _, _, err := spectrum.Pair(nil, nil, between); errors.Is(err, spectrum.ErrDirections) {
		return "horizontal components too near in direction"
	}
	return ""
}

// pairSamples reads two horizontals that can be rotated and makes them fit for
// it.
func pairSamples(ctx context.Context, snapshot *db.Snapshot, first, second *db.HeldComponent) (a, b []float64, err error) {
	if a, err = snapshot.Samples(ctx, first.RecordID, first.Role); err != nil {
		return nil, nil, err
	}
	if b, err = snapshot.Samples(ctx, second.RecordID, second.Role); err != nil {
		return nil, nil, err
	}
	between, _ := betweenDeg(first, second)
	a, b, _, _, err = spectrum.Pair(a, b, between)
	return a, b, err
}

// rotatedOf returns peaks of rotated pairs by role and the record's id. For
// ComponentAll these are all that is stored; for a rotated component, where its
// peaks are asked for, those of every pair that can be rotated. Otherwise there
// is none.
func rotatedOf(ctx context.Context, snapshot *db.Snapshot, c Component, details db.Details, held []db.HeldComponent) (map[string]map[int64]db.Peaks, error) {
	var roles []string
	switch {
	case c == ComponentAll:
		roles = []string{db.RoleRotD50, db.RoleRotD100}
	case c.IsRotated() && details&db.DetailPeaks != 0:
		roles = []string{string(c)}
	}
	out := map[string]map[int64]db.Peaks{}
	for _, role := range roles {
		stored, err := snapshot.RotatedPeaks(ctx, role)
		if err != nil {
			return nil, err
		}
		if c.IsRotated() {
			if err := addPeaks(ctx, snapshot, c, stored, held); err != nil {
				return nil, err
			}
		}
		out[role] = stored
	}
	return out, nil
}

// addPeaks computes the peaks of those pairs that lack them.
func addPeaks(ctx context.Context, snapshot *db.Snapshot, c Component, stored map[int64]db.Peaks, held []db.HeldComponent) error {
	var lacking []motion
	p := picker{selection: Selection{Component: c}}
	for components := range byRecord(held) {
		candidates, reason := p.candidatesOf(components)
		if _, ok := stored[components[0].RecordID]; !ok && reason == "" {
			lacking = append(lacking, candidates...)
		}
	}
	peaks := make([]spectrum.GroundPeaks, len(lacking))
	err := inParallel(ctx, len(lacking), func(ctx context.Context, i int) (err error) {
		peaks[i], err = lacking[i].computePeaks(ctx, snapshot)
		return err
	})
	if err != nil {
		return err
	}
	for i := range lacking {
		stored[lacking[i].members[0].RecordID] = db.Peaks(peaks[i])
	}
	return nil
}

// computePeaks is of a rotated motion.
func (m *motion) computePeaks(ctx context.Context, snapshot *db.Snapshot) (spectrum.GroundPeaks, error) {
	a, b, err := pairSamples(ctx, snapshot, m.members[0], m.members[1])
	if err != nil {
		return spectrum.GroundPeaks{}, fmt.Errorf("compute peaks of %s %s: %w", m.record(), m.role, err)
	}
	median, maximum := spectrum.RotDPeaks(m.members[0].StepS, a, b)
	if Component(m.role) == ComponentRotD100 {
		return maximum, nil
	}
	return median, nil
}

// rotatedSD is the SD of a rotated motion by a solver of its time step.
func (m *motion) rotatedSD(ctx context.Context, snapshot *db.Snapshot, solver *spectrum.Solver) ([]float64, error) {
	a, b, err := pairSamples(ctx, snapshot, m.members[0], m.members[1])
	if err != nil {
		return nil, err
	}
	median, maximum := solver.RotD(a, b, solver.SD(nil, a), solver.SD(nil, b))
	if Component(m.role) == ComponentRotD100 {
		return maximum, nil
	}
	return median, nil
}
