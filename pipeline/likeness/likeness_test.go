package likeness

import (
	"math"
	"math/rand/v2"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
)

// near reports whether two numbers agree within a share of the wanted one.
func near(got, want, by float64) bool { return math.Abs(got-want) <= by*math.Abs(want) }

// compareBoth compares a with b and b with a, which must say the same the other way
// round.
func compareBoth(t testing.TB, a, b *Motion) Verdict {
	t.Helper()
	var c Comparer
	v, w := c.Compare(a, b), c.Compare(b, a)
	if v.Kind != w.Kind || v.Lag != -w.Lag || v.LagStepS != w.LagStepS || v.Common != w.Common ||
		!near(v.Correlation, w.Correlation, 1e-9) || (v.Kind != Different && !near(v.Scale*w.Scale, 1, 1e-9)) {
		t.Errorf("%+v, exchanged %+v", v, w)
	}
	return v
}

// TestSameMotion has one invented motion of M 6 in the forms in which it may come
// twice.
func TestSameMotion(t *testing.T) {
	x := invented(t, 6, 30e3, 1)
	n, peak := len(x), greatest(x)
	printed := make([]float64, n) // three decimals where the peak has one digit before them
	for i, v := range x {
		printed[i] = math.Round(1000*v/peak) / 1000 * peak
	}
	cases := []struct {
		name  string
		other []float64
		kind  Kind
		scale float64
		lag   int
		n     int
	}{
		{"itself", x, Identical, 1, 0, n},
		{"with an offset", changed(x, 1, 0.3*peak), Identical, 1, 0, n},
		{"with a great offset", changed(x, 1, -1e4*peak), Identical, 1, 0, n},
		{"converted with g = 9.81", changed(x, 9.81/9.80665, 0), Identical, 9.81 / 9.80665, 0, n},
		{"printed with few digits", printed, Identical, 1, 0, n},
		{"without its beginning", x[700:], Identical, 1, -700, n - 700},
		{"without its end", x[:n-900], Identical, 1, 0, n - 900},
		{"without both", x[500 : n-800], Identical, 1, -500, n - 1300},
		{"turned round", changed(x, -1, 0), Scaled, -1, 0, n},
		{"in another unit", changed(x, 100, 0), Scaled, 100, 0, n},
		{"in a small unit, cut, with an offset", changed(x[300:], -1e-6, 1e-6*peak), Scaled, -1e-6, -300, n - 300},
		{"half a percent larger", changed(x, 1.005, 0), Scaled, 1.005, 0, n},
	}
	a := motion(t, x, stepS)
	for _, c := range cases {
		v := compareBoth(t, a, motion(t, c.other, stepS))
		if v.Kind != c.kind || v.Lag != c.lag || v.Common != c.n || v.LagStepS != stepS || v.Reason != "" || !near(v.Scale, c.scale, 1e-4) {
			t.Errorf("%s: %+v, want %v, scale %v, lag %d, %d samples", c.name, v, c.kind, c.scale, c.lag, c.n)
		}
		// b[i] = Scale·a[i − Lag] + Offset, within the digits printed
		for i, y := range c.other {
			if fitted := v.Scale*x[i-v.Lag] + v.Offset; !(math.Abs(y-fitted) <= 6e-4*math.Abs(v.Scale)*peak) {
				t.Errorf("%s: sample %d is %v, Scale and Offset make it %v", c.name, i, y, fitted)
				break
			}
		}
	}
}

// TestOverlap: each of two cuts has samples that the other lacks.
func TestOverlap(t *testing.T) {
	x := invented(t, 6, 30e3, 1)
	n := len(x)
	v := compareBoth(t, motion(t, x[:n-600], stepS), motion(t, x[500:], stepS))
	if v.Kind != Identical || v.Lag != -500 || v.Common != n-1100 {
		t.Errorf("%+v, want identical, lag -500, %d samples", v, n-1100)
	}
}

// TestFragment: of a motion that begins within the strong part of another, or ends there,
// equal samples tell that they are one; alike ones do not.
func TestFragment(t *testing.T) {
	x := invented(t, 6, 30e3, 1)
	whole, filtered := motion(t, x, stepS), bothWays(x, 0.1, 25)
	peak := slices.IndexFunc(x, func(v float64) bool { return math.Abs(v) == greatest(x) })
	for _, c := range []struct {
		name        string
		first, last int
	}{{"begins at the peak", peak - 20, len(x)}, {"ends at it", 0, peak + 20}, {"strong part", peak - 300, peak + 300}} {
		if share := squares(x[c.first:c.last]) / squares(x); share > 0.79 {
			t.Fatalf("%s: %.2f of the energy is no fragment", c.name, share)
		}
		v := compareBoth(t, whole, motion(t, changed(x[c.first:c.last], -2, 0.1), stepS))
		if v.Kind != Scaled || v.Lag != -c.first || v.Common != c.last-c.first || !near(v.Scale, -2, 1e-9) {
			t.Errorf("%s: %+v", c.name, v)
		}
		if v := compareBoth(t, whole, motion(t, filtered[c.first:c.last], stepS)); v.Kind > Near {
			t.Errorf("%s and filtered: %+v", c.name, v)
		}
	}
}

