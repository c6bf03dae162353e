package condition

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"swaybook/pipeline/signal"
	"swaybook/pipeline/spectrum"
)

var unknown = math.NaN()

// motion is invented: noise that rises and dies away after quietS, between two corners,
// with a peak of 2 m/s².
func motion(seed uint64, stepS, quietS, lowHz, highHz float64) []float64 {
	return shape(seed, stepS, quietS, lowHz, highHz, func(t float64) float64 { return t * t / (1 + t*t) * math.Exp(-t/6) })
}

func shape(seed uint64, stepS, quietS, lowHz, highHz float64, envelope func(s float64) float64) []float64 {
	random := rand.New(rand.NewPCG(seed, 1))
	n, quiet, pad := int(80/stepS), int(quietS/stepS), int(100/stepS)
	x := make([]float64, n+2*pad)
	for i := quiet; i < n; i++ {
		x[pad+i] = random.NormFloat64() * envelope(float64(i-quiet)*stepS)
	}
	for _, design := range []func() (signal.Filter, error){
		func() (signal.Filter, error) { return signal.HighPass(4, lowHz, stepS) },
		func() (signal.Filter, error) { return signal.LowPass(4, highHz, stepS) },
	} {
		f, err := design()
		if err != nil {
			panic(err)
		}
		f.TwoWay(x)
	}
	x = x[pad : pad+n]
	scale := 2 / signal.Greatest(x)
	for i := range x {
		x[i] *= scale
	}
	return x
}

// recorded adds what an instrument does: noise, an offset, a slope.
func recorded(seed uint64, clean []float64) []float64 {
	random := rand.New(rand.NewPCG(seed, 2))
	x := make([]float64, len(clean))
	for i, v := range clean {
		x[i] = v + 0.0003*random.NormFloat64() + 0.02 + 0.01*float64(i)/float64(len(x))
	}
	return x
}

func sd(t *testing.T, periodsS []float64, stepS float64, x []float64) []float64 {
	t.Helper()
	var oscillators []spectrum.Oscillator
	for _, p := range periodsS {
		oscillators = append(oscillators, spectrum.Oscillator{PeriodS: p, Damping: 0.05})
	}
	s, err := spectrum.NewSolver(spectrum.NigamJennings, stepS, oscillators)
	if err != nil {
		t.Fatal(err)
	}
	return s.SD(nil, x)
}

