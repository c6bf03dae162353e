package ingest

import "math"

// The rules by which a series is flagged. They are common practice, with no
// source of their own; where a length or factor is not, its reason stands beside
// it.
const (
	// clippedRun is the number of equal samples at an extreme that suggests a
	// clipped recording.
	clippedRun = 3
	// spikeShare is the share of the peak by which a sample must stand out of both
	// its neighbours: a smaller spike changes no peak and no spectrum much.
	spikeShare = 0.1
	// spikeFactor is how many times a sample's second difference must exceed the
	// median size of those around it, before and after, each over spikeWindow
	// samples. For Gaussian noise the factor is 13 standard deviations.
	spikeFactor = 20
	spikeWindow = 16
	// dropoutS and dropoutSamples are the shortest run of equal samples inside the
	// strong part that is taken for lost data: a fifth of a second, and so many
	// samples that rounding makes no such run where sampling is coarse.
	dropoutS       = 0.2
	dropoutSamples = 10
	// strongShare is the share of the sum of squares that the strong part leaves
	// out at either end.
	//
	// Source: M. D. Trifunac and A. G. Brady, Bulletin of the Seismological Society
	// of America 65(3), 1975: significant duration from 5 to 95 % (from memory).
	strongShare = 0.05
	// fineSteps is how many steps of its resolution a series must reach for a run
	// of equal samples to mean anything: a slow swing of a coarser one stays within
	// a step for as long as dropoutS.
	fineSteps = 100
)

// flagQuality warns of clipping, spikes and lost data in samples whose least and
// greatest are given. One pass looks at every second step between samples, which
// is enough to find each of the three.
func flagQuality(c *Channel, low, high float64) {
	s := series{x: c.Acceleration, low: low, high: high}
	run, at, spikes, first := s.scan()
	if run > 0 {
		c.find(FlagClipped, float64(run), clippedRun-1, "%d consecutive samples at the extreme, from sample %d on: clipped?", run, at+1)
	}
	switch {
	case spikes == 1:
		c.find(FlagSpikes, 1, 0, "sample %d stands out of those around it: a spike?", first+1)
	case spikes > 1:
		c.find(FlagSpikes, float64(spikes), 0, "%d single samples stand out of those around them, from sample %d on: spikes?", spikes, first+1)
	}
	if run, at := s.dropout(c.StepS); run > 0 {
		c.find(FlagLostData, float64(run)*c.StepS, dropoutS, "%d equal samples, %.3g s, in the strong part, from sample %d on: lost data?", run, float64(run)*c.StepS, at+1)
	}
}

// series is a series of samples and what is known of it.
type series struct {
	x         []float64
	low, high float64 // least and greatest sample
	step      float64 // resolution, 0 until it is asked for
}

func (s *series) peak() float64 { return max(-s.low, s.high) }

// resolution returns the smallest step between neighbouring samples, that is not
// zero: a digitiser's count, or a unit of the last digit printed.
func (s *series) resolution() float64 {
	if s.step == 0 {
		s.step = math.Inf(1)
		for i, x := range s.x[1:] {
			if d := math.Abs(x - s.x[i]); d > 0 && d < s.step {
				s.step = d
			}
		}
	}
	return s.step
}

// scan returns the longest clipped run and its first index, and the number of
// spikes and the index of the first. A run of clippedRun samples holds a pair of
// equal ones of which the first has an even index, and a spike is in such a pair
// as far apart as it stands out.
func (s *series) scan() (run, at, spikes, first int) {
	x, limit := s.x, spikeShare*s.peak()
	clippedTo := 0
	for i := 0; i+1 < len(x); i += 2 {
		d := x[i+1] - x[i]
		switch {
		case d == 0 && (x[i] == s.low || x[i] == s.high) && i >= clippedTo:
			n, from := s.equal(i)
			clippedTo = from + n
			if n > run && n >= clippedRun && s.flattened(from, n) {
				run, at = n, from
			}
		case d > limit || d < -limit:
			for j := i; j <= i+1; j++ {
				if s.isSpike(j, limit) {
					if spikes == 0 {
						first = j
					}
					spikes++
				}
			}
		}
	}
	return run, at, spikes, first
}

// equal returns the length and the first index of the run of equal samples that
// x[i] is in.
func (s *series) equal(i int) (n, from int) {
	from, end := i, i+1
	for from > 0 && s.x[from-1] == s.x[i] {
		from--
	}
	for end < len(s.x) && s.x[end] == s.x[i] {
		end++
	}
	return end - from, from
}

