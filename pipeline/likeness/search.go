package likeness

import (
	"math"
	"math/bits"
	"slices"

	"gonum.org/v1/gonum/dsp/fourier"
)

// search is the correlation of a coarse series x with a fine one y at every lag: x[j]
// meets y[lag + ratio·j].
type search struct {
	x, y       []float64
	ratio      int
	plans      map[int]*fourier.FFT
	padded     []float64
	fx, fy     []complex128
	sumX, sqrX []float64 // sums and sums of squares of x up to and with each sample
	sumY, sqrY []float64 // the same of y with every ratio-th before
}

// load takes the motions in, coarse and fine, without their means and in units of
// their greatest samples, the fine one at stepS.
func (s *search) load(coarse, fine *Motion, ratio int, stepS float64) {
	s.ratio = ratio
	s.x = coarse.centred(s.x[:0])
	s.y = fine.centred(s.y[:0])
	if stepS != fine.stepS {
		s.padded = append(s.padded[:0], s.y...)
		s.y = resampled(s.y[:0], s.padded, stepS/fine.stepS)
	}
	s.sumX, s.sqrX = sums(s.sumX[:0], s.sqrX[:0], s.x, 1)
	s.sumY, s.sqrY = sums(s.sumY[:0], s.sqrY[:0], s.y, ratio)
}

// sums appends the sums of x and of its squares over every stride-th sample.
func sums(sum, sqr, x []float64, stride int) (sums, squares []float64) {
	sum, sqr = slices.Grow(sum, len(x)), slices.Grow(sqr, len(x))
	for i, v := range x {
		before, before2 := 0.0, 0.0
		if i >= stride {
			before, before2 = sum[i-stride], sqr[i-stride]
		}
		sum, sqr = append(sum, before+v), append(sqr, before2+float64(v*v))
	}
	return sum, sqr
}

// least is the number of samples that x and y must share.
func (s *search) least() int {
	shorter := min(len(s.x), (len(s.y)-1)/s.ratio+1)
	return max(2, int(math.Ceil(shared*float64(shorter))))
}

// best returns the lag at which the size of the correlation is greatest, among those
// at which x and y share enough.
func (s *search) best() (lag int, found bool) {
	least := s.least()
	if len(s.x) < least || len(s.y) < s.ratio*(least-1)+1 {
		return 0, false
	}
	products := s.products(least)
	greatest := -1.0
	for k := -s.ratio * (len(s.x) - least); k <= len(s.y)-1-s.ratio*(least-1); k++ {
		i := k
		if i < 0 {
			i += len(products)
		}
		if r2 := s.squared(k, products[i]); r2 > greatest {
			lag, greatest = k, r2
		}
	}
	return lag, greatest >= 0
}

// products returns Σ x[j]·y[lag + ratio·j] for all lags at which at least that many
// samples are shared, negative ones counted from the end. The transform is long enough
// that these lags, and only these, are free of what comes round.
func (s *search) products(least int) []float64 {
	size := max(2, 1<<bits.Len(uint(len(s.y)+s.ratio*(len(s.x)-least)-1)))
	if s.plans == nil {
		s.plans = map[int]*fourier.FFT{}
	}
	if s.plans[size] == nil {
		s.plans[size] = fourier.NewFFT(size)
	}
	plan := s.plans[size]
	s.padded = slices.Grow(s.padded[:0], size)[:size]
	s.fx = slices.Grow(s.fx[:0], size/2+1)[:size/2+1]
	s.fy = slices.Grow(s.fy[:0], size/2+1)[:size/2+1]
	clear(s.padded)
	for j, v := range s.x {
		s.padded[s.ratio*j] = v
	}
	plan.Coefficients(s.fx, s.padded)
	clear(s.padded)
	copy(s.padded, s.y)
	plan.Coefficients(s.fy, s.padded)
	unit := 1 / float64(size)
	for i, x := range s.fx {
		y := s.fy[i]
		s.fy[i] = complex(
			unit*(float64(real(y)*real(x))+float64(imag(y)*imag(x))),
			unit*(float64(imag(y)*real(x))-float64(real(y)*imag(x))))
	}
	return plan.Sequence(s.padded, s.fy)
}

// window returns which samples of x meet y at a lag, from first up to and with last.
func (s *search) window(lag int) (first, last int) {
	first, last = 0, len(s.x)-1
	if lag < 0 {
		first = (-lag + s.ratio - 1) / s.ratio
	}
	return first, min(last, (len(s.y)-1-lag)/s.ratio)
}

// squared returns ρ² at a lag from the sum of products there, and −1 where x and y
// share too little of their energy.
func (s *search) squared(lag int, product float64) float64 {
	first, last := s.window(lag)
	n := float64(last - first + 1)
	x, xx := s.sumX[last], s.sqrX[last]
	if first > 0 {
		x, xx = x-s.sumX[first-1], xx-s.sqrX[first-1]
	}
	from, to := lag+s.ratio*first, lag+s.ratio*last
	y, yy := s.sumY[to], s.sqrY[to]
	if from >= s.ratio {
		y, yy = y-s.sumY[from-s.ratio], yy-s.sqrY[from-s.ratio]
	}
	end := len(s.y) - 1 - (len(s.y)-1-to)%s.ratio // of the samples of y in step with x
	xx, yy = xx-float64(x*x)/n, yy-float64(y*y)/n
	if !(xx > 0 && yy > 0 && xx >= shared*s.sqrX[len(s.x)-1] && yy >= shared*s.sqrY[end]) {
		return -1
	}
	xy := product - float64(x*y)/n
	return xy * xy / float64(xx*yy)
}

// pair is what x and y have in common at a lag.
type pair struct {
	n                      int
	mean1, mean2           float64
	deviation1, deviation2 float64
	correlation            float64
	crossings              int // of x through its mean
}

// at measures x and y at a lag sample by sample.
func (s *search) at(lag int) pair {
	first, last := s.window(lag)
	p := pair{n: last - first + 1}
	for j := first; j <= last; j++ {
		p.mean1 += s.x[j]
		p.mean2 += s.y[lag+s.ratio*j]
	}
	n := float64(p.n)
	p.mean1, p.mean2 = p.mean1/n, p.mean2/n
	var xx, yy, xy float64
	before := 0.0
	for j := first; j <= last; j++ {
		x, y := s.x[j]-p.mean1, s.y[lag+s.ratio*j]-p.mean2
		xx += float64(x * x)
		yy += float64(y * y)
		xy += float64(x * y)
		if x*before < 0 {
			p.crossings++
		}
		if x != 0 {
			before = x
		}
	}
	p.deviation1, p.deviation2 = math.Sqrt(xx/n), math.Sqrt(yy/n)
	p.correlation = xy / (math.Sqrt(xx) * math.Sqrt(yy))
	return p
}
