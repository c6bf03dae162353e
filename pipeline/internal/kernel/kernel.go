package kernel

import "math"

// Lanes is the number of oscillators of a block. It is a multiple of the lanes
// that every kernel has in flight, and one bit for each fits into a uint32.
const Lanes = 32

// Row is one number for each oscillator.
type Row [Lanes]float64

// Slow holds the coefficients of the difference equation
//
//	w' = Decay·w + (a' + Middle·a + Oldest·a⁻) − Stiffness·u
//	u' = u + w'
//
// with a⁻, a, a' successive samples of the ground.
type Slow struct{ Decay, Stiffness, Middle, Oldest Row }

// Train holds the coefficients of the response to a train of impulses, one number a
// for each step:
//
//	x' = x + w
//	w' = Decay·w + a − Stiffness·x
type Train struct{ Decay, Stiffness Row }

// trainBeyond is the number of steps beyond the end that peaks of MarchTrain take in.
const trainBeyond = 2

// MarchTrain takes oscillators from the state from.X, from.Y = (x, w) through a step
// for each number of a but the last two, and sets to.X and to.Y to the state then and
// from.Peak to the greatest |x|, that of the start and of the two steps beyond
// included. to may be from. It panics without these two.
//
// If states or ground are not finite, states follow IEEE 754 and peaks are
// unspecified.
func MarchTrain(q *Train, from, to *Mark, a []float64) {
	if len(a) < trainBeyond {
		panic("kernel: no steps beyond the end")
	}
	current.marchTrain(q, from, to, &a[0], len(a)-trainBeyond)
}

// Fast holds the coefficients of the rotation
//
//	y' = YY·y + YZ·z − Jump·b
//	z' = ZY·y + ZZ·z + b
//
// with b the ground's number of the step.
type Fast struct{ YY, YZ, ZY, ZZ, Jump Row }

// Mark is the state of a block of oscillators, (u, w) or (y, z), and the
// greatest measure of a march that began with it.
type Mark struct{ X, Y, Peak Row }

// Inputs is the number of inputs of a stride, and Input holds those of one, the
// rest being of no account: sixteen fill whole vectors.
const Inputs = 11

type Input [16]float64

// Stride holds the coefficients of a step over several samples, with the inputs
// f of the step:
//
//	u' = u + UU·u + UV·v + Σ Weights[k].U·f[k]
//	v' = v + VU·u + VV·v + Σ Weights[k].V·f[k]
type Stride struct {
	UU, UV, VU, VV Row
	Weights        [Inputs]struct{ U, V Row }
}

// MarchStride takes oscillators from the state from.X, from.Y = (u, v) through
// one step for each of inputs, sets to.X and to.Y to the state at the end and
// from.Peak to the greatest |u| between steps, both ends included. to may be
// from. Of numbers that are not finite it makes what MarchSlow makes.
func MarchStride(q *Stride, from, to *Mark, inputs []Input) {
	if len(inputs) == 0 {
		from.Peak, to.X, to.Y = absolute(&from.X), from.X, from.Y
		return
	}
	current.marchStride(q, from, to, &inputs[0], len(inputs))
}

// Mix sets inputs[i] to Σ shares[j]·a[i·m + j] with j from 0 to m = len(shares)
// − 1, number by number. It panics unless m > 0 and len(a) is len(inputs)·m + 1.
func Mix(inputs, shares []Input, a []float64) {
	m := len(shares) - 1
	if m < 1 || len(a) != len(inputs)*m+1 {
		panic("kernel: number of samples is not that of inputs")
	}
	if len(inputs) > 0 {
		current.mix(&inputs[0], &shares[0], &a[0], m, len(inputs))
	}
}

// Line is a pair of numbers of one row of values, for a Screen.
type Line struct{ First, Second float64 }

// Screen holds for each lane the limit Limit − First·line.First −
// Second·line.Second of a value.
type Screen struct{ Limit, First, Second Row }

