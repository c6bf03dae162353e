package spectrum

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
	"time"
)

// banded returns a made-up motion like those of strong-motion records, which
// have little energy above 25 Hz: noise under an envelope that rises and decays,
// smoothed with a bell curve that leaves a twentieth of the amplitude at 25 Hz.
func banded(seed uint64, n int, stepS float64) []float64 {
	deviation := math.Sqrt(2*math.Log(20)) / (2 * math.Pi * 25) / stepS // samples
	reach := int(5*deviation) + 1
	r := rand.New(rand.NewPCG(seed, 2))
	noise := make([]float64, n+2*reach)
	for i := range noise {
		t := float64(i) / float64(len(noise))
		noise[i] = 20 * t * math.Exp(-8*t) * r.NormFloat64()
	}
	a := make([]float64, n)
	for i := range a {
		for j := -reach; j <= reach; j++ {
			x := float64(j) / deviation
			a[i] += noise[i+reach+j] * math.Exp(-x*x/2)
		}
	}
	return a
}

// BenchmarkRotD is all that a pair takes, SD of both components and RotD, for the
// default grid on 8000 samples: on motions with little energy at high
// frequencies and on those with much, which have several times the peaks.
// osc-steps/s counts both components; pair-ratio is the time over that of the
// two SD in it.
func BenchmarkRotD(b *testing.B) {
	const n = 8000
	for _, step := range []float64{0.005, 0.01, 0.02} {
		benchmarkRotD(b, "band-limited", step, banded(1, n, step), banded(2, n, step))
	}
	for _, step := range []float64{0.005, 0.01, 0.02} {
		benchmarkRotD(b, "broad-band", step, shaken(1, n), shaken(2, n))
	}
}

func benchmarkRotD(b *testing.B, motion string, step float64, first, second []float64) {
	for _, name := range Kernels() {
		b.Run(fmt.Sprintf("%s/dt=%g/%s", motion, step, name), func(b *testing.B) {
			useKernel(b, name)
			s, err := NewSolver(NigamJennings, step, DefaultGrid().Oscillators())
			if err != nil {
				b.Fatal(err)
			}
			sdFirst, sdSecond := s.SD(nil, first), s.SD(nil, second)
			s.RotD(first, second, sdFirst, sdSecond) // makes the work space
			var alone time.Duration
			b.ReportAllocs()
			for b.Loop() {
				start := time.Now()
				s.SD(sdFirst, first)
				s.SD(sdSecond, second)
				alone += time.Since(start)
				s.RotD(first, second, sdFirst, sdSecond)
			}
			perOscillatorStep(b, 2*s.Len(), len(first))
			b.ReportMetric(float64(b.Elapsed())/float64(alone), "pair-ratio")
		})
	}
}
