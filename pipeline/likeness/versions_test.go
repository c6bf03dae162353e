package likeness

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// disturb returns x as a recorder may have it that nobody has corrected, size times
// the peak of x being added to it.
type disturb struct {
	name string
	at   func(x []float64, size float64, rng *rand.Rand) []float64
}

// added adds to x what is given for each sample, in units of its peak.
func added(x []float64, size float64, what func(i int) float64) []float64 {
	y := slices.Clone(x)
	peak := greatest(x)
	for i := range y {
		y[i] += size * peak * what(i)
	}
	return y
}

var (
	ramp = disturb{"a ramp", func(x []float64, size float64, _ *rand.Rand) []float64 {
		return added(x, size, func(i int) float64 { return float64(i) / float64(len(x)) })
	}}
	tilt = disturb{"a step at the peak", func(x []float64, size float64, _ *rand.Rand) []float64 {
		strong := peakAt(x)
		return added(x, size, func(i int) float64 { return float64(min(1, max(0, i-strong))) })
	}}
	baseline = disturb{"two steps of the baseline", func(x []float64, size float64, _ *rand.Rand) []float64 {
		strong := peakAt(x)
		return added(x, size, func(i int) float64 {
			if i > strong && i < strong+1000 {
				return 1
			}
			return 0.3 * float64(min(1, max(0, i-strong)))
		})
	}}
	swell = disturb{"a wave of 20 s", func(x []float64, size float64, _ *rand.Rand) []float64 {
		return added(x, size, func(i int) float64 { return math.Sin(2 * math.Pi * float64(i) * stepS / 20) })
	}}
	white = disturb{"white noise", func(x []float64, size float64, rng *rand.Rand) []float64 {
		return added(x, size, func(int) float64 { return rng.NormFloat64() })
	}}
	wander = disturb{"a random walk", func(x []float64, size float64, rng *rand.Rand) []float64 {
		walk := make([]float64, len(x))
		for i := 1; i < len(walk); i++ {
			walk[i] = walk[i-1] + rng.NormFloat64()
		}
		most := greatest(walk)
		return added(x, size, func(i int) float64 { return walk[i] / most })
	}}
)

func peakAt(x []float64) int {
	strong := 0
	for i, v := range x {
		if math.Abs(v) > math.Abs(x[strong]) {
			strong = i
		}
	}
	return strong
}

// process is how a network corrects a motion.
type process struct {
	low, high   float64
	forwardOnly bool
	every       int // of the samples, 2 for half the rate
}

func (p process) String() string {
	s := fmt.Sprintf("%v–%v Hz", p.low, p.high)
	if p.forwardOnly {
		s += " forward only"
	}
	if p.every > 1 {
		s += fmt.Sprintf(" at %d Hz", 200/p.every)
	}
	return s
}

func (p process) of(t testing.TB, x []float64) *Motion {
	if p.forwardOnly {
		x = bandPass(x, p.low, p.high)
	} else {
		x = bothWays(x, p.low, p.high)
	}
	return motion(t, everyNth(x, p.every), float64(p.every)*stepS)
}

// spread is what several pairs of one case have.
type spread struct {
	pairs         int
	whole, inBand [2]float64 // least and greatest |ρ|
	kinds         [Identical + 1]int
}

func (s *spread) add(c *Comparer, a, b *Motion) Verdict {
	v := c.Compare(a, b)
	inA, inB := bandsOf(a, b)
	for _, r := range []struct {
		of   *[2]float64
		a, b *Motion
	}{{&s.whole, a, b}, {&s.inBand, inA, inB}} {
		size := correlated(c, r.a, r.b)
		if s.pairs == 0 {
			r.of[0] = size
		}
		r.of[0], r.of[1] = min(r.of[0], size), max(r.of[1], size)
	}
	s.pairs++
	s.kinds[v.Kind]++
	return v
}

// correlated is the greatest |ρ| of two motions at any lag, without the test of
// swings.
func correlated(c *Comparer, a, b *Motion) float64 {
	if a.stepS < b.stepS {
		a, b = b, a
	}
	ratio, stepS, _ := steps(a, b)
	c.search.load(a, b, ratio, stepS)
	whole, _ := c.search.best()
	if !whole.found {
		return 0
	}
	return math.Abs(c.search.at(whole.lag).correlation)
}

func (s *spread) log(t *testing.T, name string) {
	t.Logf("%-84s %.3f … %.3f   %.3f … %.3f   %v", name, s.whole[0], s.whole[1], s.inBand[0], s.inBand[1], s.kinds)
}