// MarchSlow takes oscillators from the state from.X, from.Y at sample a[1]
// through the samples a[2:], sets to.X and to.Y to the state at the last of them
// and from.Peak to the greatest |u|, that of the start included. to may be
// from.
//
// Without a third sample the state is copied. If states or ground are not
// finite, states follow IEEE 754 and peaks are unspecified.
func MarchSlow(q *Slow, from, to *Mark, a []float64) {
	if len(a) < 3 {
		from.Peak, to.X, to.Y = absolute(&from.X), from.X, from.Y
		return
	}
	current.marchSlow(q, from, to, &a[0], len(a)-2)
}

// TraceSlow is MarchSlow that keeps every state: it sets rows[i] to u at sample
// a[i+2], for the lanes whose bits want has; other lanes of rows are unspecified.
// It panics if len(rows) is not len(a) − 2.
func TraceSlow(q *Slow, from *Mark, a []float64, rows []Row, want uint32) {
	if len(rows) != max(len(a)-2, 0) {
		panic("kernel: number of rows is not the number of steps")
	}
	if len(rows) > 0 {
		current.traceSlow(q, from, &a[0], len(rows), &rows[0], want)
	}
}

// TraceEach is TraceSlow with a ground of its own for each lane, and for all
// lanes.
func TraceEach(q *Slow, from *Mark, ground, rows []Row) {
	if len(rows) != max(len(ground)-2, 0) {
		panic("kernel: number of rows is not the number of steps")
	}
	if len(rows) > 0 {
		current.traceEach(q, from, &ground[0], len(rows), &rows[0])
	}
}

// TraceFastEach marches a ground a of its own for each lane and keeps every step: it
// sets rows[i] to the state at the start of step i and to the displacement there,
//
//	y + Jump·(a' − a) − phase·a,
//
// in place of its peak, from the state at the start of step 0. The number b of a
// step is the change of the slope of a at its end. It panics unless ground has two
// rows more.
func TraceFastEach(q *Fast, phase *Row, from *Mark, ground []Row, rows []Mark) {
	checkLines(len(ground)-2, len(rows), len(rows))
	if len(rows) > 0 {
		current.traceFastEach(q, phase, from, &ground[0], len(rows), &rows[0])
	}
}

// GatherUnit is what the number of rows of Gather is a multiple of.
const GatherUnit = 8

// Gather sets lane l of rows[i] to a[from[l]+i]. It panics if the number of rows
// is no multiple of GatherUnit, or a does not have all of these.
func Gather(rows []Row, a []float64, from *[Lanes]int) {
	if len(rows)%GatherUnit != 0 {
		panic("kernel: number of rows is not one of whole units")
	}
	for _, first := range from {
		if first < 0 || first+len(rows) > len(a) {
			panic("kernel: rows reach beyond what is gathered")
		}
	}
	if len(rows) > 0 {
		current.gather(&rows[0], &a[0], from, len(rows))
	}
}

// MarchFast takes oscillators from the state from.X, from.Y through steps with
// the numbers bend, sets to.X and to.Y to the state after the last and from.Peak
// to the greatest y² + z² at their starts, 0 for no steps. to may be from.
//
// If states or ground are not finite, states follow IEEE 754 and peaks are
// unspecified.
func MarchFast(q *Fast, from, to *Mark, bend []float64) {
	if len(bend) == 0 {
		from.Peak, to.X, to.Y = Row{}, from.X, from.Y
		return
	}
	current.marchFast(q, from, to, &bend[0], len(bend))
}

// TraceFast is MarchFast that keeps every state: it sets rows[i] to the state at
// the start of step i and the measure y² + z² there, for the lanes whose bits
// want has; other lanes of rows are unspecified. It panics if len(rows) is not
// len(bend).
func TraceFast(q *Fast, from *Mark, bend []float64, rows []Mark, want uint32) {
	if len(rows) != len(bend) {
		panic("kernel: number of rows is not the number of steps")
	}
	if len(rows) > 0 {
		current.traceFast(q, from, &bend[0], len(rows), &rows[0], want)
	}
}

