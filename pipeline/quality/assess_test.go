package quality

import (
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

const stepS = 0.01

// motion is invented: 10 s of noise, a motion of about 2 m/s² that comes back to rest,
// and noise again. It is the second difference of a displacement.
func motion() []float64 {
	random := rand.New(rand.NewPCG(7, 7))
	displacement := func(i int) float64 {
		t := float64(i-1000) * stepS
		if t <= 0 {
			return 0
		}
		return 0.025 * t * t * t / (1 + t*t*t) * math.Exp(-t/3) * math.Sin(2*math.Pi*2*t)
	}
	x := make([]float64, 6000)
	for i := range x {
		x[i] = 1e-5*random.NormFloat64() + (displacement(i+1)-2*displacement(i)+displacement(i-1))/(stepS*stepS)
	}
	return x
}

func flags(found []Finding) string {
	var out []string
	for _, f := range found {
		out = append(out, f.Flag)
	}
	return strings.Join(out, " ")
}

// Each flag has a motion that raises it, and the motion without the fault does not.
func TestFlags(t *testing.T) {
	good := motion()
	if got := flags(Assess(good, stepS, 1000)); got != "" {
		t.Fatalf("a good motion: %s", got)
	}
	edit := func(change func(i int, v float64) float64) []float64 {
		x := slices.Clone(good)
		for i, v := range x {
			x[i] = change(i, v)
		}
		return x
	}
	for _, test := range []struct {
		name  string
		x     []float64
		onset int
		want  string
	}{
		{"offset", edit(func(_ int, v float64) float64 { return v + 0.05 }), 1000, "offset"},
		{"step", edit(func(i int, v float64) float64 {
			if i > 1500 {
				v += 0.05
			}
			return v
		}), 1000, "offset baseline_step drift"},
		{"pulse", edit(func(i int, v float64) float64 {
			if i > 1500 && i < 1530 {
				v += 1
			}
			return v
		}), 1000, "drift"},
		{"triggered on arrival", good[980:], 20, "no_pre_event"},
		{"triggered late", good[1100:], 0, "drift no_pre_event late_start"},
		{"cut", good[:1500], 1000, "early_end"},
		{"twice", append(slices.Clone(good), good[500:]...), 1000, "several_events"},
		{"noise", edit(func(i int, v float64) float64 { return v/100 + 0.01*math.Sin(float64(i*i%997)) }), 1000, "offset late_start early_end low_signal"},
	} {
		if got := flags(Assess(test.x, stepS, test.onset)); got != test.want {
			t.Errorf("%s: %q, want %q", test.name, got, test.want)
		}
	}
}

func TestOddMotions(t *testing.T) {
	for n := range 300 {
		for _, x := range [][]float64{make([]float64, n), slices.Repeat([]float64{1}, n)} {
			for _, f := range Assess(x, 0.01, n/2) {
				if math.IsNaN(f.Value) || f.Words == "" {
					t.Fatalf("%d samples: %+v", n, f)
				}
			}
		}
	}
}

func BenchmarkAssess(b *testing.B) {
	x := motion()
	b.SetBytes(int64(8 * len(x)))
	for b.Loop() {
		Assess(x, stepS, 1000)
	}
}
