//go:build !noasm

package kernel

import "golang.org/x/sys/cpu"

// vectorLevels asks the processor, and through it the operating system, which
// vector registers may be used.
func vectorLevels() []level {
	var list []level
	if cpu.X86.HasAVX512F {
		list = append(list, level{
			name:          AVX512,
			marchSlow:     slowMarch(marchSlowAVX512),
			traceSlow:     slowTrace(traceSlowAVX512),
			marchTrain:    trainMarch(marchTrainAVX512),
			marchFast:     fastMarch(marchFastAVX512),
			traceFast:     fastTrace(traceFastAVX512),
			screen:        screening(screenAVX512),
			screenSquares: screening(screenSquaresAVX512),
			screenSteps:   stepScreening(screenStepsAVX512),
			greatest:      maximum(greatestAVX512),
			traceEach:     eachTrace(traceEachAVX512),
			traceFastEach: eachFastTrace(traceFastEachAVX512),
			screenFast:    fastScreening(screenFastAVX512),
			gather:        gathering(gatherAVX512),
			turn:          turning(turnAVX512),
			marchStride:   strideMarch(marchStrideAVX512),
			mix:           mixing(mixAVX512),
			widen:         widening(widenAVX512),
			above:         masking(aboveAVX512),
			screenFence:   fencing(screenFenceAVX512),
			greatestOf:    greatestNumber(greatestOfAVX512),
			exceeds:       exceeding(exceedsAVX512),
			sweep:         sweeping(sweepAVX512),
			displace:      displacing(displaceAVX512),
			vibrate:       vibrating(vibrateAVX512),
			screenOrbits:  orbiting(screenOrbitsAVX512),
			project:       projecting(projectAVX512),
		})
	}
	if cpu.X86.HasAVX2 && cpu.X86.HasFMA {
		list = append(list, level{
			name:          AVX2,
			marchSlow:     slowMarch(marchSlowAVX2),
			traceSlow:     slowTrace(traceSlowAVX2),
			marchTrain:    trainMarch(marchTrainAVX2),
			marchFast:     fastMarch(marchFastAVX2),
			traceFast:     fastTrace(traceFastAVX2),
			screen:        screening(screenAVX2),
			screenSquares: screening(screenSquaresAVX2),
			screenSteps:   stepScreening(screenStepsAVX2),
			greatest:      maximum(greatestAVX2),
			traceEach:     eachTrace(traceEachAVX2),
			traceFastEach: eachFastTrace(traceFastEachAVX2),
			screenFast:    fastScreening(screenFastAVX2),
			gather:        gathering(gatherAVX2),
			turn:          turning(turnAVX2),
			marchStride:   strideMarch(marchStrideAVX2),
			mix:           mixing(mixAVX2),
			widen:         widening(widenAVX2),
			above:         masking(aboveAVX2),
			screenFence:   fencing(screenFenceAVX2),
			greatestOf:    greatestNumber(greatestOfAVX2),
			exceeds:       exceeding(exceedsAVX2),
			sweep:         sweeping(sweepAVX2),
			displace:      displacing(displaceAVX2),
			vibrate:       vibrating(vibrateAVX2),
			screenOrbits:  orbiting(screenOrbitsAVX2),
			project:       projecting(projectAVX2),
		})
	}
	return list
}

// The assembly takes blocks by their first number, because its generator does
// not know their types. The functions below give it those.

type marching = func(q, from, to, ground *float64, steps int)

type tracing = func(q, from, ground *float64, steps int, rows *float64, want uint32)

func slowMarch(f marching) func(*Slow, *Mark, *Mark, *float64, int) {
	return func(q *Slow, from, to *Mark, ground *float64, steps int) {
		f(&q.Decay[0], &from.X[0], &to.X[0], ground, steps)
	}
}

func slowTrace(f tracing) func(*Slow, *Mark, *float64, int, *Row, uint32) {
	return func(q *Slow, from *Mark, ground *float64, steps int, rows *Row, want uint32) {
		f(&q.Decay[0], &from.X[0], ground, steps, &rows[0], want)
	}
}

func trainMarch(f marching) func(*Train, *Mark, *Mark, *float64, int) {
	return func(q *Train, from, to *Mark, ground *float64, steps int) {
		f(&q.Decay[0], &from.X[0], &to.X[0], ground, steps)
	}
}

func fastMarch(f marching) func(*Fast, *Mark, *Mark, *float64, int) {
	return func(q *Fast, from, to *Mark, ground *float64, steps int) {
		f(&q.YY[0], &from.X[0], &to.X[0], ground, steps)
	}
}

func fastTrace(f tracing) func(*Fast, *Mark, *float64, int, *Mark, uint32) {
	return func(q *Fast, from *Mark, ground *float64, steps int, rows *Mark, want uint32) {
		f(&q.YY[0], &from.X[0], ground, steps, &rows.X[0], want)
	}
}

func screening(f func(s, values *float64, stride int, lines *float64, flags *uint32, n int)) func(*Screen, *float64, int, *Line, *uint32, int) {
	return func(s *Screen, values *float64, stride int, lines *Line, flags *uint32, n int) {
		f(&s.Limit[0], values, stride, &lines.First, flags, n)
	}
}

func maximum(f func(top, at, values *float64, stride, n int)) func(*Row, *Row, *float64, int, int) {
	return func(top, at *Row, values *float64, stride, n int) { f(&top[0], &at[0], values, stride, n) }
}