// ScreenPeaks sets bit l of flags[i] where the peak of lane l of marks[i] exceeds
// the lane's limit at lines[i], and clears it elsewhere. It panics if lengths
// differ.
func ScreenPeaks(s *Screen, marks []Mark, lines []Line, flags []uint32) {
	checkLines(len(marks), len(lines), len(flags))
	if len(marks) > 0 {
		current.screen(s, &marks[0].Peak[0], markBytes, &lines[0], &flags[0], len(marks))
	}
}

// ScreenSquares is ScreenPeaks for peaks that are squares, compared with the
// square of the limit, or with 0 where the limit is negative.
func ScreenSquares(s *Screen, marks []Mark, lines []Line, flags []uint32) {
	checkLines(len(marks), len(lines), len(flags))
	if len(marks) > 0 {
		current.screenSquares(s, &marks[0].Peak[0], markBytes, &lines[0], &flags[0], len(marks))
	}
}

// StepScreen holds for each lane what bounds the value between two rows: the
// curvature
//
//	m = Force·line.First + Curve·max(|x|, |x'|) + Slope·|x' − x|
//
// of a step from x to x', and the value Best that is to be exceeded, at least
// as great as every |x|.
type StepScreen struct{ Best, Force, Curve, Slope Row }

// ScreenSteps sets bit l of flags[i] where the value of lane l can exceed Best
// between rows[i] and rows[i+1]: where
//
//	max(0, m/2 − |x' − x|)² > 2·m·(Best − max(|x|, |x'|)),
//
// and l is one of the bits of want, and clears it elsewhere. It panics unless there is one row more than there are
// lines and flags.
func ScreenSteps(s *StepScreen, rows []Row, lines []Line, flags []uint32, want uint32) {
	checkLines(len(rows)-1, len(lines), len(flags))
	clear(flags)
	if len(lines) > 0 {
		current.screenSteps(s, &rows[0], &lines[0], &flags[0], len(lines), want)
	}
}

// FastScreen holds for each lane what bounds the displacement within a step of Fast:
// with s >= √(y² + z²) it departs from its chord with a curvature of at most Curve·s,
// and from the straight line that is left of it without y by s. Phase is as in
// TraceFastEach, and Limit is what is to be exceeded.
type FastScreen struct{ Limit, Curve, Phase Row }

// ScreenFast sets bit l of flags[i] where the displacement of lane l can exceed Limit
// between rows[i] and rows[i+1] of TraceFastEach on a ground: where, with
//
//	s = max(|y|, |z|) + (√2 − 1)·min(|y|, |z|),  m = Curve·s,
//
// s and the greater end of the line exceed Limit, and
//
//	max(0, m/2 − |x' − x|)² > 2·m·(Limit − max(|x|, |x'|))
//
// as of ScreenSteps. It clears the bit elsewhere. It panics unless there is one row
// more than there are flags, of both. s follows from √(1 + r²) being convex in r, so
// that from 0 to 1 it is below its chord.
func ScreenFast(s *FastScreen, rows []Mark, ground []Row, flags []uint32) {
	checkLines(len(rows)-1, len(ground)-1, len(flags))
	if len(flags) > 0 {
		current.screenFast(s, &rows[0], &ground[0], &flags[0], len(flags))
	}
}

// GreatestPeaks sets top to the greatest magnitude of the peaks of each lane and at
// to the number
// of the first mark that has it, both 0 for no marks.
func GreatestPeaks(top, at *Row, marks []Mark) {
	if len(marks) == 0 {
		*top, *at = Row{}, Row{}
		return
	}
	current.greatest(top, at, &marks[0].Peak[0], markBytes, len(marks))
}

// GreatestRows is GreatestPeaks for the magnitudes of rows.
func GreatestRows(top, at *Row, rows []Row) {
	if len(rows) == 0 {
		*top, *at = Row{}, Row{}
		return
	}
	current.greatest(top, at, &rows[0][0], rowBytes, len(rows))
}

const (
	rowBytes  = Lanes * 8
	markBytes = 3 * rowBytes
)

func checkLines(values, lines, flags int) {
	if lines != values || flags != values {
		panic("kernel: numbers of values, lines and flags differ")
	}
}

func absolute(x *Row) (y Row) {
	for l := range y {
		y[l] = math.Abs(x[l])
	}
	return y
}
