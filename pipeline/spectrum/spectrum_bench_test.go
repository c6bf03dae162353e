package spectrum

import (
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
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

func perOscillatorStep(b *testing.B, oscillators, samples int) {
	steps := float64(oscillators) * float64(samples) * float64(b.N)
	b.ReportMetric(steps/b.Elapsed().Seconds(), "osc-steps/s")
}

// BenchmarkSD is the default grid on 8000 samples, at the usual steps.
func BenchmarkSD(b *testing.B) {
	const n = 8000
	a := shaken(1, n)
	for _, step := range []float64{0.005, 0.01, 0.02} {
		for _, method := range []Method{NigamJennings, NewmarkAverage} {
			b.Run(method.String()+"/dt="+strconv.FormatFloat(step, 'g', -1, 64), func(b *testing.B) {
				s, err := NewSolver(method, step, DefaultGrid().Oscillators())
				if err != nil {
					b.Fatal(err)
				}
				d := make([]float64, s.Len())
				b.ReportAllocs()
				for b.Loop() {
					s.SD(d, a)
				}
				perOscillatorStep(b, s.Len(), n)
			})
		}
	}
}

// BenchmarkMarch is the marching alone, one oscillator at a time beside four.
func BenchmarkMarch(b *testing.B) {
	const n = 8000
	var m motion
	m.load(shaken(1, n))
	var q [lanes]difference
	var r [lanes]turn
	for i := range lanes {
		o, _ := newSlow(0, 0.05*float64(i+1), 0.05)
		q[i] = o.eq
		r[i] = newFast(0, 1.5*float64(i+1), 0.05).turn
	}
	var s [lanes]state
	var peaks [lanes]float64
	run := func(name string, oscillators int, block func(from, to int)) {
		b.Run(name, func(b *testing.B) {
			for b.Loop() {
				s = [lanes]state{}
				for i := range m.peak {
					block(m.block(i))
				}
			}
			perOscillatorStep(b, oscillators, n)
		})
	}
	run("slow/one", 1, func(from, to int) { marchSlow(&q[0], &s[0], m.a[max(from, 1)-1:to+1]) })
	run("slow/four", lanes, func(from, to int) { marchSlowLanes(&q, &s, m.a[max(from, 1)-1:to+1], &peaks) })
	run("fast/one", 1, func(from, to int) { marchFast(&r[0], &s[0], m.bend[from:to]) })
	run("fast/four", lanes, func(from, to int) { marchFastLanes(&r, &s, m.bend[from:to], &peaks) })
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
