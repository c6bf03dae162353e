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

// peak is the lag at which the size of a correlation is greatest.
type peak struct {
	lag   int
	r2    float64
	found bool
}

func (p *peak) take(lag int, r2 float64) {
	if !p.found || r2 > p.r2 {
		*p = peak{lag, r2, true}
	}
}

// best returns the lag at which the size of the correlation is greatest among those at
// which x and y share most of the energy of both, and among those at which they share most
// of the energy of one, and of the other what counts as a fragment.
func (s *search) best() (whole, fragment peak) {
	least := s.least()
	if len(s.x) < least || len(s.y) < s.ratio*(least-1)+1 {
		return whole, fragment
	}
	products := s.products(least)
	for k := -s.ratio * (len(s.x) - least); k <= len(s.y)-1-s.ratio*(least-1); k++ {
		i := k
		if i < 0 {
			i += len(products)
		}
		first, last := s.window(k)
		if last-first+1 < least { // where y has one sample fewer in step with x
			continue
		}
		switch r2, common := s.squared(k, first, last, products[i]); common {
		case ofBoth:
			whole.take(k, r2)
		case ofOne:
			fragment.take(k, r2)
		}
	}
	return whole, fragment
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

// common is of what x and y share most of the energy.
type common int

const (
	ofNone common = iota
	ofOne
	ofBoth
)

// squared returns ρ² at a lag from its window and the sum of products there, where x and y
// share most of the energy of both, or of one and a fragment of the other.
func (s *search) squared(lag, first, last int, product float64) (r2 float64, of common) {
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
	allX, allY := s.sqrX[len(s.x)-1], s.sqrY[end]
	switch {
	case !(xx > 0 && yy > 0):
		return 0, ofNone
	case xx >= shared*allX && yy >= shared*allY:
		of = ofBoth
	case xx >= shared*allX && yy >= fragment*allY || yy >= shared*allY && xx >= fragment*allX:
		of = ofOne
	default:
		return 0, ofNone
	}
	xy := product - float64(x*y)/n
	return xy * xy / float64(xx*yy), of
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
