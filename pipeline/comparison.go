package pipeline

import (
	"context"
	"errors"

	"swaybook/db"
	"swaybook/pipeline/likeness"
)

// comparison compares the samples of components, once for all time.
type comparison struct {
	tx       *db.Tx
	comparer *likeness.Comparer
	first    map[series]*db.Version     // which is compared for all of the same samples
	read     map[int64]*likeness.Motion // nil where the store has lost it
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
	first, err := c.motion(ctx, a)
	if err != nil || first == nil {
		return l, err
	}
	second, err := c.motion(ctx, b)
	if err != nil || second == nil {
		return l, err
	}
	v := c.comparer.Compare(first, second)
	l.Kind, l.Scale, l.Correlation, l.BandCorrelation = v.Kind.String(), v.Scale, v.Correlation, v.InBand
	l.LagS = float64(v.Lag) * v.LagStepS
	return l, c.tx.PutLikeness(ctx, l)
}

// motion reads a component's samples; nil where the store has lost them.
func (c *comparison) motion(ctx context.Context, v *db.Version) (*likeness.Motion, error) {
	if m, ok := c.read[v.ComponentID]; ok {
		return m, nil
	}
	samples, err := c.tx.SamplesOf(ctx, v)
	if errors.Is(err, db.ErrDamaged) {
		c.read[v.ComponentID] = nil
		return nil, nil
	}
	if err != nil {
		return nil, err
	}
	c.read[v.ComponentID], err = likeness.NewMotion(samples, v.StepS)
	return c.read[v.ComponentID], err
}
