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
			marchFast:     fastMarch(marchFastAVX512),
			traceFast:     fastTrace(traceFastAVX512),
			screen:        screening(screenAVX512),
			screenSquares: screening(screenSquaresAVX512),
			screenSteps:   stepScreening(screenStepsAVX512),
			greatest:      maximum(greatestAVX512),
			marchStride:   strideMarch(marchStrideAVX512),
			mix:           mixing(mixAVX512),
		})
	}
	if cpu.X86.HasAVX2 && cpu.X86.HasFMA {
		list = append(list, level{
			name:          AVX2,
			marchSlow:     slowMarch(marchSlowAVX2),
			traceSlow:     slowTrace(traceSlowAVX2),
			marchFast:     fastMarch(marchFastAVX2),
			traceFast:     fastTrace(traceFastAVX2),
			screen:        screening(screenAVX2),
			screenSquares: screening(screenSquaresAVX2),
			screenSteps:   stepScreening(screenStepsAVX2),
			greatest:      maximum(greatestAVX2),
			marchStride:   strideMarch(marchStrideAVX2),
			mix:           mixing(mixAVX2),
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

func maximum(f func(top, values *float64, stride, n int)) func(*Row, *float64, int, int) {
	return func(top *Row, values *float64, stride, n int) { f(&top[0], values, stride, n) }
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
