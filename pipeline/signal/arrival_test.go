package signal_test

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"swaybook/pipeline/signal"
	"swaybook/pipeline/stochastic"
)

// earthquake is an invented motion of a peak in m/s² that begins onsetS after the first
// sample (package stochastic), with nothing before.
func earthquake(magnitude, distanceM, onsetS, peak, stepS float64, seed uint64) []float64 {
	const rungS = 45 // the low cut's filter has no phase shift and rings ahead
	p := stochastic.Example(magnitude, distanceM)
	p.LowCutHz, p.HighCutHz, p.OnsetS = 0.05, 0.4/stepS, rungS+onsetS
	if err := p.Validate(); err != nil {
		panic(err)
	}
	x := stochastic.Simulate(make([]float64, int((p.SpanS()+10)/stepS)), stepS, p, rand.New(rand.NewPCG(seed, 77)))
	x = x[int(math.Round(rungS/stepS)):]
	clear(x[:int(math.Round(onsetS/stepS))])
	scale := peak / signal.Greatest(x)
	for i := range x {
		x[i] *= scale
	}
	return x
}

// white adds noise of a standard deviation.
func white(x []float64, deviation float64, seed uint64) []float64 {
	random := rand.New(rand.NewPCG(seed, 78))
	for i := range x {
		x[i] += deviation * random.NormFloat64()
	}
	return x
}

// pink adds noise whose power falls with the frequency: a sum of noises that change half as
// often from one to the next.
func pink(x []float64, deviation float64, seed uint64) []float64 {
	random := rand.New(rand.NewPCG(seed, 79))
	var held [10]float64
	for i := range x {
		for k := range held {
			if i%(1<<k) == 0 {
				held[k] = random.NormFloat64()
			}
			x[i] += deviation * held[k] / math.Sqrt(float64(len(held)))
		}
	}
	return x
}

// Where P waves of 3 to 25 % of the peak come 3 to 20 s ahead of S waves, theirs is the
// arrival, and not that of the S waves, however short the noise before them is.
func TestArrivalIsOfTheFirstWaves(t *testing.T) {
	for _, preS := range []float64{0.5, 1.5, 5, 20} {
		all, behind, ahead, single := 0, 0, 0, 0
		for seed, of := range []struct{ magnitude, distanceM float64 }{{5, 15e3}, {6.5, 25e3}, {7.3, 50e3}} {
			for _, stepS := range []float64{0.005, 0.01, 0.02} {
				for _, betweenS := range []float64{3, 8, 20} {
					for _, share := range []float64{0.03, 0.1, 0.25} {
						x := earthquake(of.magnitude, of.distanceM, preS+betweenS, 2, stepS, uint64(seed))
						p := earthquake(of.magnitude-0.5, of.distanceM, preS, 2*share, stepS, uint64(seed+10))
						for i := range min(len(x), len(p)) {
							x[i] += p[i]
						}
						white(x, 0.0002, uint64(seed))
						all++
						if at := float64(signal.Arrival(x, stepS)) * stepS; at > preS+1 {
							behind++
						} else if at < preS-0.3 {
							ahead++
						}
						if float64(signal.Onset(x))*stepS > preS+1 {
							single++
						}
					}
				}
			}
		}
		t.Logf("%g s before P: of %d over 1 s behind it in %d (by one look in %d), 0.3 s ahead in %d", preS, all, behind, single, ahead)
		if behind > 4 || ahead > 4 {
			t.Errorf("%g s before P: of %d over 1 s behind it in %d, 0.3 s ahead in %d", preS, all, behind, ahead)
		}
	}
}

// rounded adds noise that seldom reaches the next step of a digitiser.
func rounded(x []float64, deviation float64, seed uint64) []float64 {
	white(x, deviation, seed)
	step := 5 * deviation
	for i, v := range x {
		x[i] = step * math.Round(v/step)
	}
	return x
}

// Noise before a clean arrival is none, pink or white, rounded or with a single sample that
// stands out, long or short.
func TestNoiseIsNoArrival(t *testing.T) {
	const stepS, count = 0.01, 200
	for _, preS := range []float64{3, 20, 60} {
		var motions [10][]float64
		for i := range motions {
			motions[i] = earthquake(5.5, 20e3, preS, 2, stepS, uint64(i))
		}
		for name, noise := range map[string]func([]float64, float64, uint64) []float64{"white": white, "pink": pink, "rounded": rounded, "spike": func(x []float64, deviation float64, seed uint64) []float64 {
			x[int(0.6*preS/stepS)] += 100 * deviation
			return white(x, deviation, seed)
		}} {
			early := 0
			for seed := range uint64(count) {
				x := noise(slices.Clone(motions[seed%10]), 0.002, seed)
				if at := float64(signal.Arrival(x, stepS)) * stepS; at < preS-0.5 {
					early++
				}
			}
			t.Logf("%s noise of %g s: %d of %d arrive in it", name, preS, early, count)
			if early > count/100 {
				t.Errorf("%s noise of %g s: %d of %d arrive in it", name, preS, early, count)
			}
		}
	}
}

// A motion that begins in its strong part arrives with its first sample, also where zeros
// follow it; noise of which there is as much throughout does not.
func TestLateTriggersArriveAtOnce(t *testing.T) {
	const stepS = 0.01
	for _, magnitude := range []float64{6, 6.5, 7, 7.5} {
		all, late := 0, 0
		for seed := range uint64(10) {
			whole := white(earthquake(magnitude, 40e3, 20, 2, stepS, seed), 0.0002, seed)
			squares := 0.0
			for _, v := range whole {
				squares += v * v
			}
			for _, share := range []float64{0.005, 0.02, 0.05, 0.2} {
				from, left := 0, share*squares
				for ; left > 0; from++ {
					left -= whole[from] * whole[from]
				}
				for _, x := range [][]float64{whole[from:], slices.Concat(whole[from:], make([]float64, 2000))} {
					if all++; signal.Arrival(x, stepS) > 0 {
						late++
					}
				}
			}
		}
		t.Logf("M %g: %d of %d do not arrive at once", magnitude, late, all)
		if late > all/20 {
			t.Errorf("M %g: %d of %d do not arrive at once", magnitude, late, all)
		}
	}
	for seed := range uint64(40) {
		x := white(earthquake(6, 40e3, 20, 2, stepS, seed), 0.3, seed)
		if at := signal.Arrival(x, stepS); at < 500 {
			t.Errorf("in strong noise, seed %d: arrives at %d", seed, at)
		}
		if at := signal.Arrival(slices.Concat(x, make([]float64, 1000)), stepS); at < 500 {
			t.Errorf("in strong noise before zeros, seed %d: arrives at %d", seed, at)
		}
	}
}

func BenchmarkArrival(b *testing.B) {
	x := white(earthquake(6.5, 25e3, 20, 2, 0.01, 1), 0.0002, 1)
	b.SetBytes(int64(8 * len(x)))
	for b.Loop() {
		signal.Arrival(x, 0.01)
	}
}
