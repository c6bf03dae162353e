package condition

import (
	"slices"
	"testing"

	"swaybook/pipeline/signal"
)

// briefly is a motion of which quietS and the strong part were recorded, with a tail or
// without, with pink noise of a share of its peak, a slope and an offset; clean is what would
// be without all that.
func briefly(seed uint64, magnitude, quietS, share float64, hasTail bool) (clean, x []float64) {
	const stepS = 0.01
	clean = earthquake(magnitude, 30e3, quietS, stepS, seed)
	to := len(clean)
	if !hasTail {
		to = signal.EndOf(clean, stepS, 0.95)
	}
	for i, v := range pink(seed, to) {
		x = append(x, clean[i]+2*share*v+0.02+0.01*float64(i)/float64(to))
	}
	return clean, x
}

// Of motions with less than 2 s before them what there is, and what follows, tells the noise
// well enough for a band in which the spectrum is that of the motion but for tens of per
// cent, of which clean motions keep most; the corner that the rule names, alone, is no
// such thing.
func TestShortNoiseCounts(t *testing.T) {
	const stepS, limit = 0.01, 0.3
	unheeded := step(Standard().Steps[1])
	unheeded.Steps = append(unheeded.Steps, Standard().Steps[2], Step{Do: KindHighPass, Order: 4, CornerHz: 0.1}, Standard().Steps[4])
	unheeded.LongShare = Standard().LongShare
	unheededMost := 0.0
	for _, test := range []struct {
		share  float64
		leastS float64 // median end of the band with a tail
	}{{1e-4, 4}, {1e-3, 2}, {1e-2, 0.5}} {
		for _, quietS := range []float64{0, 0.5, 1.5} {
			for _, hasTail := range []bool{true, false} {
				o, ends := off{}, []float64(nil)
				for _, magnitude := range []float64{4, 5, 6, 7} {
					for seed := range uint64(4) {
						clean, x := briefly(seed, magnitude, quietS, test.share, hasTail)
						motion := Conditioned{Acceleration: clean, StepS: stepS}
						got := conditioned(t, Standard(), x, stepS)
						fromS, toS := got.UsableBand()
						ends = append(ends, toS)
						o.compare(t, fromS, toS, motion, got)
						if hasTail {
							bare, u := conditioned(t, unheeded, x, stepS), off{}
							fromS, toS = bare.UsableBand()
							u.compare(t, fromS, toS, motion, bare)
							_, most := u.upTo(1)
							unheededMost = max(unheededMost, most)
						}
						if !(got.LowCutHz >= 0.1) {
							t.Errorf("a corner at %g Hz", got.LowCutHz)
						}
					}
				}
				slices.Sort(ends)
				middleS := ends[len(ends)/2]
				t.Logf("noise %g, %g s before, tail %t: usable to %.2g s (%.2g to %.2g), off by %v", test.share, quietS, hasTail, middleS, ends[0], ends[len(ends)-1], o)
				if _, most := o.upTo(1); most > limit || hasTail && middleS < test.leastS {
					t.Errorf("noise %g, %g s before, tail %t: usable to %.2g s, off by %v", test.share, quietS, hasTail, middleS, o)
				}
			}
		}
	}
	t.Logf("at 0.1 Hz off by %.3g at most", unheededMost)
	if unheededMost < 3*limit {
		t.Errorf("at 0.1 Hz off by %.2g only", unheededMost)
	}
}