// fixed is a recipe whose corner lies well below the motion.
func fixed(t *testing.T) Recipe {
	t.Helper()
	r, err := Parse([]byte(`name = "fixed"
[[step]]
do = "trend"
degree = 1
[[step]]
do = "taper"
share = 0.02
[[step]]
do = "high-pass"
order = 4
corner_hz = 0.1
`))
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// What was added to a motion is taken off again: the spectrum is that of the motion
// within 2 % over the usable band, where that of what was recorded is off by far more.
func TestMotionsComeBack(t *testing.T) {
	const stepS = 0.01
	for _, test := range []struct {
		recipe Recipe
		leastS float64 // to which the band reaches
	}{{fixed(t), 7.9}, {Standard(), 2}} {
		worst, asRecorded := 0.0, 0.0
		for seed := range uint64(8) {
			clean := motion(seed, stepS, 20, 0.4, 12)
			raw := recorded(seed, clean)
			got, err := test.recipe.Apply(Component{Acceleration: raw, StepS: stepS, State: "raw", LowCutHz: unknown, HighCutHz: unknown})
			if err != nil {
				t.Fatal(err)
			}
			fromS, toS := got.UsableBand()
			if !(fromS < 0.1 && toS > test.leastS) {
				t.Errorf("%s, seed %d: usable from %.3g to %.3g s", test.recipe.Name, seed, fromS, toS)
			}
			var periods []float64
			for p := fromS; p <= toS; p *= 1.05 {
				periods = append(periods, p)
			}
			want, have, before := sd(t, periods, stepS, clean), sd(t, periods, got.StepS, got.Acceleration), sd(t, periods, stepS, raw)
			for i, p := range periods {
				off := math.Abs(have[i]/want[i] - 1)
				worst, asRecorded = max(worst, off), max(asRecorded, math.Abs(before[i]/want[i]-1))
				if off > 0.02 {
					t.Errorf("%s, seed %d, T = %.3g s of %.3g to %.3g: %.4f of what it was", test.recipe.Name, seed, p, fromS, toS, have[i]/want[i])
				}
			}
		}
		t.Logf("%s: off by at most %.2g, as recorded %.2g", test.recipe.Name, worst, asRecorded)
		if asRecorded < 0.2 {
			t.Errorf("%s: as recorded the spectra are off by %.2g only", test.recipe.Name, asRecorded)
		}
	}
}

func TestStatesAndBits(t *testing.T) {
	x := recorded(1, motion(1, 0.01, 20, 0.4, 12))
	kept := slices.Clone(x)
	for _, r := range BuiltIn() {
		got, err := r.Apply(Component{Acceleration: x, StepS: 0.01, State: "corrected", LowCutHz: 0.2, HighCutHz: unknown})
		if err != nil || &got.Acceleration[0] != &x[0] || got.LowCutHz != 0.2 || got.LeadS != 0 {
			t.Errorf("%s changes what is corrected: %v", r.Name, err)
		}
	}
	if _, err := Standard().Apply(Component{Acceleration: x, StepS: 0.01, State: "raw", LowCutHz: unknown, HighCutHz: unknown}); err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(x, kept) {
		t.Error("the component's own samples are changed")
	}
}

// step is a recipe of one step for raw components.
func step(s Step) Recipe { return Recipe{Name: "one", States: []string{"raw"}, Steps: []Step{s}} }

func raw(x []float64, stepS float64) Component {
	return Component{Acceleration: x, StepS: stepS, State: "raw", LowCutHz: unknown, HighCutHz: unknown}
}

// A pulse keeps its place in time under filters that shift no phase, with the pads
// counted, and what they make of it before and after is kept.
func TestFiltersShiftNothing(t *testing.T) {
	x := make([]float64, 401)
	x[200] = 1
	for _, s := range []Step{{Do: KindHighPass, Order: 2, CornerHz: 1}, {Do: KindLowPass, Order: 3, CornerHz: 10}, {Do: KindBandPass, Order: 3, LowHz: 1, HighHz: 10}} {
		got, err := step(s).Apply(raw(x, 0.01))
		if err != nil {
			t.Fatal(err)
		}
		at := 200 + int(math.Round(got.LeadS/got.StepS))
		if signal.Greatest(got.Acceleration) != math.Abs(got.Acceleration[at]) {
			t.Errorf("%s: the pulse is not at sample %d", s.Do, at)
		}
		for k := 1; k < 100; k++ {
			if before, after := got.Acceleration[at-k], got.Acceleration[at+k]; math.Abs(before-after) > 1e-12 {
				t.Fatalf("%s: %g before and %g after the pulse", s.Do, before, after)
			}
		}
		if end := max(math.Abs(got.Acceleration[0]), math.Abs(got.Acceleration[len(got.Acceleration)-1])); end > 2*quietShare*signal.Greatest(got.Acceleration) {
			t.Errorf("%s: cut where it is %g", s.Do, end)
		}
	}
}

// What the header says was filtered is not filtered less.
func TestHeaderCorners(t *testing.T) {
	x := recorded(3, motion(3, 0.01, 20, 0.4, 12))
	for _, test := range []struct {
		step              Step
		low, high         float64
		wantLow, wantHigh float64
	}{
		{Step{Do: KindHighPass, Order: 2, CornerHz: 0.1}, 0.3, unknown, 0.3, unknown},
		{Step{Do: KindHighPass, Order: 2, CornerHz: 0.5}, 0.3, unknown, 0.5, unknown},
		{Step{Do: KindLowPass, Order: 2, CornerHz: 30}, unknown, 20, unknown, 20},
		{Step{Do: KindLowPass, Order: 2, CornerHz: 15}, unknown, 20, unknown, 15},
		{Step{Do: KindLowPass, Order: 2, CornerHz: 45}, unknown, unknown, unknown, unknown}, // 0.9 of half the sampling rate
		{Step{Do: KindBandPass, Order: 2, LowHz: 0.1, HighHz: 25}, unknown, unknown, 0.1, 25},
		{Step{Do: KindBandPass, Order: 2, LowHz: 0.1, HighHz: 25}, 0.3, 30, 0.3, 25},
		{Step{Do: KindBandPass, Order: 2, LowHz: 0.1, HighHz: 25}, 0.05, 20, 0.1, 20}, // above is nothing
		{Step{Do: KindBandPass, Order: 2, LowHz: 0.1, HighHz: 45}, unknown, unknown, 0.1, unknown},
	} {
		c := raw(x, 0.01)
		c.LowCutHz, c.HighCutHz = test.low, test.high
		got, err := step(test.step).Apply(c)
		same := func(a, b float64) bool { return a == b || math.IsNaN(a) && math.IsNaN(b) }
		if err != nil || !same(got.LowCutHz, test.wantLow) || !same(got.HighCutHz, test.wantHigh) {
			t.Errorf("%+v after %g to %g Hz: %g to %g Hz, %v", test.step, test.low, test.high, got.LowCutHz, got.HighCutHz, err)
		}
	}
}

func TestUsableBand(t *testing.T) {
	for _, test := range []struct{ stepS, low, high, from, to float64 }{
		{0.01, unknown, unknown, 0.025, math.Inf(1)},
		{0.01, 0.1, 25, 0.05, 8},
		{0.005, 0.05, 200, 0.0125, 16}, // a corner above half the sampling rate says nothing
	} {
		c := Conditioned{StepS: test.stepS / 4, Oversampled: 4, LowCutHz: test.low, HighCutHz: test.high, LongS: math.Inf(1)}
		from, to := c.UsableBand()
		if math.Abs(from-test.from) > 1e-12 || to != test.to && math.Abs(to-test.to) > 1e-12 {
			t.Errorf("%+v: %g to %g s", test, from, to)
		}
	}
}

func TestTrim(t *testing.T) {
	x := make([]float64, 101)
	for i := range x {
		x[i] = float64(i)
	}
	got, err := step(Step{Do: KindTrim, FromS: 0.2, ToS: 0.5}).Apply(raw(x, 0.01))
	if err != nil || len(got.Acceleration) != 31 || got.Acceleration[0] != 20 || math.Abs(got.LeadS+0.2) > 1e-12 {
		t.Errorf("%d samples from %g, lead %g s, %v", len(got.Acceleration), got.Acceleration[0], got.LeadS, err)
	}
	_, err = step(Step{Do: KindTrim, FromS: 0.96}).Apply(raw(x, 0.01))
	if err == nil || err.Error() != "step 1 (trim): 5 samples would be left of 101" {
		t.Errorf("too short: %v", err)
	}
}

// Far from both corners a band keeps what there is, and outside it nothing; a band that the
// header's corner has emptied is refused.
func TestBandPass(t *testing.T) {
	const stepS = 0.01
	s := Step{Do: KindBandPass, Order: 4, LowHz: 0.5, HighHz: 10}
	for hz, want := range map[float64]float64{0.1: 0, 2: 1, 40: 0} {
		x := make([]float64, 8000)
		for i := range x {
			x[i] = math.Sin(2 * math.Pi * hz * float64(i) * stepS)
		}
		signal.Taper(x, 2000, 2000)
		got, err := step(s).Apply(raw(x, stepS))
		if err != nil || math.Abs(signal.Greatest(got.Acceleration)-want) > 0.003 {
			t.Errorf("%g Hz: %g is left, want %g, %v", hz, signal.Greatest(got.Acceleration), want, err)
		}
	}
	c := raw(make([]float64, 100), stepS)
	c.LowCutHz = 12
	if _, err := step(s).Apply(c); err == nil || err.Error() != "step 1 (band-pass): corner of 12 Hz is not below 10 Hz" {
		t.Errorf("empty band: %v", err)
	}
}

// Of a motion without anything near half the sampling rate every factor-th sample is a
// sample of it, and the others lie on the curve.
func TestOversample(t *testing.T) {
	const stepS, factor = 0.02, 4
	x, curve := make([]float64, 500), make([]float64, 500*factor)
	at := func(s float64) float64 { d := (s - 5) / 1.2; return math.Exp(-d*d) * math.Sin(2*math.Pi*9*s) }
	for i := range x {
		x[i] = at(float64(i) * stepS)
	}
	got, err := step(Step{Do: KindOversample, Factor: factor}).Apply(raw(x, stepS))
	if err != nil || math.Abs(got.StepS-stepS/factor) > 1e-15 || got.Oversampled != factor {
		t.Fatalf("step %g s, %d times, %v", got.StepS, got.Oversampled, err)
	}
	off := 0.0
	for i, v := range got.Acceleration {
		off = max(off, math.Abs(v-at(float64(i)*got.StepS-got.LeadS)))
	}
	if off > 1e-6 || len(got.Acceleration) < len(curve)-factor {
		t.Errorf("%d samples, off by %g", len(got.Acceleration), off)
	}
}

// Nothing before the motion or behind it to tell noise by leaves the corner that the rule names.
func TestNoNoise(t *testing.T) {
	x := recorded(4, motion(4, 0.01, 20, 0.4, 12))[2000:2600]
	got, err := Standard().Apply(raw(x, 0.01))
	if err != nil || got.LowCutHz != 0.1 || !math.IsNaN(got.HighCutHz) {
		t.Errorf("%g to %g Hz, %v", got.LowCutHz, got.HighCutHz, err)
	}
}

// A motion that begins or ends at once, is dead or short, is no reason to fail.
func TestOddMotions(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 5))
	for n := 0; n < 60; n += 7 {
		x := make([]float64, n+1)
		for i := range x {
			x[i] = random.NormFloat64()
		}
		for _, stepS := range []float64{0.0005, 0.01, 0.1} {
			for _, x := range [][]float64{x, make([]float64, n+1)} {
				got, err := Standard().Apply(raw(x, stepS))
				if err != nil || len(got.Acceleration) < len(x) || math.IsNaN(signal.Greatest(got.Acceleration)) {
					t.Fatalf("%d samples of %g s: %d, %v", len(x), stepS, len(got.Acceleration), err)
				}
			}
		}
	}
}

