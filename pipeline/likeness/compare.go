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
	Similar
	Scaled
	Identical
)

func (k Kind) String() string {
	return [...]string{"different", "similar", "scaled", "identical"}[k]
}

// Verdict is what Compare finds of motions a and b.
type Verdict struct {
	Kind   Kind
	Reason string // why they are Different; else empty

	// b is Scale·a + Offset, Offset in the unit of b, as far as the two are alike.
	// Scale is the ratio of standard deviations over the common part, with the sign
	// of Correlation. Both are 0 if the motions are Different.
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
// other three Fourier transforms of a little more than the samples of the longer one.
func (c *Comparer) Compare(a, b *Motion) Verdict {
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
	if reason != "" {
		return Verdict{Reason: reason}
	}
	c.search.load(a, b, ratio, stepS)
	lag, found := c.search.best()
	if !found {
		return Verdict{Reason: "no lag at which they share most of their energy"}
	}
	v := judge(c.search.at(lag))
	v.Lag, v.LagStepS = lag, stepS
	if exchanged {
		v.Lag = -lag
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

// judge makes a verdict of what two series have in common.
func judge(p pair) Verdict {
	v := Verdict{Correlation: p.correlation, Common: p.n}
	size := math.Abs(p.correlation)
	switch {
	case p.crossings < crossings:
		v.Reason = fmt.Sprintf("only %d crossings of zero in common", p.crossings)
		return v
	case size < similar:
		v.Reason = fmt.Sprintf("correlation %.3f at best", p.correlation)
		return v
	case size < exact:
		v.Kind = Similar
	default:
		v.Kind = Scaled
	}
	v.Scale = math.Copysign(p.deviation2/p.deviation1, p.correlation)
	v.Offset = p.mean2 - float64(v.Scale*p.mean1)
	return v
}
