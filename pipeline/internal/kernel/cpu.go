package kernel

import "fmt"

// Names of the kernels, as Use takes them.
const (
	Portable = "portable" // Go alone, on every architecture
	AVX2     = "avx2"     // AVX2 and FMA on amd64
	AVX512   = "avx512"   // AVX-512F on amd64
)

// level is a kernel: its name and its functions.
type level struct {
	name          string
	marchSlow     func(q *Slow, from, to *Mark, ground *float64, steps int)
	traceSlow     func(q *Slow, from *Mark, ground *float64, steps int, rows *Row, want uint32)
	marchTrain    func(q *Train, from, to *Mark, ground *float64, steps int)
	marchFast     func(q *Fast, from, to *Mark, ground *float64, steps int)
	traceFast     func(q *Fast, from *Mark, ground *float64, steps int, rows *Mark, want uint32)
	screen        func(s *Screen, values *float64, stride int, lines *Line, flags *uint32, n int)
	screenSquares func(s *Screen, values *float64, stride int, lines *Line, flags *uint32, n int)
	screenSteps   func(s *StepScreen, rows *Row, lines *Line, flags *uint32, n int, want uint32)
	marchStride   func(q *Stride, from, to *Mark, inputs *Input, steps int)
	mix           func(inputs, shares *Input, ground *float64, stride, n int)
	greatest      func(top, at *Row, values *float64, stride, n int)
	traceEach     func(q *Slow, from *Mark, ground *Row, steps int, rows *Row)
	traceFastEach func(q *Fast, phase *Row, from *Mark, ground *Row, steps int, rows *Mark)
	screenFast    func(s *FastScreen, rows *Mark, ground *Row, flags *uint32, n int)
	gather        func(rows *Row, a *float64, from *[Lanes]int, n int)
	turn          func(t *Turning, factors *Row, terms int)
	widen         func(o *Outline, c *Compass, points *Point, n int)
	above         func(o *Outline, x float64, set *Above)
	screenOrbits  func(f *OrbitFence, x, y *Mark, groundX, groundY *float64, lines *Line, flags *uint32, n int)
	sweep         func(s *Sweep, c *SweepCompass, x, y *Row, n, every int)
	displace      func(rows *Row, q *Displaced, states *Mark, a *float64, n int)
	vibrate       func(states *Mark, q *Vibration, rows *Row, a *float64, n int, want uint32)
	exceeds       func(o *Outline, c, twice *Compass, f *Form) uint64
	greatestOf    func(o *Outline) float64
	project       func(rows *Row, rays *Rays, points *Point, n int, want uint32)
	screenFence   func(f *Fence, x, y *Row, every int, flags *uint32, n int, want uint32)
}

var portable = level{
	name:          Portable,
	marchSlow:     marchSlowGeneric,
	traceSlow:     traceSlowGeneric,
	marchTrain:    marchTrainGeneric,
	marchFast:     marchFastGeneric,
	traceFast:     traceFastGeneric,
	screen:        screenGeneric,
	screenSquares: screenSquaresGeneric,
	screenSteps:   screenStepsGeneric,
	greatest:      greatestGeneric,
	traceEach:     traceEachGeneric,
	traceFastEach: traceFastEachGeneric,
	screenFast:    screenFastGeneric,
	gather:        gatherGeneric,
	turn:          turnGeneric,
	marchStride:   marchStrideGeneric,
	mix:           mixGeneric,
	widen:         widenGeneric,
	above:         aboveGeneric,
	screenFence:   screenFenceGeneric,
	greatestOf:    greatestOfGeneric,
	exceeds:       exceedsGeneric,
	sweep:         sweepGeneric,
	displace:      displaceGeneric,
	vibrate:       vibrateGeneric,
	screenOrbits:  screenOrbitsGeneric,
	project:       projectGeneric,
}

// levels are the kernels that this processor runs, the fastest first.
var levels = append(vectorLevels(), portable)

var current = levels[0]

// Name returns the name of the kernel in use.
func Name() string { return current.name }

// Names lists the kernels that this processor runs, the fastest first.
func Names() []string {
	names := make([]string, len(levels))
	for i, l := range levels {
		names[i] = l.name
	}
	return names
}

// Use chooses a kernel by name; "" is the fastest. It returns an error where
// there is none of the name or this processor does not run it. The first one in
// use is the fastest.
//
// Use is for a program's start and for tests: it must not run beside other
// functions of the package.
func Use(name string) error {
	if name == "" {
		name = levels[0].name
	}
	for _, l := range levels {
		if l.name == name {
			current = l
			return nil
		}
	}
	return fmt.Errorf("kernel %q is none of those that run here: %q", name, Names())
}