func BenchmarkStandard(b *testing.B) {
	x := recorded(1, motion(1, 0.01, 20, 0.4, 12))
	b.SetBytes(int64(8 * len(x)))
	n := 0
	for b.Loop() {
		got, err := Standard().Apply(raw(x, 0.01))
		if err != nil {
			b.Fatal(err)
		}
		n = len(got.Acceleration)
	}
	b.ReportMetric(float64(n)/float64(len(x)), "length-ratio")
}

// PGD is that of the motion with its pads whole: a motion of high frequencies behind a low
// corner has a displacement of the corner's period in front, which must not be cut.
func TestCutPadsKeepTheDisplacement(t *testing.T) {
	const stepS = 0.01
	for seed := range uint64(4) {
		x := motion(seed, stepS, 0.2, 5, 20)
		r := step(Step{Do: KindHighPass, Order: 4, CornerHz: 0.1})
		got, err := r.Apply(raw(x, stepS))
		if err != nil {
			t.Fatal(err)
		}
		f, err := signal.HighPass(4, 0.1, stepS)
		if err != nil {
			t.Fatal(err)
		}
		pad := int(f.PadS() / stepS)
		whole := make([]float64, len(x)+2*pad)
		copy(whole[pad:], x)
		f.TwoWay(whole)
		_, pgv, pgd := spectrum.Peaks(stepS, got.Acceleration)
		_, wantV, wantD := spectrum.Peaks(stepS, whole)
		if math.Abs(pgv/wantV-1) > 0.005 || math.Abs(pgd/wantD-1) > 0.005 {
			t.Errorf("seed %d: PGV %.4g and PGD %.4g, with whole pads %.4g and %.4g; %d samples of %d", seed, pgv, pgd, wantV, wantD, len(got.Acceleration), len(x))
		}
	}
}

