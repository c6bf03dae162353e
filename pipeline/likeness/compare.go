package likeness

import (
	"fmt"
	"math"
)

// Kind is how much alike two motions are.
type Kind int

// From nothing in common to the same samples; the package comment has the limits.
const (
	Different Kind = iota
	Near
	Similar
	Scaled
	Identical
)

func (k Kind) String() string {
	return [...]string{"different", "near", "similar", "scaled", "identical"}[k]
}

// Verdict is what Compare finds of motions a and b.
type Verdict struct {
	Kind   Kind
	Reason string // why they are Different; else empty

	// b is Scale·a + Offset, Offset in the unit of b, as far as the two are alike.
	// Scale is the ratio of standard deviations over the common part, with the sign
	// of the correlation. Both are 0 if the motions are Different, and Offset where
	// they are alike in the band only.
	Scale, Offset float64

	// a begins Lag steps of LagStepS seconds after b. LagStepS is the step of both,
	// or, of different ones, that of the finer, or the next whole part of the coarser
	// step below it.
	Lag      int
	LagStepS float64

	// Pearson's correlation at the lag where its size is greatest, and the number of
	// samples that it is taken over. Zero if no correlation was taken.
	Correlation float64
	Common      int
	// The same of both motions in the band. Zero also where the samples themselves are
	// Scaled or Identical.
	InBand float64
}

// Comparer compares motions. It keeps buffers and transforms between calls, which
// must not overlap; the zero value is ready.
type Comparer struct {
	search search
}

// Compare tells whether a and b are the same motion. Exchanging a and b inverts
// Scale and negates Lag.
//
// A pair whose greatest swings are not alike costs some thousand multiplications, any
// other three Fourier transforms of a little more than the samples of the longer one,
// or six.
func (c *Comparer) Compare(a, b *Motion) Verdict {
	v := c.compare(a, b, &asTheyAre)
	if v.Kind >= Scaled {
		return v
	}
	w := c.compareInBand(a, b)
	if w.Kind <= v.Kind {
		v.InBand = w.Correlation
		return v
	}
	w.Correlation, w.InBand = v.Correlation, w.Correlation
	return w
}

// compareInBand compares what motions are between the corners that both have.
func (c *Comparer) compareInBand(a, b *Motion) Verdict {
	inA, inB := bandsOf(a, b)
	if inA == nil || inB == nil {
		return Verdict{}
	}
	v := c.compare(inA, inB, &betweenCorners)
	v.Scale, v.Offset = float64(v.Scale*(a.unit/b.unit)), 0
	return v
}

// bandsOf returns both motions between the corners that both have; nil where that
// leaves nothing.
func bandsOf(a, b *Motion) (inA, inB *Motion) {
	switch cornerA, cornerB := cornerOf(a.stepS), cornerOf(b.stepS); {
	case cornerA > cornerB:
		return a.banded(cornerB), b.inBand()
	case cornerB > cornerA:
		return a.inBand(), b.banded(cornerA)
	}
	return a.inBand(), b.inBand()
}

// compare compares two series by these limits.
func (c *Comparer) compare(a, b *Motion, l *limits) Verdict {
	if a.still() || b.still() {
		return Verdict{Reason: "no motion"}
	}
	if !haveSwingsInCommon(a, b) {
		return Verdict{Reason: "their greatest swings are not alike"}
	}
	exchanged := a.stepS < b.stepS
	if exchanged {
		a, b = b, a
	}
	ratio, stepS, reason := steps(a, b)
	if reason == "" && len(a.samples)+len(b.samples) > longest/ratio {
		reason = "too long to compare"
	}
	if reason != "" {
		return Verdict{Reason: reason}
	}
	c.search.load(a, b, ratio, stepS)
	v := c.judge(l)
	if v.Common == 0 {
		return Verdict{Reason: "no lag at which they share most of their energy"}
	}
	v.LagStepS = stepS
	if exchanged {
		v.Lag = -v.Lag
	}
	if v.Kind == Different {
		return v
	}
	// The search has both in units of their own, without their means.
	v.Offset = (v.Offset + b.mean - float64(v.Scale*a.mean)) / b.unit
	v.Scale = float64(v.Scale * (a.unit / b.unit))
	if v.Kind == Scaled && math.Abs(v.Scale-1) <= sameScale {
		v.Kind = Identical
	}
	if exchanged {
		v.Scale, v.Offset = 1/v.Scale, -v.Offset/v.Scale
	}
	return v
}

// judge makes a verdict of the two series at hand, without LagStepS: of the fragment that
// one is of the other, where it is exactly that, or else of the whole.
func (c *Comparer) judge(l *limits) Verdict {
	whole, fragment := c.search.best()
	if fragment.found && fragment.r2 > float64(l.exact*l.exact) {
		if v := judge(c.search.at(fragment.lag), l); v.Kind >= Scaled {
			v.Lag = fragment.lag
			return v
		}
	}
	if !whole.found {
		return Verdict{}
	}
	v := judge(c.search.at(whole.lag), l)
	v.Lag = whole.lag
	return v
}

// judge makes a verdict of what two series have in common.
func judge(p pair, l *limits) Verdict {
	v := Verdict{Correlation: p.correlation, Common: p.n}
	size := math.Abs(p.correlation)
	switch {
	case p.crossings < crossings:
		v.Reason = fmt.Sprintf("only %d crossings of zero in common", p.crossings)
		return v
	case size < l.near:
		v.Reason = fmt.Sprintf("correlation %.3f at best", p.correlation)
		return v
	case size < l.similar:
		v.Kind = Near
	case size < l.exact:
		v.Kind = Similar
	default:
		v.Kind = Scaled
	}
	v.Scale = math.Copysign(p.deviation2/p.deviation1, p.correlation)
	v.Offset = p.mean2 - float64(v.Scale*p.mean1)
	return v
}
