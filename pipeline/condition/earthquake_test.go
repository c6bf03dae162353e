package condition

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"swaybook/pipeline/signal"
	"swaybook/pipeline/stochastic"
)

// earthquake is an invented motion (package stochastic) with a peak of 2 m/s² that begins
// onsetS after the first sample, with nothing before and with energy at periods up to 50 s.
func earthquake(magnitude, distanceM, onsetS, stepS float64, seed uint64) []float64 {
	const lowCutHz = 0.02
	rungS := 2.25 / lowCutHz // its filter has no phase shift and rings ahead
	p := stochastic.Example(magnitude, distanceM)
	p.LowCutHz, p.HighCutHz, p.OnsetS = lowCutHz, 40, rungS+onsetS
	if err := p.Validate(); err != nil {
		panic(err)
	}
	x := stochastic.Simulate(make([]float64, int((p.SpanS()+rungS)/stepS)), stepS, p, rand.New(rand.NewPCG(seed, 77)))
	x = x[int(math.Round(rungS/stepS)):]
	scale := 2 / signal.Greatest(x)
	for i := range x {
		x[i] *= scale
	}
	return x
}

// off is by how much spectra are off others, by a period over the end of the band.
type off map[float64][]float64

// shares of the band's end at which spectra are compared.
var shares = []float64{0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.999}

func (o off) compare(t *testing.T, fromS, toS float64, a, b Conditioned) {
	t.Helper()
	for _, share := range shares {
		if p := []float64{share * toS}; p[0] > fromS {
			o[share] = append(o[share], math.Abs(sd(t, p, b.StepS, b.Acceleration)[0]/sd(t, p, a.StepS, a.Acceleration)[0]-1))
		}
	}
}

// upTo is the median and the greatest over periods up to a share of the band's end, and
// medianAt the median at one.
func (o off) upTo(share float64) (median, most float64) {
	var all []float64
	for s, v := range o {
		if s <= share {
			all = append(all, v...)
		}
	}
	slices.Sort(all)
	return all[len(all)/2], all[len(all)-1]
}

func (o off) medianAt(share float64) float64 {
	all := slices.Sorted(slices.Values(o[share]))
	return all[len(all)/2]
}

func (o off) String() string {
	half, mostOfHalf := o.upTo(0.5)
	all, most := o.upTo(1)
	return fmt.Sprintf("%.2g in the median and %.2g at most, up to half the band's end %.2g and %.2g, at its end %.2g in the median", all, most, half, mostOfHalf, o.medianAt(0.999))
}

func conditioned(t *testing.T, r Recipe, x []float64, stepS float64) Conditioned {
	t.Helper()
	got, err := r.Apply(raw(x, stepS))
	if err != nil {
		t.Fatal(err)
	}
	return got
}

// Of earthquakes of M 6.5 to 7.5, which have long periods beyond any band, drift and noise
// are taken off as of other motions: the spectrum is that behind the bare filter. What that
// itself takes grows towards the band's end.
func TestEarthquakesComeBack(t *testing.T) {
	const stepS = 0.01
	for _, test := range []struct{ quietS, leastS, bareLimit, median, most float64 }{
		{4, 2, 0.005, 0.03, 0.22}, {5, 2, 0.005, 0.03, 0.22}, {20, 5, 0.005, 0.01, 0.12},
	} {
		ofMotion, ofBare := off{}, off{}
		shortest := math.Inf(1)
		for _, magnitude := range []float64{6.5, 7, 7.5} {
			for seed := range uint64(8) {
				clean := earthquake(magnitude, 30e3, test.quietS, stepS, seed)
				got := conditioned(t, Standard(), recorded(seed, clean), stepS)
				bare := conditioned(t, step(Step{Do: KindHighPass, Order: 4, CornerHz: got.LowCutHz}), clean, stepS)
				fromS, toS := got.UsableBand()
				shortest = min(shortest, toS)
				ofMotion.compare(t, fromS, toS, Conditioned{Acceleration: clean, StepS: stepS}, got)
				ofBare.compare(t, fromS, toS, bare, got)
			}
		}
		t.Logf("%g s before, usable to %.2g s at least: off by %v", test.quietS, shortest, ofMotion)
		t.Logf("off the bare filter's by %v", ofBare)
		median, most := ofMotion.upTo(1)
		_, mostOfBare := ofBare.upTo(1)
		if median > test.median || most > test.most || mostOfBare > test.bareLimit || shortest < test.leastS {
			t.Errorf("%g s before: off by %.2g in the median and %.2g at most, of the bare filter's %.2g, usable to %.2g s", test.quietS, median, most, mostOfBare, shortest)
		}
	}
}

// A network's corrected version of such an earthquake, filtered forward and backward with
// order 2 from 0.1 Hz, is off the raw one behind the standard recipe as it is off the motion
// itself: at 0.8/f, 8 s, its filter has left 71 % of the amplitude. Behind the same filter
// both agree within 5 % over the common band.
func TestEarthquakesRawAndCorrected(t *testing.T) {
	const stepS, limit = 0.01, 0.05
	network := step(Step{Do: KindBandPass, Order: 2, LowHz: 0.1, HighHz: 25})
	agree, ofMotion, behindBoth := off{}, off{}, off{}
	for _, magnitude := range []float64{6.5, 7, 7.5} {
		for seed := range uint64(8) {
			clean := earthquake(magnitude, 20e3, 20, stepS, seed)
			corrected := conditioned(t, network, clean, stepS)
			ours := conditioned(t, Standard(), recorded(seed, clean), stepS)
			both := conditioned(t, network, ours.Acceleration, stepS)
			fromS, toS := corrected.UsableBand()
			from, to := ours.UsableBand()
			fromS, toS = max(from, fromS), min(to, toS)
			agree.compare(t, fromS, toS, ours, corrected)
			ofMotion.compare(t, fromS, toS, Conditioned{Acceleration: clean, StepS: stepS}, corrected)
			behindBoth.compare(t, fromS, toS, corrected, both)
		}
	}
	t.Logf("off each other by %v", agree)
	t.Logf("the network's off the motion by %v", ofMotion)
	t.Logf("behind the same filter off each other by %v", behindBoth)
	if _, most := behindBoth.upTo(1); most > limit {
		t.Errorf("behind the same filter off each other by %v", behindBoth)
	}
	if median, _ := agree.upTo(0.5); median > limit/2 {
		t.Errorf("off each other by %v", agree)
	}
}