// TestCorrelationInClosedForm adds to a sine another of c times its size that is
// orthogonal to it over the whole series: ρ = 1/√(1 + c²). All lags but 0 correlate
// less, since the envelope falls. The step is so great that no band is left between the
// corners.
func TestCorrelationInClosedForm(t *testing.T) {
	const n = 4000
	wave := func(cycles int) []float64 {
		y := make([]float64, n)
		for i := range y {
			y[i] = math.Sin(math.Pi*float64(i)/n) * math.Sin(2*math.Pi*float64(cycles)*float64(i)/n)
		}
		return y
	}
	x, z := wave(40), wave(90)
	for _, c := range []struct {
		size float64
		kind Kind
	}{{0, Identical}, {0.0099, Identical}, {0.0101, Similar}, {0.05, Similar}, {0.2505, Similar}, {0.2507, Different}, {0.5, Different}} {
		y := make([]float64, n)
		for i := range y {
			y[i] = x[i] + c.size*z[i]
		}
		want := 1 / math.Sqrt(1+c.size*c.size)
		v := compareBoth(t, motion(t, x, 0.2), motion(t, y, 0.2))
		if v.Kind != c.kind || v.Lag != 0 || !near(v.Correlation, want, 1e-9) {
			t.Errorf("a residual of %v: %+v, want %v with correlation %v", c.size, v, c.kind, want)
		}
		if c.kind != Different && !near(v.Scale, math.Sqrt(1+c.size*c.size), 1e-6) {
			t.Errorf("a residual of %v: scale %v", c.size, v.Scale)
		}
	}
}

// kinds are magnitudes and distances of invented motions.
var kinds = []struct{ m, distanceM float64 }{{4, 20e3}, {5, 20e3}, {5, 80e3}, {6, 30e3}, {7, 30e3}, {7.5, 60e3}}

// TestFilteredMotionIsSimilar band-passes invented motions forward and backward,
// Butterworth of fourth order each way.
func TestFilteredMotionIsSimilar(t *testing.T) {
	var c Comparer
	bands := []struct{ low, high float64 }{{0.05, 25}, {0.1, 25}, {0.1, 40}, {0.15, 30}}
	for _, k := range kinds {
		least := 1.0
		for seed := range uint64(6) {
			x := invented(t, k.m, k.distanceM, seed)
			a := motion(t, x, stepS)
			for _, band := range bands {
				v := c.Compare(a, motion(t, bothWays(x, band.low, band.high), stepS))
				least = min(least, v.Correlation)
				if v.Kind != Similar && v.Kind != Identical || v.Lag != 0 || !near(v.Scale, 1, 0.05) {
					t.Errorf("M %v at %v m, seed %d, %v–%v Hz: %+v", k.m, k.distanceM, seed, band.low, band.high, v)
				}
			}
		}
		t.Logf("M %v at %v m: least correlation %.4f", k.m, k.distanceM, least)
	}
}

// TestFilteredForwardOnly: a filter that turns phases leaves correlations around the
// limit of Similar, mostly below it, but far above those of other motions, and the
// verdict tells them.
func TestFilteredForwardOnly(t *testing.T) {
	var c Comparer
	for _, k := range kinds {
		least, most := 1.0, 0.0
		for seed := range uint64(6) {
			x := invented(t, k.m, k.distanceM, seed)
			v := c.Compare(motion(t, x, stepS), motion(t, bandPass(x, 0.1, 25), stepS))
			least, most = min(least, v.Correlation), max(most, v.Correlation)
			if v.Lag < 2 || v.Lag > 4 { // the delay of the high corner, 2.6/(2π·25 Hz) = 17 ms
				t.Errorf("M %v at %v m, seed %d: lag %d", k.m, k.distanceM, seed, v.Lag)
			}
		}
		t.Logf("M %v at %v m: correlation %.3f to %.3f", k.m, k.distanceM, least, most)
		if !(least > 0.9 && most < 0.995) {
			t.Errorf("M %v at %v m: correlation %v to %v", k.m, k.distanceM, least, most)
		}
	}
}

