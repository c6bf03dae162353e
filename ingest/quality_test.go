package ingest

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// swell is an invented motion of n samples at dt: noise of a few Hz, by two
// passes of a smoothing recurrence, that rises and dies away, about zero, with a
// peak of one.
func swell(n int, dt float64) []float64 {
	rng := rand.New(rand.NewPCG(7, 11))
	x := make([]float64, n)
	smooth := math.Exp(-2 * math.Pi * 3 * dt)
	one, two := 0.0, 0.0
	for i := range x {
		t := float64(i) * dt
		one = smooth*one + (1-smooth)*rng.NormFloat64()
		two = smooth*two + (1-smooth)*one
		x[i] = two * t * t * math.Exp(-t/1.5)
	}
	peak, _ := peakOf(x)
	for i := range x {
		x[i] /= math.Abs(peak)
	}
	return x
}

// rounded returns x in whole steps.
func rounded(x []float64, step float64) []float64 {
	y := make([]float64, len(x))
	for i := range x {
		y[i] = math.Round(x[i]/step) * step
	}
	return y
}

// clipped returns x held between ±limit.
func clipped(x []float64, limit float64) []float64 {
	y := make([]float64, len(x))
	for i := range x {
		y[i] = max(-limit, min(limit, x[i]))
	}
	return y
}

// clippedWarning is the warning of x clipped at limit: of its longest run beyond
// the limit, the first of several.
func clippedWarning(x []float64, limit float64) string {
	run, first := 0, 0
	for i := 0; i < len(x); i++ {
		n := 0
		for i+n < len(x) && x[i+n] > limit || i+n < len(x) && x[i+n] < -limit {
			n++
		}
		if n > run {
			run, first = n, i
		}
		i += n
	}
	return fmt.Sprintf("%d consecutive samples at the extreme, from sample %d on: clipped?", run, first+1)
}

// sine returns n samples of frequency f at dt, at their extreme in the middle of
// a step.
func sine(n int, f, dt float64) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = math.Sin(2 * math.Pi * f * (float64(i) + 0.5) * dt)
	}
	return x
}

// put returns x with other values from index at on.
func put(x []float64, at int, values ...float64) []float64 {
	return slices.Replace(slices.Clone(x), at, at+len(values), values...)
}

func TestQualityFlags(t *testing.T) {
	const dt = 0.005
	motion := rounded(swell(4000, dt), 1e-6)
	_, top := peakOf(motion)
	zeros := make([]float64, 1000)
	still := func(n int) []float64 { return slices.Repeat(motion[top+3:top+4], n) }
	cases := []struct {
		name string
		dt   float64
		x    []float64
		want string // "" for no warning
	}{
		{"nothing wrong", dt, motion, ""},
		{"zeros before and after", dt, slices.Concat(zeros, motion, zeros), ""},
		{"an offset", dt, addedTo(motion, 3), ""},
		{"every eighth sample", 8 * dt, everyNth(motion, 8), ""},

		{"clipped", dt, clipped(motion, 0.7), clippedWarning(motion, 0.7)},
		{"sine clipped", dt, clipped(sine(400, 2, dt), 0.9), clippedWarning(sine(400, 2, dt), 0.9)},
		{"slow sine, its tops within a step", dt, rounded(sine(4000, 0.5, dt), 0.01), ""},
		{"slow sine clipped", dt, clipped(rounded(sine(4000, 0.5, dt), 1e-4), 0.5), clippedWarning(sine(4000, 0.5, dt), 0.5)},
		{"two equal samples at the top", dt, put(motion, top+1, motion[top]), ""},
		{"three equal samples at the top", dt, put(motion, top+1, motion[top], motion[top]), "3 consecutive samples at the extreme, from sample %d on: clipped?"},

		{"a spike in the strong part", dt, put(motion, 700, motion[700]+0.5), "sample 701 stands out of those around it: a spike?"},
		{"a spike down", dt, put(motion, 700, motion[700]-0.5), "sample 701 stands out of those around it: a spike?"},
		{"a spike before the motion", dt, put(slices.Concat(zeros, motion), 500, 0.2), "sample 501 stands out of those around it: a spike?"},
		{"a spike below a tenth of the peak", dt, put(slices.Concat(zeros, motion), 500, 0.09), ""},
		{"a spike near the end", dt, put(motion, 3997, 0.3), "sample 3998 stands out of those around it: a spike?"},
		{"two spikes", dt, put(put(motion, 700, 2), 900, -1), "2 single samples stand out of those around them, from sample 701 on: spikes?"},
		{"a step", dt, put(motion, 700, addedTo(motion[700:], 0.5)...), ""},
		{"one count among zeros", dt, put(make([]float64, 500), 100, 1, 0, 0, 0, -1), ""},
		{"two high samples", dt, put(motion, 700, motion[700]+0.5, motion[701]+0.5), ""},

		{"zeros in the strong part", dt, put(motion, top+3, zeros[:40]...), "40 equal samples, 0.2 s, in the strong part, from sample %d on: lost data?"},
		{"the last sample held", dt, put(motion, top+3, still(60)...), "60 equal samples, 0.3 s, in the strong part, from sample %d on: lost data?"},
		{"a shorter run", dt, put(motion, top+3, still(39)...), ""},
		{"the longer of two runs", dt, put(put(motion, top+3, still(50)...), top+103, zeros[:41]...), "50 equal samples, 0.25 s, in the strong part, from sample %d on: lost data?"},
		{"nine samples of 0.05 s", 0.05, put(everyNth(motion, 10), 50, slices.Repeat([]float64{0.25}, 9)...), ""},
		{"ten samples of 0.05 s", 0.05, put(everyNth(motion, 10), 50, slices.Repeat([]float64{0.25}, 10)...), "10 equal samples, 0.5 s, in the strong part, from sample 51 on: lost data?"},
		{"coarse counts", dt, rounded(sine(4000, 0.5, dt), 0.04), ""},
	}
	for _, tc := range cases {
		c := Channel{StepS: tc.dt, Acceleration: slices.Clone(tc.x), Unit: "m/s2"}
		if err := check(&c); err != nil {
			t.Errorf("%s: %v", tc.name, err)
			continue
		}
		var want []string
		if tc.want != "" {
			from := top + 4
			if strings.Contains(tc.want, "clipped") {
				from = top + 1
			}
			want = []string{strings.Replace(tc.want, "%d", fmt.Sprint(from), 1)}
		}
		if !slices.Equal(c.Warnings, want) {
			t.Errorf("%s: warnings %q, want %q", tc.name, c.Warnings, want)
		}
	}
}