// TestRawAndCorrected compares invented motions as recorded, with drifts, offsets and
// noise, with what networks make of them.
func TestRawAndCorrected(t *testing.T) {
	t.Logf("%-84s %-15s   %-15s   %s", "", "as they are", "between corners", "different, near, similar, scaled, identical")
	var c Comparer
	for _, test := range []struct {
		process
		least Kind
	}{
		{process{0.05, 25, false, 1}, Similar},
		{process{0.2, 30, false, 1}, Similar},
		{process{0.2, 30, false, 2}, Similar},
		{process{0.5, 15, false, 1}, Similar},
		{process{0.5, 15, false, 2}, Similar},
		{process{1, 10, false, 1}, Near},
		{process{0.05, 25, true, 1}, Similar},
		{process{0.2, 30, true, 1}, Near},
		{process{0.5, 15, true, 2}, Near},
		{process{0.2, 12, false, 5}, Near},
		{process{0.2, 6, false, 10}, Near}, // of which the corner is 6 Hz
	} {
		for _, d := range []struct {
			disturb
			size float64
		}{{ramp, 0.5}, {tilt, 0.1}, {baseline, 0.1}, {swell, 0.5}, {wander, 0.1}, {white, 0.03}} {
			var s spread
			for i, k := range kinds {
				raw := d.at(invented(t, k.m, k.distanceM, uint64(i)), d.size, rand.New(rand.NewPCG(uint64(i), 1)))
				v := s.add(&c, motion(t, raw, stepS), test.of(t, raw))
				if v.Kind < test.least || v.Kind > Similar || v.Reason != "" || v.Scale < 0.8 || v.Scale > 1.25 {
					t.Errorf("M %v at %v m, %v, %s: %+v, want %v", k.m, k.distanceM, test.process, d.name, v, test.least)
				}
			}
			s.log(t, fmt.Sprintf("raw with %s of %v, corrected %v", d.name, d.size, test.process))
		}
	}
}

// incoherent mixes into the spectrum of x that of another motion, as between points
// a distance in m apart: the coherency is exp(−(α·ω·distance)²) with α = 2.5e-4 s/m,
// after Luco & Wong (1986), who have α of 2e-4 to 3e-4 (from memory).
func incoherent(x, z []float64, distanceM float64) []float64 {
	plan := fourier.NewFFT(len(x))
	of, other := plan.Coefficients(nil, x), plan.Coefficients(nil, z)
	for i := range of {
		omega := 2 * math.Pi * plan.Freq(i) / stepS
		common := math.Exp(-math.Pow(2.5e-4*omega*distanceM, 2))
		of[i] = cmplx.Rect(common, 0)*of[i] + cmplx.Rect(math.Sqrt(1-common*common), 0)*other[i]
	}
	return changed(plan.Sequence(nil, of), 1/float64(len(x)), 0)
}

// TestOthersBesideRawAndCorrected compares with a motion what is recorded beside it,
// which must stay another motion: it is below the limits, but for sensors so near to
// each other that no correlation tells them apart.
func TestOthersBesideRawAndCorrected(t *testing.T) {
	t.Logf("%-84s %-15s   %-15s   %s", "", "as they are", "between corners", "different, near, similar, scaled, identical")
	var c Comparer
	for _, test := range []struct {
		distanceM float64 // 0: of one source, path and site, as the two horizontals of a record
		most      Kind
	}{{0, Different}, {300, Different}, {150, Different}, {100, Different}, {50, Near}, {20, Near}, {10, Similar}} {
		name := fmt.Sprintf("raw with a ramp of 0.1, corrected of a sensor %v m away", test.distanceM)
		if test.distanceM == 0 {
			name = "raw with a ramp of 0.1, corrected of another direction"
		}
		for _, p := range []process{{0.05, 25, false, 1}, {0.5, 15, false, 2}} {
			var s spread
			for i, k := range kinds {
				x, z := invented(t, k.m, k.distanceM, uint64(i)), invented(t, k.m, k.distanceM, 500+uint64(i))
				if test.distanceM > 0 {
					z = incoherent(x, z, test.distanceM)
				}
				if v := s.add(&c, motion(t, ramp.at(x, 0.1, nil), stepS), p.of(t, z)); v.Kind > test.most {
					t.Errorf("M %v at %v m, %s, %v: %+v, want %v at most", k.m, k.distanceM, name, p, v, test.most)
				}
			}
			s.log(t, fmt.Sprintf("%s %v", name, p))
		}
	}
}
