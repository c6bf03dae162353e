package condition

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"swaybook/pipeline/signal"
)

// stepped adds a step of the baseline in m/s² that begins atS.
func stepped(x []float64, stepS, size, atS float64) []float64 {
	out := make([]float64, len(x))
	for i, v := range x {
		out[i] = v
		if float64(i)*stepS >= atS {
			out[i] += size
		}
	}
	return out
}

// A step of the baseline in the strong motion, of 1 to 5 % of PGA, leaves the spectrum
// within 5 % over the usable band by the standard recipe, where it comes back within
// another 10 % and more without its first step; and the step is found where it is.
func TestBaselineStepsComeBack(t *testing.T) {
	const stepS, limit = 0.01, 0.05
	without := Standard()
	without.Steps = without.Steps[1:]
	worst, unmended := 0.0, 0.0
	off := func(r Recipe, clean, x []float64) float64 {
		got, err := r.Apply(raw(x, stepS))
		if err != nil {
			t.Fatal(err)
		}
		fromS, toS := got.UsableBand()
		var periods []float64
		for p := fromS; p <= toS; p *= 1.05 {
			periods = append(periods, p)
		}
		if len(periods) < 20 && &r.Steps[0] != &without.Steps[0] {
			t.Errorf("usable from %.3g to %.3g s", fromS, toS)
		}
		greatest := 0.0
		want, have := sd(t, periods, stepS, clean), sd(t, periods, got.StepS, got.Acceleration)
		for i := range periods {
			greatest = max(greatest, math.Abs(have[i]/want[i]-1))
		}
		return greatest
	}
	for seed := range uint64(8) {
		clean := motion(seed, stepS, 20, 0.4, 12)
		for _, size := range []float64{-0.05, 0.02, 0.1} {
			for _, atS := range []float64{22, 25, 30} {
				x := stepped(recorded(seed, clean), stepS, size, atS)
				mended := off(Standard(), clean, x)
				if worst, unmended = max(worst, mended), max(unmended, off(without, clean, x)); mended > limit {
					t.Errorf("seed %d, %g m/s² from %g s: off by %.3g", seed, size, atS, mended)
				}
				_, quiet := (&work{Conditioned: Conditioned{Acceleration: x, StepS: stepS, Oversampled: 1}}).quiet()
				o, ok := signal.FindOffset(x, stepS, quiet, signal.EndOf(x, stepS, restFrom))
				if !ok || math.Abs(o.Size-size) > 0.001 || math.Abs(o.TimeS-atS) > 0.1 {
					t.Errorf("seed %d, %g m/s² from %g s: %+v, %v", seed, size, atS, o, ok)
				}
			}
		}
	}
	t.Logf("off by at most %.2g, without the step %.2g", worst, unmended)
	if unmended < 2*limit {
		t.Errorf("without the step off by %.2g only", unmended)
	}
}

// No step is taken off where there is none: not of a motion that drifts, that is cut in its
// coda, that has long periods, or that begins too early to tell.
func TestNoStepIsInvented(t *testing.T) {
	const stepS = 0.01
	for _, lowHz := range []float64{0.05, 0.15, 0.4} {
		for seed := range uint64(20) {
			noisy := recorded(seed, motion(seed, stepS, 20, lowHz, 12))
			drifting := slices.Clone(noisy)
			for i := range drifting {
				along := float64(i) / float64(len(drifting))
				drifting[i] += 0.1 * along * along
			}
			for name, x := range map[string][]float64{
				"as recorded": noisy, "drifting": drifting, "cut": noisy[:5600], "cut early": noisy[:3500], "triggered": noisy[1000:], "triggered late": noisy[1950:],
			} {
				got, err := step(Step{Do: KindOffset, Share: 0.005}).Apply(raw(x, stepS))
				if err != nil {
					t.Fatal(err)
				}
				if last := len(x) - 1; got.Acceleration[last] != x[last] {
					t.Errorf("%s from %g Hz, seed %d: a step of %g is taken off", name, lowHz, seed, x[last]-got.Acceleration[last])
				}
				if len(got.Exceeded) > 0 {
					t.Errorf("%s from %g Hz, seed %d: %s", name, lowHz, seed, got.Exceeded[0].Words)
				}
			}
		}
	}
}

// Steps are found of motions with long periods too, and in no more than the share asked for.
func TestStepsOfLongMotions(t *testing.T) {
	const stepS, size, atS = 0.01, 0.05, 25
	for seed := range uint64(20) {
		x := stepped(recorded(seed, motion(seed, stepS, 20, 0.15, 12)), stepS, size, atS)
		for share, want := range map[float64]float64{0.01: size, 0.05: 0} {
			got, err := step(Step{Do: KindOffset, Share: share}).Apply(raw(x, stepS))
			last := len(x) - 1
			if err != nil || math.Abs(x[last]-got.Acceleration[last]-want) > 0.1*size {
				t.Errorf("seed %d, share %g: %g taken off, want %g, %v", seed, share, x[last]-got.Acceleration[last], want, err)
			}
		}
	}
}