// TestOtherMotionIsDifferent compares motions of equal source, path and site but
// other random numbers: with the test of swings, and at all lags without it.
func TestOtherMotionIsDifferent(t *testing.T) {
	var c Comparer
	for _, k := range kinds {
		var list []*Motion
		for seed := range uint64(6) {
			list = append(list, motion(t, invented(t, k.m, k.distanceM, 100+seed), stepS))
		}
		most, parted := 0.0, 0
		for i, a := range list {
			for _, b := range list[:i] {
				if v := c.Compare(a, b); v.Kind != Different {
					t.Errorf("M %v at %v m: %+v", k.m, k.distanceM, v)
				}
				if !haveSwingsInCommon(a, b) {
					parted++
				}
				c.search.load(a, b, 1, stepS)
				whole, fragment := c.search.best()
				if whole.found {
					most = max(most, math.Abs(c.search.at(whole.lag).correlation))
				}
				if fragment.found {
					most = max(most, math.Abs(c.search.at(fragment.lag).correlation))
				}
			}
		}
		t.Logf("M %v at %v m: greatest correlation %.3f; %d of 15 pairs parted by their swings", k.m, k.distanceM, most, parted)
		if most > 0.8 {
			t.Errorf("M %v at %v m: other motions correlate with %v", k.m, k.distanceM, most)
		}
	}
}

// TestNearbyStationsAreNotSimilar mixes into a motion another of its kind, which makes
// two records with correlation √share, as of stations close to each other: up to 0.95.
func TestNearbyStationsAreNotSimilar(t *testing.T) {
	for seed := range uint64(4) {
		x, z := invented(t, 6, 30e3, 200+seed), invented(t, 6, 30e3, 300+seed)
		for _, share := range []float64{0.5, 0.8, 0.9} {
			y := make([]float64, len(x))
			for i := range y {
				y[i] = math.Sqrt(share)*x[i] + math.Sqrt(1-share)*z[i]
			}
			v := compareBoth(t, motion(t, x, stepS), motion(t, y, stepS))
			want := Near
			if share == 0.5 {
				want = Different
			}
			if v.Kind != want {
				t.Errorf("seed %d, share %v: %+v, want %v", seed, share, v, want)
			}
			if share > 0.5 && !near(v.InBand, math.Sqrt(share), 0.15) {
				t.Errorf("seed %d, share %v: %v in the band, want some %v", seed, share, v.InBand, math.Sqrt(share))
			}
			if v.Kind == Different && (v.Reason == "" || v.Scale != 0 || v.Offset != 0) {
				t.Errorf("seed %d, share %v: %+v, want a reason and no scale", seed, share, v)
			}
			if share == 0.9 && !(v.Correlation > 0.9) {
				t.Errorf("seed %d, share %v: %+v, want the correlation that was found", seed, share, v)
			}
		}
	}
}

func TestDifferentAndWhy(t *testing.T) {
	x := invented(t, 6, 30e3, 1)
	a := motion(t, x, stepS)
	backward := slices.Clone(x)
	slices.Reverse(backward)
	strong := 0
	for i, v := range x {
		if math.Abs(v) > math.Abs(x[strong]) {
			strong = i
		}
	}
	sine := make([]float64, 1000)
	for i := range sine {
		sine[i] = math.Cos(2 * math.Pi * (float64(i) + 0.5) / 200)
	}
	flat, long := changed(x, 0, 3), make([]float64, longest/2+1)
	copy(long, x)
	cases := []struct {
		name string
		a, b *Motion
		want string
	}{
		{"backward", a, motion(t, backward, stepS), "their greatest swings are not alike"},
		{"nothing", a, motion(t, make([]float64, 10), stepS), "no motion"},
		{"next to nothing", a, motion(t, []float64{0, math.SmallestNonzeroFloat64}, stepS), "no motion"},
		{"constant", a, motion(t, flat, stepS), "no motion"},
		{"one sample", a, motion(t, x[:1], stepS), "no motion"},
		{"the coda alone", a, motion(t, x[strong+1500:], stepS), ""},
		{"the strongest second alone", a, motion(t, x[strong-100:strong+100], stepS), ""},
		{"five cycles", motion(t, sine, 0.01), motion(t, sine, 0.01), "only 10 crossings of zero in common"},
		{"far from its step", a, motion(t, everyNth(x, 11), 11*stepS), "steps differ more than tenfold"},
		{"many hours long", motion(t, long, stepS), motion(t, long, stepS), "too long to compare"},
		{"at half its speed", a, motion(t, x, 2*stepS), ""},
	}
	for _, c := range cases {
		v := compareBoth(t, c.a, c.b)
		if v.Kind != Different || v.Reason == "" || c.want != "" && v.Reason != c.want {
			t.Errorf("%s: %+v, want %q", c.name, v, c.want)
		}
	}
}

