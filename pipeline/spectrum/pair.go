package spectrum

import (
	"fmt"
	"math"
	"time"

	"swaybook/pipeline/internal/elementary"
)

// rightAngleDeg is how far from a right angle the difference of two azimuths may
// be for rounding: azimuths are decimals of a few digits.
const rightAngleDeg = 1e-9

// minSine is the least sine of the angle between two components that are taken
// for a pair: below it errors of the components are more than doubled.
const minSine = 0.5

// FurthestApart is how far apart the first samples of two components may be. Recorders
// start all channels together; what was cut into files or packets of its own may begin
// some seconds apart. The limit is ours.
const FurthestApart = 10 * time.Second

// Horizontal is what decides, beside the values of the samples, whether a horizontal
// component can be rotated with another one.
type Horizontal struct {
	StepS        float64 // s between samples
	Samples      int
	AzimuthDeg   float64 // degrees clockwise from north
	AzimuthKnown bool
	Start        time.Time // of the first sample; zero where unknown
}

// Relation is how a second component lies to a first one.
type Relation struct {
	Deg     float64 // from the first to the second
	Assumed bool    // Deg is a right angle that nobody stated
	LaterS  float64 // s, whole steps, from the start of the first to that of the second; 0 where one is unknown
}

// Later is by how many samples at steps of stepS, which go into the components' own a whole
// number of times, the second component starts later.
func (r Relation) Later(stepS float64) int { return int(math.Round(r.LaterS / stepS)) }

// The reasons of a PairError.
const (
	ReasonSteps      = "horizontal components of different time steps"
	ReasonStarts     = "horizontal components that start at different times"
	ReasonDirections = "horizontal components too near in direction"
)

// PairError says why two horizontal components cannot be rotated: a reason by
// which cases can be counted, and the particulars of this one.
type PairError struct{ Reason, Detail string }

// Error returns "reason: particulars".
func (e *PairError) Error() string { return e.Reason + ": " + e.Detail }

// Between returns how the second component lies to the first. Where an azimuth is unknown
// a right angle is assumed. Starts are taken to be a whole number of steps apart, since half
// a step may be rounding of what headers say. The error is a *PairError where the two cannot
// be rotated together.
func Between(first, second Horizontal) (Relation, error) {
	if first.StepS != second.StepS {
		return Relation{}, &PairError{ReasonSteps, fmt.Sprintf("%g s and %g s", first.StepS, second.StepS)}
	}
	laterS, err := startsLater(first, second)
	if err != nil {
		return Relation{}, err
	}
	if !first.AzimuthKnown || !second.AzimuthKnown {
		return Relation{Deg: 90, Assumed: true, LaterS: laterS}, nil
	}
	deg := second.AzimuthDeg - first.AzimuthDeg
	if sin, _ := sinCosBetween(deg); !(math.Abs(sin) >= minSine) {
		return Relation{}, &PairError{ReasonDirections, fmt.Sprintf("azimuths %g° and %g°", first.AzimuthDeg, second.AzimuthDeg)}
	}
	return Relation{Deg: deg, LaterS: laterS}, nil
}

// startsLater is the time in s, rounded to whole steps, from the start of the first
// component to that of the second.
func startsLater(first, second Horizontal) (float64, error) {
	if first.Start.IsZero() || second.Start.IsZero() {
		return 0, nil
	}
	apart := second.Start.Sub(first.Start)
	if apart.Abs().Seconds() <= 0.5*first.StepS {
		return 0, nil
	}
	earlier := first
	if apart < 0 {
		earlier = second
	}
	steps := math.Ceil(apart.Abs().Seconds()/first.StepS - 0.5)
	if apart.Abs() > FurthestApart || steps >= float64(earlier.Samples) {
		return 0, &PairError{ReasonStarts, fmt.Sprintf("%v apart", apart.Abs())}
	}
	return math.Copysign(float64(steps*first.StepS), apart.Seconds()), nil
}

// Pair is two horizontal components that are fit for RotD and RotDPeaks: of equal
// length and at a right angle.
type Pair struct {
	A, B []float64
	// ChangedA and ChangedB say that A or B is another motion than the component
	// that it was made of, with another SD. Zeros after the end are a change: the
	// ground then comes to rest along the line to the first of them, where without
	// them it is at rest at once.
	ChangedA, ChangedB bool

	from, to int // what both components have: samples from … to-1
}

// NewPair makes a pair of two components, betweenDeg degrees from first to second;
// it panics where Between finds directions too near. second begins so many samples after
// first, before it where later is negative. Zeros precede what begins later and follow
// what ends earlier, since the ground is still before and after. second is taken at a
// right angle to first, with α the angle,
//
//	second⊥ = (second − first·cos α)/sin α,
//
// and as it is where the two are at a right angle already: the sign does not matter
// to what is taken over all directions.
//
// first and second keep their values, and the pair shares their samples where
// these need no change.
func NewPair(first, second []float64, later int, betweenDeg float64) Pair {
	before, beforeSecond := max(0, -later), max(0, later)
	ends := [2]int{before + len(first), beforeSecond + len(second)}
	n := max(ends[0], ends[1])
	p := Pair{
		A: amongZeros(first, before, n), B: amongZeros(second, beforeSecond, n),
		ChangedA: len(first) < n, ChangedB: len(second) < n,
		from: max(before, beforeSecond), to: min(ends[0], ends[1]),
	}
	p.to = max(p.from, p.to)
	if !(math.Abs(math.Remainder(betweenDeg-90, 180)) < rightAngleDeg) {
		p.B, p.ChangedB = turnedUpright(p.A, p.B, betweenDeg), true
	}
	return p
}

func turnedUpright(first, second []float64, betweenDeg float64) []float64 {
	sin, cos := sinCosBetween(betweenDeg)
	if !(math.Abs(sin) >= minSine) {
		panic("spectrum: directions of a pair are too near")
	}
	out := make([]float64, len(second))
	for i, a := range second {
		out[i] = (a - float64(first[i]*cos)) / sin
	}
	return out
}

func sinCosBetween(deg float64) (sin, cos float64) { return elementary.SincosPi(deg / 180) }

// Peaks is RotDPeaks of the pair, but that PGV and PGD are taken where both
// components have samples, unless that is nowhere, as where a recipe keeps a part of
// each. A velocity that a component has at its end is one of its baseline as a rule, and
// would carry the ground away for as long as the other goes on.
func (p Pair) Peaks(stepS float64) (rotd50, rotd100 GroundPeaks) {
	rotd50, rotd100 = RotDPeaks(stepS, p.A, p.B)
	if p.to-p.from == len(p.A) || p.to == p.from {
		return rotd50, rotd100
	}
	median, maximum := RotDPeaks(stepS, p.A[p.from:p.to], p.B[p.from:p.to])
	rotd50.PGV, rotd50.PGD = median.PGV, median.PGD
	rotd100.PGV, rotd100.PGD = maximum.PGV, maximum.PGD
	return rotd50, rotd100
}

// amongZeros returns the samples with so many zeros before them, and zeros after them up
// to a length of n.
func amongZeros(samples []float64, before, n int) []float64 {
	if len(samples) == n {
		return samples
	}
	out := make([]float64, n)
	copy(out[before:], samples)
	return out
}
