package quality

import (
	"math"
	"math/rand/v2"
	"sync"

	"swaybook/pipeline/signal"
	"swaybook/pipeline/stochastic"
)

// quietS precedes and follows an invented motion.
const quietS = 15

// invented is a motion of a greatest acceleration of 1 m/s² after quietS of rest (package
// stochastic), by magnitude and distance in m.
func invented(magnitude, distanceM float64, seed uint64) []float64 {
	p := stochastic.Example(magnitude, distanceM)
	p.LowCutHz, p.HighCutHz, p.OnsetS = 0.05, 40, quietS
	if err := p.Validate(); err != nil {
		panic(err)
	}
	x := stochastic.Simulate(make([]float64, int((p.SpanS()+quietS)/stepS)), stepS, p, rand.New(rand.NewPCG(seed, 77)))
	peak := signal.Greatest(x)
	for i := range x {
		x[i] /= peak
	}
	return x
}

// motions are invented ones of M 4 to 7.5 at 20 to 300 km.
var motions = sync.OnceValue(func() (all [][]float64) {
	for _, magnitude := range []float64{4, 5, 6, 7, 7.5} {
		for _, distanceM := range []float64{20e3, 100e3, 300e3} {
			for seed := range uint64(4) {
				all = append(all, invented(magnitude, distanceM, seed))
			}
		}
	}
	return all
})

// recorded are the motions with white noise of a standard deviation in m/s².
func recorded(noise float64) (all [][]float64) {
	for i, x := range motions() {
		all = append(all, edit(x, white(uint64(i), noise)))
	}
	return all
}

// edit is x with what add gives at the sample i of n added.
func edit(x []float64, add func(i, n int) float64) []float64 {
	out := make([]float64, len(x))
	for i, v := range x {
		out[i] = v + add(i, len(x))
	}
	return out
}

// white is noise of a standard deviation.
func white(seed uint64, deviation float64) func(i, n int) float64 {
	random := rand.New(rand.NewPCG(seed, 78))
	return func(int, int) float64 { return deviation * random.NormFloat64() }
}

// pink is noise whose power falls with the frequency: a sum of noises that change half as
// often from one to the next.
func pink(seed uint64, deviation float64) func(i, n int) float64 {
	const octaves = 10
	random := rand.New(rand.NewPCG(seed, 79))
	var held [octaves]float64
	return func(i, _ int) float64 {
		sum := 0.0
		for k := range held {
			if i%(1<<k) == 0 {
				held[k] = random.NormFloat64()
			}
			sum += held[k]
		}
		return deviation * sum / math.Sqrt(octaves)
	}
}

// after is the first sample up to which x has a share of its squares.
func after(x []float64, share float64) int {
	rest := share * squaresAbout(x, 0)
	for i, v := range x {
		if rest -= float64(v * v); rest <= 0 {
			return i
		}
	}
	return len(x)
}

// has counts motions by flag.
type has map[string]int

func (h has) count(found []Finding) {
	for _, f := range found {
		h[f.Flag]++
	}
}

func (h has) countOf(flag string, found []Finding) {
	for _, f := range found {
		if f.Flag == flag {
			h[flag]++
		}
	}
}
