package pipeline

import (
	"context"
	"errors"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/likeness"
)

// comparison compares the samples of components, once for all time.
type comparison struct {
	tx       *db.Tx
	comparer *likeness.Comparer
	first    map[series]*db.Version // which is compared for all of the same samples
	held     heldMotions
}

func newComparison(tx *db.Tx, comparer *likeness.Comparer, most int) *comparison {
	return &comparison{tx, comparer, map[series]*db.Version{}, heldMotions{most: most, of: map[int64]heldMotion{}}}
}

// add makes the component known; they come in the order of their ids.
func (c *comparison) add(v *db.Version) {
	if c.first[seriesOf(v)] == nil {
		c.first[seriesOf(v)] = v
	}
}

// of returns how much alike the samples of a and b are, with the lag of a after b.
func (c *comparison) of(ctx context.Context, a, b *db.Version) (db.Likeness, error) {
	a, b = c.first[seriesOf(a)], c.first[seriesOf(b)]
	if a.ComponentID < b.ComponentID {
		return c.inOrder(ctx, a, b)
	}
	l, err := c.inOrder(ctx, b, a)
	l.LagS = -l.LagS
	return l, err
}

// inOrder is of for two of which a has the lower id.
func (c *comparison) inOrder(ctx context.Context, a, b *db.Version) (db.Likeness, error) {
	l, ok, err := c.tx.LikenessOf(ctx, a.ComponentID, b.ComponentID)
	if err != nil || ok {
		return l, err
	}
	l = db.Likeness{FirstID: a.ComponentID, SecondID: b.ComponentID, Kind: likeness.Different.String()}
	first, err := c.motion(ctx, a, b)
	if err != nil || first == nil {
		return l, err
	}
	second, err := c.motion(ctx, b, a)
	if err != nil || second == nil {
		return l, err
	}
	v := c.comparer.Compare(first, second)
	l.Kind, l.Scale, l.Correlation, l.BandCorrelation = v.Kind.String(), v.Scale, v.Correlation, v.InBand
	l.LagS = float64(v.Lag) * v.LagStepS
	return l, c.tx.PutLikeness(ctx, l)
}

// motion reads a component's samples, which are compared with another's; nil where the
// store has lost them.
func (c *comparison) motion(ctx context.Context, v, with *db.Version) (*likeness.Motion, error) {
	if h, ok := c.held.of[v.ComponentID]; ok {
		return h.motion, nil
	}
	motion, err := c.tx.MotionOf(ctx, v)
	if errors.Is(err, db.ErrDamaged) {
		c.held.put(v.ComponentID, with.ComponentID, heldMotion{})
		return nil, nil
	}
	if err != nil {
		return nil, err
	}
	m, err := likeness.NewMotion(motion.Acceleration, v.StepS)
	if err != nil {
		return nil, err
	}
	c.held.put(v.ComponentID, with.ComponentID, heldMotion{m, len(motion.Acceleration)})
	return m, nil
}

// mostSamples is how many samples are held at a time, unless one pair has more: 32 MB,
// and as much for what they are between two corners.
const mostSamples = 4 << 20

// heldMotions holds what was read of components. Each is compared with all before it in
// turn, so that what was read first is needed again first, and the rest gives way.
type heldMotions struct {
	most, samples int
	of            map[int64]heldMotion // by component
	order         []int64              // as they were read
}

type heldMotion struct {
	motion  *likeness.Motion // nil where the store has lost it
	samples int
}

// put holds the motion of a component, and drops of the others, but for with, what was
// read last until there is room.
func (h *heldMotions) put(id, with int64, m heldMotion) {
	h.samples += m.samples
	for i := len(h.order) - 1; i >= 0 && h.samples > h.most; i-- {
		if other := h.order[i]; other != with {
			h.samples -= h.of[other].samples
			delete(h.of, other)
			h.order = slices.Delete(h.order, i, i+1)
		}
	}
	h.of[id] = m
	h.order = append(h.order, id)
}