// A network's corrected version, filtered with corners of its own, and the raw one after
// the standard recipe agree over the periods at which both can be believed.
func TestRawAndCorrectedAgree(t *testing.T) {
	const stepS, limit = 0.01, 0.05
	worst := 0.0
	for seed := range uint64(8) {
		clean := motion(seed, stepS, 20, 0.15, 12)
		network := Recipe{Name: "network", States: []string{"raw"}, Steps: []Step{
			{Do: KindHighPass, Order: 4, CornerHz: 0.12}, {Do: KindLowPass, Order: 4, CornerHz: 30},
		}}
		filtered, err := network.Apply(raw(clean, stepS))
		if err != nil {
			t.Fatal(err)
		}
		corrected, err := Standard().Apply(Component{
			Acceleration: filtered.Acceleration, StepS: stepS, State: "corrected", LowCutHz: filtered.LowCutHz, HighCutHz: filtered.HighCutHz,
		})
		if err != nil {
			t.Fatal(err)
		}
		delivered := recorded(seed, clean)
		for i := range delivered {
			along := float64(i) / float64(len(delivered))
			delivered[i] += 0.1 * along * along // a drift that is no straight line
		}
		ours, err := Standard().Apply(raw(delivered, stepS))
		if err != nil {
			t.Fatal(err)
		}
		fromS, toS := corrected.UsableBand()
		from, to := ours.UsableBand()
		fromS, toS = max(fromS, from), min(toS, to)
		if !(toS > 3) {
			t.Errorf("seed %d: common to %.3g s only", seed, toS)
		}
		var periods []float64
		for p := fromS; p <= toS; p *= 1.05 {
			periods = append(periods, p)
		}
		a, b := sd(t, periods, stepS, corrected.Acceleration), sd(t, periods, ours.StepS, ours.Acceleration)
		for i, p := range periods {
			off := math.Abs(b[i]/a[i] - 1)
			if worst = max(worst, off); off > limit {
				t.Errorf("seed %d, T = %.3g s of %.3g to %.3g: %.4f of the corrected one", seed, p, fromS, toS, b[i]/a[i])
			}
		}
	}
	t.Logf("off by at most %.2g", worst)
}