func TestBadSeries(t *testing.T) {
	for _, c := range []struct {
		samples []float64
		stepS   float64
		want    string
	}{
		{nil, 0.01, "no samples"},
		{[]float64{1, 2}, 0, "time step 0 s is not positive"},
		{[]float64{1, 2}, math.NaN(), "time step NaN s is not positive"},
		{[]float64{1, 2}, math.Inf(1), "time step +Inf s is not positive"},
		{[]float64{1, math.NaN()}, 0.01, "sample 1 is NaN"},
		{[]float64{math.Inf(-1)}, 0.01, "sample 0 is -Inf"},
	} {
		if m, err := NewMotion(c.samples, c.stepS); m != nil || err == nil || err.Error() != c.want {
			t.Errorf("NewMotion(%v, %v) = %v, %v, want %q", c.samples, c.stepS, m, err, c.want)
		}
	}
}

func TestGreatAndSmallNumbers(t *testing.T) {
	x := invented(t, 5, 20e3, 1)
	for _, scale := range []float64{1e-290, 1e-150, 1e150, 1e290} {
		y := changed(x, scale, 0)
		if v := compareBoth(t, motion(t, x, stepS), motion(t, y, stepS)); v.Kind != Scaled || !near(v.Scale, scale, 1e-9) {
			t.Errorf("times %v: %+v", scale, v)
		}
	}
}

func TestKindString(t *testing.T) {
	for k, want := range map[Kind]string{Different: "different", Near: "near", Similar: "similar", Scaled: "scaled", Identical: "identical"} {
		if k.String() != want {
			t.Errorf("Kind %d is %q, want %q", int(k), k, want)
		}
	}
}

// FuzzCompare makes two series of bytes and of a factor: nothing panics, and a motion
// with enough crossings is itself; with enough in the band only it is Similar.
func FuzzCompare(f *testing.F) {
	f.Add([]byte("twice the same motion, more or less"), []byte("another one"), 2.5, 0.01, 0.005)
	f.Add(make([]byte, 40), []byte{1}, 1e300, 1e-300, 1.0)
	f.Add([]byte("XxZhYx000c mZ x000x 0x00X00"), []byte("0"), 2.5, 0.09, 0.005) // crosses its mean often enough in the band only
	f.Fuzz(func(t *testing.T, p, q []byte, factor, stepA, stepB float64) {
		if len(p)+len(q) > 4000 {
			return
		}
		var x, y []float64
		for _, b := range p {
			x = append(x, float64(int8(b)))
		}
		for _, b := range q {
			y = append(y, factor*float64(int8(b)))
		}
		a, errA := NewMotion(x, stepA)
		b, errB := NewMotion(y, stepB)
		if errA != nil || errB != nil {
			return
		}
		var c Comparer
		if v := c.Compare(a, b); (v.Kind == Different) != (v.Reason != "") {
			t.Errorf("%s", strconv.Quote(v.Reason))
		}
		v := c.Compare(a, a)
		fewCrossings := strings.HasPrefix(v.Reason, "only ") || v.Kind == Similar && near(v.Correlation, 1, 1e-9)
		if v.Kind != Identical && v.Reason != "no motion" && !fewCrossings {
			t.Errorf("a motion and itself: %+v", v)
		}
	})
}

// TestSharedMotion compares one motion in several goroutines, each of which may be the
// first to ask for its band.
func TestSharedMotion(t *testing.T) {
	x := invented(t, 6, 30e3, 1)
	a, b := motion(t, x, stepS), motion(t, ramp.at(x, 0.5, nil), stepS)
	var verdicts [4]Verdict
	var wait sync.WaitGroup
	for i := range verdicts {
		wait.Go(func() { verdicts[i] = new(Comparer).Compare(a, b) })
	}
	wait.Wait()
	for _, v := range verdicts {
		if v != verdicts[0] || v.Kind != Similar {
			t.Errorf("%+v, want similar, as %+v", v, verdicts[0])
		}
	}
}

// TestComparerKeepsNothing: what was compared before changes nothing.
func TestComparerKeepsNothing(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 7))
	x := invented(t, 6, 30e3, 1)
	var used Comparer
	for range 12 {
		first := rng.IntN(1000)
		a, b := motion(t, x[first:], stepS), motion(t, everyNth(x[rng.IntN(1000):], 1+rng.IntN(2)), stepS)
		if first%3 == 0 {
			b = motion(t, everyNth(x, 3), 3*stepS)
		}
		var fresh Comparer
		if v, w := used.Compare(a, b), fresh.Compare(a, b); v != w {
			t.Errorf("%+v by a used comparer, %+v by a fresh one", v, w)
		}
	}
}