func addedTo(x []float64, offset float64) []float64 {
	y := slices.Clone(x)
	for i := range y {
		y[i] += offset
	}
	return y
}

func everyNth(x []float64, n int) []float64 {
	var y []float64
	for i := 0; i < len(x); i += n {
		y = append(y, x[i])
	}
	return y
}

// TestQualityOfNoise looks for flags where nothing stands out: white noise, whose
// neighbours are independent, at all resolutions.
func TestQualityOfNoise(t *testing.T) {
	for seed := range uint64(100) {
		rng := rand.New(rand.NewPCG(seed, 3))
		x := make([]float64, 2000)
		for i := range x {
			x[i] = rng.NormFloat64()
		}
		for _, step := range []float64{1e-9, 1e-3, 0.1} {
			c := Channel{StepS: 0.01, Acceleration: rounded(x, step)}
			if err := check(&c); err != nil || len(c.Warnings) > 0 {
				t.Errorf("seed %d, step %g: %v, warnings %q", seed, step, err, c.Warnings)
			}
		}
	}
}

// TestQualityFinds puts one fault at a random place into the strong part of
// motions and looks for its flag.
func TestQualityFinds(t *testing.T) {
	const dt = 0.005
	motion := rounded(swell(4000, dt), 1e-6)
	s := series{x: motion, low: slices.Min(motion), high: slices.Max(motion)}
	from, to := s.strong()
	if share := energy(motion[from:to+1]) / energy(motion); math.Abs(share-0.9) > 0.01 {
		t.Fatalf("strong part from %d to %d has %g of the energy, want 0.9", from, to, share)
	}
	rng := rand.New(rand.NewPCG(5, 5))
	found := map[string]int{}
	const trials = 200
	for range trials {
		at := from + 10 + rng.IntN(to-from-120)
		held := slices.Repeat([]float64{motion[at]}, 50)
		for want, x := range map[string][]float64{
			"spike?": put(motion, at, motion[at]+math.Copysign(0.5, motion[at])), "lost data?": put(motion, at, held...),
		} {
			c := Channel{StepS: dt, Acceleration: x}
			if err := check(&c); err != nil {
				t.Fatal(err)
			}
			if len(c.Warnings) == 1 && strings.HasSuffix(c.Warnings[0], want) {
				found[want]++
			}
		}
	}
	if found["lost data?"] != trials || found["spike?"] < trials*9/10 {
		t.Errorf("found %v of %d each", found, trials)
	}
}

func energy(x []float64) float64 {
	sum := 0.0
	for _, v := range x {
		sum += v * v
	}
	return sum
}

// BenchmarkFlagQuality looks at a motion that goes on to the end, at one that is
// at rest for half of the time but for single units of its last digit, and at
// white noise.
func BenchmarkFlagQuality(b *testing.B) {
	rng := rand.New(rand.NewPCG(1, 2))
	noise := make([]float64, 8000)
	for i := range noise {
		noise[i] = rng.NormFloat64()
	}
	for name, x := range map[string][]float64{
		"motion": rounded(swell(8000, 0.0025), 1e-6), "rest": rounded(swell(8000, 0.005), 1e-6), "noise": noise,
	} {
		c := Channel{StepS: 0.005, Acceleration: x}
		low, high := slices.Min(x), slices.Max(x)
		b.Run(name, func(b *testing.B) {
			b.SetBytes(int64(8 * len(x)))
			b.ReportAllocs()
			for b.Loop() {
				flagQuality(&c, low, high)
			}
		})
	}
}
