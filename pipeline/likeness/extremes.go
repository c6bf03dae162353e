package likeness

import (
	"math"
	"slices"
)

// Before two motions are correlated at all lags, they are at the few lags that bring
// a great swing of one to a great swing of the other. Where the motions are the same,
// what differs is half of the motion in the band at most, and less of its greatest
// swings, which therefore are among the greatest of both.
const (
	kept   = 6    // swings
	everyS = 0.04 // samples are compared,
	points = 50   // before and as many after a swing
	alike  = 0.7  // |ρ|; lower than later, since a swing may peak at a neighbouring sample
)

// swings returns the places of the greatest |x − mean| between crossings of the mean,
// the greatest first.
func (m *Motion) swings() []int {
	type swing struct {
		at   int
		size float64
	}
	var found [kept]swing
	keep := func(s swing) {
		for i := range found {
			if s.size > found[i].size {
				s, found[i] = found[i], s
			}
		}
	}
	var now swing
	negative := false
	for i, x := range m.samples {
		y := m.at(x)
		if y < 0 != negative {
			keep(now)
			now, negative = swing{}, y < 0
		}
		if size := math.Abs(y); size > now.size {
			now = swing{i, size}
		}
	}
	keep(now)
	var at []int
	for _, s := range found {
		if s.size > 0 {
			at = append(at, s.at)
		}
	}
	return slices.Clip(at)
}

// haveSwingsInCommon reports whether two motions look alike around a great swing of
// each.
func haveSwingsInCommon(a, b *Motion) bool {
	every := max(everyS, a.stepS, b.stepS)
	inA, inB := offsets(every/a.stepS), offsets(every/b.stepS)
	for _, i := range a.extremes {
		for _, j := range b.extremes {
			if lookAlike(a, b, i, j, &inA, &inB) {
				return true
			}
		}
	}
	return false
}

// around holds samples to compare, counted from a swing.
type around [2*points + 1]int

// offsets returns the samples nearest to every so many steps, which need not be whole.
func offsets(steps float64) (o around) {
	for k := range o {
		o[k] = int(math.Round(float64(k-points) * steps))
	}
	return o
}

// lookAlike correlates a around its sample i with b around its sample j.
func lookAlike(a, b *Motion, i, j int, inA, inB *around) bool {
	var n, x, y, xx, yy, xy float64
	for k := range inA {
		ia, ib := i+inA[k], j+inB[k]
		if ia < 0 || ib < 0 || ia >= len(a.samples) || ib >= len(b.samples) {
			continue
		}
		p, q := a.at(a.samples[ia]), b.at(b.samples[ib])
		n++
		x += p
		y += q
		xx += float64(p * p)
		yy += float64(q * q)
		xy += float64(p * q)
	}
	xx, yy, xy = xx-float64(x*x)/n, yy-float64(y*y)/n, xy-float64(x*y)/n
	return float64(xy*xy) >= float64(alike*alike*xx*yy)
}
