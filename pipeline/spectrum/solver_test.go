package spectrum

import (
	"math"
	"math/rand/v2"
	"sync"
	"testing"

	"swaybook/pipeline/internal/kernel"
)

// seededMotion returns made-up noise of n samples with spikes and quiet parts,
// zero at both ends, which is harder on maxima than a record.
func seededMotion(seed uint64, n int) []float64 {
	r := rand.New(rand.NewPCG(seed, 7))
	a := make([]float64, n)
	level := 1.0
	for i := 1; i < n-1; i++ {
		if r.IntN(20) == 0 {
			level = math.Pow(10, -2*r.Float64())
		}
		a[i] = level * r.NormFloat64()
	}
	return a
}

func mustSolve(t testing.TB, method Method, step float64, list []Oscillator, a []float64) []float64 {
	t.Helper()
	s, err := NewSolver(method, step, list)
	if err != nil {
		t.Fatal(err)
	}
	return s.SD(nil, a)
}

func solveOne(t testing.TB, step, period, damping float64, a []float64) float64 {
	t.Helper()
	return mustSolve(t, NigamJennings, step, []Oscillator{{period, damping}}, a)[0]
}

func off(got, want float64) float64 { return math.Abs(got-want) / math.Abs(want) }

// ratios are periods over the step, on both sides of the change of form.
var ratios = []float64{0.05, 0.2, 0.3, 0.5, 0.7, 1, 1.5, 2, 2.5, 3, 4, 4.9, 5, 5.1, 6, 7, 8, 10, 13, 20, 50, 100, 200, 500, 1000, 2000}

var dampings = []float64{0, 0.01, 0.05, 0.2, 0.5, 0.9, 0.99}

// TestFormsAgree solves the same motion with twice and four times the samples
// on the same straight lines. The continuous maximum stays, while oscillators
// change from the fast form to the slow one.
func TestFormsAgree(t *testing.T) {
	const seed = 11
	a := seededMotion(seed, 900)
	worst := 0.0
	for _, factor := range []int{2, 4, 5} {
		fine := interpolate(a, factor)
		for _, ratio := range ratios {
			for _, damping := range dampings {
				e := off(solveOne(t, 1/float64(factor), ratio, damping, fine), solveOne(t, 1, ratio, damping, a))
				if !(e <= 2e-12) {
					t.Errorf("seed %d T/dt %g damping %g: %d times the samples change D by %.2g", seed, ratio, damping, factor, e)
				}
				worst = max(worst, e)
			}
		}
	}
	t.Logf("greatest change %.2g", worst)
}

func interpolate(a []float64, factor int) []float64 {
	fine := make([]float64, 0, (len(a)-1)*factor+1)
	for k := 0; k+1 < len(a); k++ {
		for j := range factor {
			fine = append(fine, a[k]+(a[k+1]-a[k])*float64(j)/float64(factor))
		}
	}
	return append(fine, a[len(a)-1])
}

// TestSamplesMissPeaks shows what continuous maxima are for: the greatest
// sample of an undamped free vibration of frequency f falls short by up to
// 1 − cos(π·f·dt).
func TestSamplesMissPeaks(t *testing.T) {
	for _, ratio := range []float64{2.5, 4, 6, 10, 20} {
		least := 1.0
		for i := range 201 {
			// A short pulse, whose place between samples sets the phase.
			a := make([]float64, 40)
			a[1], a[2] = 1-float64(i)/200, float64(i)/200
			s := mustSlow(ratio)
			m := newMotion()
			m.load(a)
			d := solveOne(t, 1, ratio, 0, a)
			sampled := sampledPeak(&s, m)
			if sampled > d*(1+1e-13) {
				t.Fatalf("T/dt %g: samples reach %v beyond D = %v", ratio, sampled, d)
			}
			least = min(least, sampled/d)
		}
		floor := math.Cos(math.Pi / ratio)
		if least < floor-1e-9 {
			t.Errorf("T/dt %g: samples reach %g of D, less than cos(π·dt/T) = %g", ratio, least, floor)
		}
		// An even number of samples a period leaves the peaks where they are among
		// samples, so that some pulse shows the whole shortfall; with only four the
		// pulse takes part.
		if share := (1 - least) / (1 - floor); share < 0.999 && ratio >= 6 {
			t.Errorf("T/dt %g: samples reach at least %g of D, only %g of the greatest shortfall", ratio, least, share)
		}
		t.Logf("T/dt %4g: samples fall short by up to %6.3f %%, 1 − cos(π·dt/T) is %6.3f %%", ratio, 100*(1-least), 100*(1-floor))
	}
}