// flattened reports whether a run of n ≥ 2 equal samples from the given index on,
// at an extreme, is flatter than rounding explains. A parabola that stays within
// one step q of the resolution for n samples has left it, n samples farther on
// either side, by no more than
//
//	q·(((3n-1)/(n-1))² + 1),
//
// since that is (3n-1)/(n-1) times as far from its vertex; the last step is that
// of rounding.
func (s *series) flattened(from, n int) bool {
	ratio := float64(3*n-1) / float64(n-1)
	natural := s.resolution() * (float64(ratio*ratio) + 1) * (1 + 1e-9) // differences are rounded
	before, after := s.x[max(0, from-n):from], s.x[from+n:min(len(s.x), from+2*n)]
	return farthest(before, s.x[from]) > natural && farthest(after, s.x[from]) > natural
}

// farthest returns the greatest distance of any x from level, infinity where
// there is no x.
func farthest(x []float64, level float64) float64 {
	if len(x) == 0 {
		return math.Inf(1)
	}
	d := 0.0
	for _, v := range x {
		d = max(d, math.Abs(v-level))
	}
	return d
}

// isSpike reports whether sample i stands alone: on one side of both its
// neighbours, by more than limit and by no less than half as much from one as
// from the other, with a second difference beyond spikeFactor times the median of
// those before it and of those after it, and beyond so many steps of the
// resolution.
func (s *series) isSpike(i int, limit float64) bool {
	if i == 0 || i == len(s.x)-1 {
		return false
	}
	before, after := s.x[i]-s.x[i-1], s.x[i]-s.x[i+1]
	if before < 0 {
		before, after = -before, -after
	}
	if !(min(before, after) > limit) || 2*min(before, after) < max(before, after) {
		return false
	}
	small := (before + after) / spikeFactor
	// The second differences of the neighbours hold the spike itself.
	return s.mostlyBelow(small, i-1-spikeWindow, i-1) && s.mostlyBelow(small, i+2, i+2+spikeWindow) && small > s.resolution()
}

// mostlyBelow reports whether more than half of the second differences at the
// indices from ≤ j < to are smaller than small; where the series ends before
// half of them, nothing speaks against it.
func (s *series) mostlyBelow(small float64, from, to int) bool {
	from, to = max(from, 1), min(to, len(s.x)-1)
	if to-from < spikeWindow/2 {
		return true
	}
	spare := (to - from - 1) / 2 // how many may be larger
	for j := from; j < to; j++ {
		if math.Abs(s.x[j-1]-2*s.x[j]+s.x[j+1]) >= small {
			if spare--; spare < 0 {
				return false
			}
		}
	}
	return true
}

// dropout returns the longest run of equal samples inside the strong part that
// is long enough for lost data, and its first index; 0 where there is none.
func (s *series) dropout(stepS float64) (run, at int) {
	need := max(dropoutSamples, int(math.Ceil(dropoutS/stepS)))
	from, to := -1, -1 // the strong part, once it is asked for
	// A run of need samples has need-1 pairs of neighbours, one at each stride.
	for i := 0; i+1 < len(s.x); i += need - 1 {
		if s.x[i] != s.x[i+1] {
			continue
		}
		n, first := s.equal(i)
		i = first + n - (need - 1)
		if n < max(need, run+1) || first == 0 || first+n == len(s.x) {
			continue // too short, or padding
		}
		if from < 0 {
			if from, to = s.strong(); s.peak() < fineSteps*s.resolution() {
				return 0, 0
			}
		}
		if first > from && first+n-1 < to {
			run, at = n, first
		}
	}
	return run, at
}

// strong returns the first and the last index of the strong part, the samples
// taken about their mean.
func (s *series) strong() (from, to int) {
	sum, squares := 0.0, 0.0
	for _, x := range s.x {
		sum += x
		squares += float64(x * x)
	}
	n := float64(len(s.x))
	mean := sum / n
	outside := strongShare * (squares - float64(n*mean*mean))
	from, to = 0, len(s.x)-1
	for rest := outside; from < to; from++ {
		if rest -= float64((s.x[from] - mean) * (s.x[from] - mean)); rest < 0 {
			break
		}
	}
	for rest := outside; from < to; to-- {
		if rest -= float64((s.x[to] - mean) * (s.x[to] - mean)); rest < 0 {
			break
		}
	}
	return from, to
}
