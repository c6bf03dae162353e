package pipeline

import (
	"cmp"
	"context"
	"math"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/likeness"
)

// versions settles which components of the record, and of all records that may
// hold the same motions as it or as one of those, do. Whatever may be compared is
// compared each with each, so that the order does not matter.
func (s *settler) versions(ctx context.Context, recordID int64) error {
	records, err := s.related(ctx, recordID)
	if err != nil || len(records) < 2 {
		return err
	}
	var all []*db.Version
	for _, id := range records {
		s.settled[db.Subject{Kind: db.SubjectRecord, ID: id}] = true
		found, err := s.tx.VersionsOf(ctx, id)
		if err != nil {
			return err
		}
		for i := range found {
			all = append(all, &found[i])
		}
	}
	slices.SortFunc(all, func(a, b *db.Version) int { return cmp.Compare(a.ComponentID, b.ComponentID) })
	motionOf, err := s.motions(ctx, all)
	if err != nil {
		return err
	}
	for i, v := range all {
		if motionOf[i] == v.MotionID {
			continue
		}
		if err := s.tx.SetMotion(ctx, v.ComponentID, motionOf[i]); err != nil {
			return err
		}
	}
	return nil
}

// related returns the record and all that are connected with it by what
// db.Tx.Related says. It asks that only of records with a relation that none before had:
// of many that hold one motion each is related to all.
func (s *settler) related(ctx context.Context, recordID int64) ([]int64, error) {
	records, seen, followed := []int64{recordID}, map[int64]bool{recordID: true}, map[db.Relation]bool{}
	for i := 0; i < len(records); i++ { // appended to below
		relations, err := s.tx.RelationsOf(ctx, records[i])
		if err != nil {
			return nil, err
		}
		before := len(followed)
		for _, r := range relations {
			followed[r] = true
		}
		if len(followed) == before {
			continue
		}
		found, err := s.tx.Related(ctx, records[i])
		if err != nil {
			return nil, err
		}
		for _, id := range found {
			if !seen[id] {
				seen[id] = true
				records = append(records, id)
			}
		}
	}
	return records, nil
}

// motions returns the motion of each of these components, which are in the order of
// their ids: the least id of those that hold it, 0 where there is no other.
func (s *settler) motions(ctx context.Context, all []*db.Version) ([]int64, error) {
	g := newGroups(all)
	if err := g.uniteEqual(ctx); err != nil {
		return nil, err
	}
	likes, err := s.likes(ctx, g)
	if err != nil {
		return nil, err
	}
	if err := g.uniteLike(ctx, likes); err != nil {
		return nil, err
	}
	out := make([]int64, len(all))
	for i, first := range g.of {
		if len(g.members[first]) > 1 {
			out[i] = all[first].ComponentID
		}
	}
	return out, nil
}

// likes compares what may hold the same motion, but for equal samples.
func (s *settler) likes(ctx context.Context, g *groups) ([]like, error) {
	var out []like
	c := newComparison(s.tx, &s.comparer, mostSamples)
	for _, v := range g.all {
		c.add(v)
	}
	for n, i := range g.alone {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		for _, j := range g.alone[:n] {
			a, b := g.all[i], g.all[j]
			if a.Digest == b.Digest || !g.areOfTwoRecords(i, j) || !canBeOne(a, b) {
				continue
			}
			l, err := c.of(ctx, a, b)
			if err != nil {
				return nil, err
			}
			if strength, exact, same := judge(a, b, l); same {
				out = append(out, like{i, j, strength, exact})
			}
		}
	}
	return out, nil
}

// judge tells of how much alike two components are whether they hold the same motion,
// exactly or by what strength; l has the lag of a after b.
func judge(a, b *db.Version, l db.Likeness) (strength float64, exact, same bool) {
	strength = max(math.Abs(l.Correlation), math.Abs(l.BandCorrelation))
	switch l.Kind {
	case likeness.Different.String():
		return strength, false, false
	case likeness.Near.String():
		return strength, false, isOneSensorProcessed(a, b) && areAtStatedTimes(a, b, l.LagS)
	case likeness.Similar.String():
		return strength, false, !areTwoSensors(a, b)
	}
	return strength, true, true
}