// A baseline that changes as no single step in the motion does is noted, and nothing else:
// of two steps the spectrum is off by far more than the filter's shape tells.
func TestJumpsAreNoted(t *testing.T) {
	const stepS = 0.01
	for _, test := range []struct {
		name  string
		level func(behindS float64) float64 // of PGA, by the time behind the arrival
		noted bool
	}{
		{"none", func(float64) float64 { return 0 }, false},
		{"one step", func(s float64) float64 { return after(s, 2, 0.02) }, false},
		{"two steps", func(s float64) float64 { return after(s, 4, 0.01) - after(s, 9, 0.006) }, true},
		{"there and back", func(s float64) float64 { return after(s, 2, 0.02) - after(s, 7, 0.02) }, true},
	} {
		noted, all := 0, 0
		worst := 0.0
		for _, magnitude := range []float64{5.5, 6, 6.5, 7, 7.5} {
			for seed := range uint64(4) {
				clean := earthquake(magnitude, 30e3, 20, stepS, seed)
				x := recorded(seed, clean)
				for i := range x {
					u := float64(i) / float64(len(x))
					x[i] += 0.02*u*u + 2*test.level(float64(i)*stepS-20)
				}
				got := conditioned(t, Standard(), x, stepS)
				o := off{}
				fromS, toS := got.UsableBand()
				o.compare(t, fromS, toS, Conditioned{Acceleration: clean, StepS: stepS}, got)
				_, most := o.upTo(1)
				all++
				worst = max(worst, most)
				if slices.ContainsFunc(got.Exceeded, func(e Excess) bool { return e.Flag == FlagBaselineStep }) {
					noted++
				}
			}
		}
		t.Logf("%s: noted in %d of %d, off by %.2g at most", test.name, noted, all, worst)
		if want := map[bool]int{true: all}[test.noted]; noted != want {
			t.Errorf("%s: noted in %d of %d, want %d", test.name, noted, all, want)
		}
	}
}

// Long noise is no jump: it is random how far its integral runs away, but not a line.
func TestNoJumpIsInvented(t *testing.T) {
	const stepS = 0.01
	for _, magnitude := range []float64{4, 5, 6, 6.5, 7, 7.5} {
		for seed := range uint64(8) {
			clean := earthquake(magnitude, 50e3, 20, stepS, seed)
			for _, deviation := range []float64{0, 0.001, 0.01} {
				x := recorded(seed, clean)
				for i, v := range pink(seed, len(x)) {
					x[i] += deviation * v
				}
				cut := signal.EndOf(x, stepS, restFrom) + int(25/stepS)
				for name, x := range map[string][]float64{"whole": x, "cut": x[:min(len(x), cut)], "short noise": x[900:]} {
					if got := conditioned(t, step(Step{Do: KindOffset, Share: 0.005}), x, stepS); len(got.Exceeded) > 0 {
						t.Errorf("M %g, seed %d, noise of %g m/s², %s: %s", magnitude, seed, deviation, name, got.Exceeded[0].Words)
					}
				}
			}
		}
	}
}

// Levels that swing slowly, over 60 to 200 s by 0.5 % of PGA, are seldom taken for jumps, and what a filter
// leaves of them is little.
func TestSwingsAreSeldomJumps(t *testing.T) {
	const stepS = 0.01
	noted, all := 0, 0
	o := off{}
	for _, magnitude := range []float64{5.5, 6, 6.5, 7, 7.5} {
		for seed := range uint64(16) {
			random := rand.New(rand.NewPCG(seed, 80))
			clean := earthquake(magnitude, 50e3, 15, stepS, seed)
			if tail := signal.EndOf(clean, stepS, restFrom) + int(25/stepS); tail > len(clean) {
				clean = append(clean, make([]float64, tail-len(clean))...)
			}
			x := recorded(seed, clean)
			periodS, phase := 60+140*random.Float64(), 2*math.Pi*random.Float64()
			for i := range x {
				x[i] += 0.01 * math.Sin(2*math.Pi*float64(i)*stepS/periodS+phase)
			}
			got := conditioned(t, Standard(), x, stepS)
			all++
			if slices.ContainsFunc(got.Exceeded, func(e Excess) bool { return e.Flag == FlagBaselineStep }) {
				noted++
			}
			fromS, toS := got.UsableBand()
			o.compare(t, fromS, toS, Conditioned{Acceleration: clean, StepS: stepS}, got)
		}
	}
	t.Logf("noted in %d of %d, off by %v", noted, all, o)
	if _, most := o.upTo(1); noted > 1 || most > 0.3 {
		t.Errorf("noted in %d of %d, off by %v", noted, all, o)
	}
}

// pink is noise of a standard deviation of 1, at steps of 0.01 s of up to 40 s.
func pink(seed uint64, n int) []float64 {
	random := rand.New(rand.NewPCG(seed, 79))
	var held [12]float64
	x := make([]float64, n)
	for i := range x {
		for k := range held {
			if i%(1<<k) == 0 {
				held[k] = random.NormFloat64()
			}
			x[i] += held[k] / math.Sqrt(float64(len(held)))
		}
	}
	return x
}

// after is size from a time on.
func after(s, from, size float64) float64 {
	if s < from {
		return 0
	}
	return size
}