func eachTrace(f func(q, from, ground *float64, steps int, rows *float64)) func(*Slow, *Mark, *Row, int, *Row) {
	return func(q *Slow, from *Mark, ground *Row, steps int, rows *Row) {
		f(&q.Decay[0], &from.X[0], &ground[0], steps, &rows[0])
	}
}

func eachFastTrace(f func(q, phase, from, ground *float64, steps int, rows *float64)) func(*Fast, *Row, *Mark, *Row, int, *Mark) {
	return func(q *Fast, phase *Row, from *Mark, ground *Row, steps int, rows *Mark) {
		f(&q.YY[0], &phase[0], &from.X[0], &ground[0], steps, &rows.X[0])
	}
}

func fastScreening(f func(s, rows, ground *float64, flags *uint32, n int)) func(*FastScreen, *Mark, *Row, *uint32, int) {
	return func(s *FastScreen, rows *Mark, ground *Row, flags *uint32, n int) {
		f(&s.Limit[0], &rows.X[0], &ground[0], flags, n)
	}
}

func gathering(f func(rows, a *float64, from *int, n int)) func(*Row, *float64, *[Lanes]int, int) {
	return func(rows *Row, a *float64, from *[Lanes]int, n int) { f(&rows[0], a, &from[0], n) }
}

func turning(f func(t, factors *float64, terms int)) func(*Turning, *Row, int) {
	return func(t *Turning, factors *Row, terms int) { f(&t.U[0], &factors[0], terms) }
}

func stepScreening(f func(s, rows, lines *float64, flags *uint32, n int, want uint32)) func(*StepScreen, *Row, *Line, *uint32, int, uint32) {
	return func(s *StepScreen, rows *Row, lines *Line, flags *uint32, n int, want uint32) {
		f(&s.Best[0], &rows[0], &lines.First, flags, n, want)
	}
}

func strideMarch(f func(q, weights, from, to, inputs *float64, steps int)) func(*Stride, *Mark, *Mark, *Input, int) {
	return func(q *Stride, from, to *Mark, inputs *Input, steps int) {
		f(&q.UU[0], &q.Weights[0].U[0], &from.X[0], &to.X[0], &inputs[0], steps)
	}
}

func mixing(f func(inputs, shares, ground *float64, stride, n int)) func(*Input, *Input, *float64, int, int) {
	return func(inputs, shares *Input, ground *float64, stride, n int) {
		f(&inputs[0], &shares[0], ground, stride, n)
	}
}

func widening(f func(o, c, points *float64, n int)) func(*Outline, *Compass, *Point, int) {
	return func(o *Outline, c *Compass, points *Point, n int) { f(&o[0], &c.Cos[0], &points.X, n) }
}

func masking(f func(o *float64, x float64, set *uint64)) func(*Outline, float64, *Above) {
	return func(o *Outline, x float64, set *Above) { f(&o[0], x, &set[0]) }
}

func fencing(f func(fence, x, y *float64, every int, flags *uint32, n int, want uint32)) func(*Fence, *Row, *Row, int, *uint32, int, uint32) {
	return func(fence *Fence, x, y *Row, every int, flags *uint32, n int, want uint32) {
		f(&fence.Sides[0].X[0], &x[0], &y[0], every, flags, n, want)
	}
}

func greatestNumber(f func(o *float64) float64) func(*Outline) float64 {
	return func(o *Outline) float64 { return f(&o[0]) }
}

func projecting(f func(rows, rays, points *float64, n int, want uint32)) func(*Row, *Rays, *Point, int, uint32) {
	return func(rows *Row, rays *Rays, points *Point, n int, want uint32) {
		f(&rows[0], &rays.Cos[0], &points.X, n, want)
	}
}

func exceeding(f func(o, c, twice, form *float64) uint64) func(*Outline, *Compass, *Compass, *Form) uint64 {
	return func(o *Outline, c, twice *Compass, form *Form) uint64 {
		return f(&o[0], &c.Cos[0], &twice.Cos[0], &form.Middle)
	}
}

func orbiting(f func(fence, x, y, groundX, groundY, lines *float64, flags *uint32, n int)) func(*OrbitFence, *Mark, *Mark, *float64, *float64, *Line, *uint32, int) {
	return func(fence *OrbitFence, x, y *Mark, groundX, groundY *float64, lines *Line, flags *uint32, n int) {
		f(&fence.Sides[0].XX[0], &x.X[0], &y.X[0], groundX, groundY, &lines.First, flags, n)
	}
}

func sweeping(f func(s, c, x, y *float64, n, every int)) func(*Sweep, *SweepCompass, *Row, *Row, int, int) {
	return func(s *Sweep, c *SweepCompass, x, y *Row, n, every int) {
		f(&s[0][0], &c[0].Cos[0], &x[0], &y[0], n, every)
	}
}

func displacing(f func(rows, q, states, a *float64, n int)) func(*Row, *Displaced, *Mark, *float64, int) {
	return func(rows *Row, q *Displaced, states *Mark, a *float64, n int) {
		f(&rows[0], &q.Scale[0], &states.X[0], a, n)
	}
}

func vibrating(f func(states, q, rows, a *float64, n int, want uint32)) func(*Mark, *Vibration, *Row, *float64, int, uint32) {
	return func(states *Mark, q *Vibration, rows *Row, a *float64, n int, want uint32) {
		f(&states.X[0], &q.Scale[0], &rows[0], a, n, want)
	}
}