func mustSlow(ratio float64) slow {
	phase := Omega(ratio)
	r := respond(phase, 0)
	return slow{phase: phase, exact: r.recurrence(), eq: r.difference()}
}

// sampledPeak marches on samples, through 40 more of free ringing.
func sampledPeak(o *slow, m *motion) float64 {
	quiet := append(append([]float64{}, m.a...), make([]float64, 40)...)
	g := newSlowGroups([]slow{*o})[0]
	var s kernel.Mark
	s.X[0] = o.first(m).x
	s.Y[0] = s.X[0]
	kernel.MarchSlow(g.eq, &s, &s, quiet)
	return math.Ldexp(s.Peak[0]*math.Abs(o.eq.scale), m.exponent)
}

func TestScaleAndSign(t *testing.T) {
	const seed = 3
	list := DefaultGrid().Oscillators()
	a := seededMotion(seed, 700)
	base := mustSolve(t, NigamJennings, 0.01, list, a)
	scaled := func(f float64) []float64 {
		b := make([]float64, len(a))
		for i := range a {
			b[i] = f * a[i]
		}
		return mustSolve(t, NigamJennings, 0.01, list, b)
	}
	for _, f := range []float64{-1, 0x1p-600, 0x1p+600, -4} {
		for i, d := range scaled(f) {
			if d != base[i]*math.Abs(f) {
				t.Fatalf("seed %d: %+v: motion times %g gives %v, want %v exactly", seed, list[i], f, d, base[i]*math.Abs(f))
			}
		}
	}
	for i, d := range scaled(0.3) {
		if off(d, 0.3*base[i]) > 1e-12 {
			t.Fatalf("seed %d: %+v: motion times 0.3 gives %v, want %v", seed, list[i], d, 0.3*base[i])
		}
	}
}

// TestDelayAndTail adds zeros before the motion, where the oscillator rests,
// and after it, where it rings. Neither may change D.
func TestDelayAndTail(t *testing.T) {
	const seed = 5
	a := seededMotion(seed, 500)
	list := append(Grid{ratios, dampings}.Oscillators(), Grid{ratios, []float64{0, 0.3, 0.999999}}.Oscillators()...)
	base := mustSolve(t, NigamJennings, 1, list, a)
	for _, pad := range []struct{ before, after int }{{1, 0}, {63, 0}, {64, 0}, {1000, 0}, {0, 1}, {0, 50}, {0, 5000}, {77, 777}} {
		b := append(make([]float64, pad.before), a...)
		b = append(b, make([]float64, pad.after)...)
		for i, d := range mustSolve(t, NigamJennings, 1, list, b) {
			if !(off(d, base[i]) <= 1e-11) {
				t.Errorf("seed %d: %+v: %d zeros before and %d after change D by %.2g", seed, list[i], pad.before, pad.after, off(d, base[i]))
			}
		}
	}
}

// TestGrouping solves a list whole, shuffled, in parts, and one by one. Bits
// must not change: a database would otherwise depend on how work was split.
func TestGrouping(t *testing.T) {
	const seed = 9
	r := rand.New(rand.NewPCG(seed, 0))
	a := shaken(seed, 1500)
	for _, method := range []Method{NigamJennings, NewmarkAverage, NewmarkLinear} {
		for _, step := range []float64{0.005, 0.02} {
			list := accepted(method, step, DefaultGrid().Oscillators())
			base := mustSolve(t, method, step, list, a)
			order := r.Perm(len(list))
			for len(order) > 0 {
				n := min(len(order), 1+r.IntN(9))
				part := make([]Oscillator, n)
				for i, j := range order[:n] {
					part[i] = list[j]
				}
				for i, d := range mustSolve(t, method, step, part, a) {
					if j := order[i]; d != base[j] {
						t.Fatalf("seed %d %v dt %g: %+v in a part of %d: %v, whole list %v", seed, method, step, list[j], n, d, base[j])
					}
				}
				order = order[n:]
			}
		}
	}
}

