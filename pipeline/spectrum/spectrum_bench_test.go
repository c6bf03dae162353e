package spectrum

import (
	"math"
	"math/rand/v2"
	"strconv"
	"testing"

	"swaybook/pipeline/internal/kernel"
)

// shaken returns a made-up motion: noise under an envelope that rises and
// decays, n samples, peak near 3 m/s². It is no record of any earthquake.
func shaken(seed uint64, n int) []float64 {
	r := rand.New(rand.NewPCG(seed, 1))
	a := make([]float64, n)
	smooth := 0.0
	for i := range a {
		t := float64(i) / float64(n)
		smooth += 0.3 * (r.NormFloat64() - smooth)
		a[i] = 60 * t * math.Exp(-8*t) * smooth
	}
	return a
}

// useKernel switches to a kernel for the rest of a test.
func useKernel(t testing.TB, name string) {
	t.Helper()
	before := Kernel()
	if err := UseKernel(name); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := UseKernel(before); err != nil {
			t.Fatal(err)
		}
	})
}

func perOscillatorStep(b *testing.B, oscillators, samples int) {
	steps := float64(oscillators) * float64(samples) * float64(b.N)
	b.ReportMetric(steps/b.Elapsed().Seconds(), "osc-steps/s")
}

// BenchmarkSD is the default grid on 8000 samples, at the usual steps.
func BenchmarkSD(b *testing.B) {
	const n = 8000
	a := shaken(1, n)
	for _, step := range []float64{0.005, 0.01, 0.02} {
		benchmarkSD(b, NigamJennings, step, a)
	}
	benchmarkSD(b, NewmarkAverage, 0.005, a)
}

func benchmarkSD(b *testing.B, method Method, step float64, a []float64) {
	for _, name := range kernel.Names() {
		b.Run(method.String()+"/dt="+strconv.FormatFloat(step, 'g', -1, 64)+"/"+name, func(b *testing.B) {
			useKernel(b, name)
			s, err := NewSolver(method, step, DefaultGrid().Oscillators())
			if err != nil {
				b.Fatal(err)
			}
			d := make([]float64, s.Len())
			b.ReportAllocs()
			for b.Loop() {
				s.SD(d, a)
			}
			perOscillatorStep(b, s.Len(), len(a))
		})
	}
}

// BenchmarkMarch is the marching alone of the oscillators of the default grid,
// without the search for maxima.
func BenchmarkMarch(b *testing.B) {
	const n = 8000
	for _, name := range kernel.Names() {
		b.Run(name, func(b *testing.B) {
			useKernel(b, name)
			s, err := NewSolver(NigamJennings, 0.005, DefaultGrid().Oscillators())
			if err != nil {
				b.Fatal(err)
			}
			m := newMotion()
			m.load(shaken(1, n))
			for b.Loop() {
				m.loadStrides(s.strides)
				for i := range s.slow {
					s.slow[i].march(m)
				}
				for i := range s.fast {
					s.fast[i].march(m)
				}
			}
			perOscillatorStep(b, s.Len(), n)
		})
	}
}

// BenchmarkForms is SD of 100 oscillators that all take one form, maxima
// included.
func BenchmarkForms(b *testing.B) {
	const n = 8000
	a := shaken(1, n)
	for _, form := range []struct {
		name       string
		from, step float64 // periods in s
	}{{"slow", 0.06, 0.05}, {"fast", 0.01, 0.0004}} {
		b.Run(form.name, func(b *testing.B) {
			var list []Oscillator
			for i := range 100 {
				list = append(list, Oscillator{form.from + form.step*float64(i), 0.05})
			}
			s, err := NewSolver(NigamJennings, 0.01, list)
			if err != nil {
				b.Fatal(err)
			}
			d := make([]float64, len(list))
			for b.Loop() {
				s.SD(d, a)
			}
			perOscillatorStep(b, len(list), n)
		})
	}
}

// BenchmarkNewSolver is the cost of the coefficients of the default grid.
func BenchmarkNewSolver(b *testing.B) {
	list := DefaultGrid().Oscillators()
	for b.Loop() {
		if _, err := NewSolver(NigamJennings, 0.01, list); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(b.Elapsed().Seconds()/float64(b.N)/float64(len(list))*1e6, "µs/oscillator")
}
