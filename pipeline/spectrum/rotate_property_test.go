package spectrum

import (
	"math"
	"slices"
	"testing"
)

// rotated is a case of the properties below: a solver, a pair, and its RotD.
type rotated struct {
	name          string
	solver        *Solver
	list          []Oscillator
	first, second []float64
	sd            [2][]float64
	d50, d100     []float64
}

// rotatedCases are pairs of several kinds with oscillators of all forms.
func rotatedCases(t *testing.T) []*rotated {
	t.Helper()
	list := Grid{[]float64{0.05, 0.3, 1, 2.5, 4.9, 5.1, 8, 20, 90, 250, 1100, 5000}, []float64{0, 0.05, 0.3, 0.99}}.Oscillators()
	along, across := polarised(seededMotion(31, 500), 77.3)
	round, quarter := circular(300, 9, 0.005)
	pulse, later := make([]float64, 90), make([]float64, 90)
	pulse[3], later[40] = 1, 0.8
	var cases []*rotated
	for _, c := range []*rotated{
		{name: "spiky noise", first: seededMotion(32, 700), second: seededMotion(33, 700)},
		{name: "shaken", first: shaken(34, 1500), second: scaledBy(shaken(35, 1500), 0.6)},
		{name: "polarised", first: along, second: across},
		{name: "round", first: round, second: quarter},
		{name: "pulses", first: pulse, second: later},
		{name: "short", first: []float64{0, 1, -0.3, 0.2}, second: []float64{0.4, 0, 0.1, -0.7}},
	} {
		s, err := NewSolver(NigamJennings, 0.01, scaledPeriods(list, 0.01))
		if err != nil {
			t.Fatal(err)
		}
		c.solver, c.list = s, scaledPeriods(list, 0.01)
		c.sd = [2][]float64{s.SD(nil, c.first), s.SD(nil, c.second)}
		c.d50, c.d100 = s.RotD(c.first, c.second, c.sd[0], c.sd[1])
		cases = append(cases, c)
	}
	return cases
}

// scaledPeriods turns ratios of period to step into periods.
func scaledPeriods(list []Oscillator, stepS float64) []Oscillator {
	list = slices.Clone(list)
	for i := range list {
		list[i].PeriodS *= stepS
	}
	return list
}

// near compares RotD of another pair, from the same oscillators, with that of the
// case times a factor, within shares of RotD100.
func (c *rotated) near(t *testing.T, what string, first, second []float64, factor, by50, by100 float64) {
	t.Helper()
	d50, d100 := rotd(t, c.solver, first, second)
	for i, o := range c.list {
		want50, want100 := factor*c.d50[i], factor*c.d100[i]
		if !(math.Abs(d50[i]-want50) <= by50*want100) {
			t.Errorf("%s, %s: %+v: RotD50 %v, want %v (off by %.2g of RotD100)", c.name, what, o, d50[i], want50, math.Abs(d50[i]-want50)/want100)
		}
		if !(math.Abs(d100[i]-want100) <= by100*want100) {
			t.Errorf("%s, %s: %+v: RotD100 %v, want %v (off by %.2g)", c.name, what, o, d100[i], want100, off(d100[i], want100))
		}
	}
}

// TestRotDIsInOrder: RotD100 is no less than the D of either component and than
// RotD50, which is no less than RotD100·cos 45°: D(θ) is at least RotD100·|cos|
// of the angle from the direction of RotD100, and the median of that is cos 45°.
// No |u| is longer than √(D₁² + D₂²).
func TestRotDIsInOrder(t *testing.T) {
	for _, c := range rotatedCases(t) {
		for i, o := range c.list {
			x, y := c.sd[0][i], c.sd[1][i]
			d50, d100 := c.d50[i], c.d100[i]
			if !(d100 >= x && d100 >= y && d100 >= d50) {
				t.Errorf("%s: %+v: RotD100 %v below RotD50 %v or the components' %v and %v", c.name, o, d100, d50, x, y)
			}
			if !(d50 >= d100*math.Sqrt(0.5)*(1-1e-12)) {
				t.Errorf("%s: %+v: RotD50 %v below RotD100 %v times cos 45°", c.name, o, d50, d100)
			}
			if !(d100 <= reach(x, y)*(1+1e-12)) {
				t.Errorf("%s: %+v: RotD100 %v beyond √(D₁² + D₂²) of %v and %v", c.name, o, d100, x, y)
			}
		}
	}
}

// turnedBy returns the components of a pair along and across an axis at an angle.
func turnedBy(first, second []float64, degrees float64) (x, y []float64) {
	sin, cos := math.Sincos(degrees * math.Pi / 180)
	for i, a := range first {
		b := second[i]
		x, y = append(x, a*cos+b*sin), append(y, b*cos-a*sin)
	}
	return x, y
}

// TestRotDOfTurnedPair turns the pair. By whole degrees the directions are the
// same ones in another order. By other angles there is a direction within half a
// degree of every other, and with R = max|u| over all directions and times:
//
//   - RotD100 is between R·cos 0.5° and R for both pairs;
//   - D(θ) changes by no more than R·2·sin(δ/2) over an angle δ, and so does each
//     of the ordered values, when every value does by up to 0.5° = 0.0087: RotD50.
func TestRotDOfTurnedPair(t *testing.T) {
	half := math.Pi / 360
	by100 := 1 - math.Cos(half) + 1e-11
	by50 := half/math.Cos(half) + 1e-11 // R is RotD100/cos 0.5° at most
	for _, c := range rotatedCases(t) {
		for _, degrees := range []float64{1, 30, 90, 117, 180, -45} {
			first, second := turnedBy(c.first, c.second, degrees)
			c.near(t, "turned by whole degrees", first, second, 1, 1e-11, 1e-11)
		}
		for _, degrees := range []float64{0.5, 12.25, 44.9, 151.7} {
			first, second := turnedBy(c.first, c.second, degrees)
			// Over cos 0.5°, because the share is of R and not of this RotD100.
			c.near(t, "turned", first, second, 1, by50, by100/math.Cos(half))
		}
	}
}