// TestLanes compares four oscillators side by side with the same ones alone, bit
// for bit, for every length over two blocks and more.
func TestLanes(t *testing.T) {
	const seed = 13
	a := seededMotion(seed, 2*blockSteps+5)
	var list []Oscillator
	for _, ratio := range []float64{0.3, 1, 2, 3, 8, 20, 100, 1000} {
		list = append(list, Oscillator{ratio, 0.02 * ratio / (1 + ratio)})
	}
	for n := range len(a) + 1 {
		for i, d := range mustSolve(t, NigamJennings, 1, list, a[:n]) {
			if alone := solveOne(t, 1, list[i].PeriodS, list[i].Damping, a[:n]); d != alone {
				t.Fatalf("seed %d n %d: %+v: %v in its lane, %v alone", seed, n, list[i], d, alone)
			}
		}
	}
}

// TestLimits checks A → PGA as T → 0 and D → PGD as T → ∞.
func TestLimits(t *testing.T) {
	const step = 0.01
	a := shaken(21, 1000)
	// Take mean and first moment away, so that the ground comes to rest at the
	// end and D of a very long period is the ground's own displacement.
	a = settled(a)
	pga, _, pgd := Peaks(step, a)
	for _, damping := range []float64{0.05, 0.2, 0.9} {
		short := 1e-3 * step
		if got := PSA(short, solveOne(t, step, short, damping, a)); off(got, pga) > 2e-3 {
			t.Errorf("damping %g: A = %v m/s² at T = %g s, PGA is %v", damping, got, short, pga)
		}
		for _, long := range []float64{1e5, 1e7} {
			// What the spring takes away is of order ω·t over the record's length.
			allowed := 3 * Omega(long) * step * float64(len(a))
			if got := solveOne(t, step, long, damping, a); off(got, pgd) > allowed {
				t.Errorf("damping %g: D = %v m at T = %g s, PGD is %v, allowed %g", damping, got, long, pgd, allowed)
			}
		}
	}
}

// settled returns a with a smooth window taken away, scaled and tilted so that
// velocity and displacement of the ground end at zero.
func settled(a []float64) []float64 {
	n := len(a)
	window := func(i int) float64 { return math.Pow(math.Sin(math.Pi*float64(i)/float64(n-1)), 2) }
	// Sums stand for integrals: of samples that are zero at both ends the
	// trapezoid has no other weights.
	b := append([]float64{}, a...)
	b[0], b[n-1] = 0, 0
	var s0, s1, w0, w1, w2 float64
	for i, x := range b {
		p, w := float64(i)/float64(n-1)-0.5, window(i)
		s0, s1 = s0+x, s1+x*p
		w0, w1, w2 = w0+w, w1+w*p, w2+w*p*p
	}
	det := w0*w2 - w1*w1
	c0, c1 := (s0*w2-s1*w1)/det, (s1*w0-s0*w1)/det
	for i := range b {
		b[i] -= window(i) * (c0 + c1*(float64(i)/float64(n-1)-0.5))
	}
	return b
}

// TestConcurrentUse shares one Solver; the race detector watches.
func TestConcurrentUse(t *testing.T) {
	s, err := NewSolver(NigamJennings, 0.01, Grid{[]float64{0.03, 0.3, 3}, []float64{0, 0.05}}.Oscillators())
	if err != nil {
		t.Fatal(err)
	}
	var group sync.WaitGroup
	for i := range uint64(8) {
		a := shaken(i, 300+int(i)*70)
		before := append([]float64{}, a...)
		want := s.SD(nil, a)
		group.Go(func() {
			for range 20 {
				for j, d := range s.SD(nil, a) {
					if d != want[j] {
						t.Errorf("motion %d oscillator %d: %v, want %v", i, j, d, want[j])
					}
				}
			}
			for j := range a {
				if a[j] != before[j] {
					t.Errorf("motion %d: sample %d was changed", i, j)
				}
			}
		})
	}
	group.Wait()
}

func TestNoAllocation(t *testing.T) {
	if raceDetector {
		t.Skip("the race detector has pools forget what they are given, one time in four")
	}
	s, err := NewSolver(NigamJennings, 0.01, DefaultGrid().Oscillators()[:50])
	if err != nil {
		t.Fatal(err)
	}
	a, d := shaken(1, 2000), make([]float64, s.Len())
	s.SD(d, a)
	// A collection may empty the pool once in a while, never per call.
	if n := testing.AllocsPerRun(50, func() { s.SD(d, a) }); n > 1 {
		t.Errorf("SD allocates %v times a call, want none", n)
	}
}