// TestRotDScalesAndMirrors: scaling by powers of two is exact, by other numbers
// within rounding; mirrored and swapped components have the same directions.
func TestRotDScalesAndMirrors(t *testing.T) {
	times := func(a []float64, f float64) []float64 { return scaledBy(slices.Clone(a), f) }
	for _, c := range rotatedCases(t) {
		for _, f := range []float64{-1, 4, 0x1p-70, 0x1p+600, -0x1p-600, 0x1p-950, 0x1p+980} {
			d50, d100 := rotd(t, c.solver, times(c.first, f), times(c.second, f))
			for i, o := range c.list {
				if d50[i] != c.d50[i]*math.Abs(f) || d100[i] != c.d100[i]*math.Abs(f) {
					t.Errorf("%s times %g: %+v: RotD50 %v RotD100 %v, want %v and %v exactly", c.name, f, o, d50[i], d100[i], c.d50[i]*math.Abs(f), c.d100[i]*math.Abs(f))
				}
			}
		}
		for _, f := range []float64{0.3, 980.665, 1e-300, -1e300} {
			c.near(t, "scaled", times(c.first, f), times(c.second, f), math.Abs(f), 1e-12, 1e-12)
		}
		c.near(t, "first mirrored", times(c.first, -1), c.second, 1, 1e-13, 1e-13)
		c.near(t, "second mirrored", c.first, times(c.second, -1), 1, 1e-13, 1e-13)
		c.near(t, "swapped", c.second, c.first, 1, 1e-12, 1e-12)
	}
}

// TestRotDOfPaddedPair adds zeros before the motion, where the oscillator rests,
// and after it, where it rings.
func TestRotDOfPaddedPair(t *testing.T) {
	for _, c := range rotatedCases(t) {
		// A last sample that is not zero would go on to zero in a step of its own.
		first, second := slices.Concat([]float64{0}, c.first, []float64{0}), slices.Concat([]float64{0}, c.second, []float64{0})
		d50, d100 := rotd(t, c.solver, first, second)
		base := &rotated{name: c.name, solver: c.solver, list: c.list, d50: d50, d100: d100}
		for _, pad := range []struct{ before, after int }{{1, 0}, {63, 0}, {64, 1}, {700, 0}, {0, 1}, {0, 50}, {0, 3000}, {77, 777}} {
			before, after := make([]float64, pad.before), make([]float64, pad.after)
			base.near(t, "padded", slices.Concat(before, first, after), slices.Concat(before, second, after), 1, 1e-11, 1e-11)
		}
	}
}

// TestRotDOfEqualComponents: a second component that is zero, equal or opposite
// makes motions along 0°, 45° and 135°.
func TestRotDOfEqualComponents(t *testing.T) {
	for _, c := range rotatedCases(t) {
		opposite := scaledBy(slices.Clone(c.first), -1)
		for _, pair := range []struct {
			name          string
			first, second []float64
			factor        float64
		}{
			{"no second", c.first, make([]float64, len(c.first)), 1},
			{"no first", make([]float64, len(c.first)), c.first, 1},
			{"equal", c.first, c.first, math.Sqrt2},
			{"opposite", c.first, opposite, math.Sqrt2},
		} {
			d50, d100 := rotd(t, c.solver, pair.first, pair.second)
			for i, o := range c.list {
				want := pair.factor * c.sd[0][i]
				if off(d100[i], want) > 1e-13 || off(d50[i], want*math.Sqrt(0.5)) > 1e-13 {
					t.Errorf("%s, %s: %+v: RotD50 %v RotD100 %v, want %v and %v", c.name, pair.name, o, d50[i], d100[i], want*math.Sqrt(0.5), want)
				}
			}
		}
	}
}

// TestRotDOfPulsesThatRing: two pulses of one sample, one along each component,
// k steps apart, leave an undamped oscillator vibrating on an ellipse. With
// the amplitude A of one, the D of direction θ is
//
//	A·√(1 + sin 2θ·cos kφ),  A = (4/φ³)·sin²(φ/2),  φ = ω·dt,
//
// all after the last sample where the period is long. The median is A, as sin 2θ
// is zero at 0° and 90° and as often above as below.
func TestRotDOfPulsesThatRing(t *testing.T) {
	const k = 9
	first, second := make([]float64, k+3), make([]float64, k+3)
	first[1], second[k+1] = 1, 1
	for _, ratio := range []float64{120, 333, 1000, 4000} {
		s, err := NewSolver(NigamJennings, 1, []Oscillator{{ratio, 0}})
		if err != nil {
			t.Fatal(err)
		}
		d50, d100 := rotd(t, s, first, second)
		phase := 2 * math.Pi / ratio
		amplitude := 4 / (phase * phase * phase) * math.Pow(math.Sin(phase/2), 2)
		want := amplitude * math.Sqrt(1+math.Cos(k*phase))
		if off(d50[0], amplitude) > 1e-12 || off(d100[0], want) > 1e-12 {
			t.Errorf("T/dt %g: RotD50 %v RotD100 %v, want %v and %v", ratio, d50[0], d100[0], amplitude, want)
		}
	}
}
