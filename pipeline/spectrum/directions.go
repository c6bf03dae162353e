package spectrum

import (
	"math"
	"math/bits"
	"slices"

	"swaybook/pipeline/internal/kernel"
)

// candidate is a direction whose D must be known.
type candidate struct {
	direction int
	d         float64
}

// directions is the work space of the search for the D of candidates, a lane each.
type directions struct {
	candidates         []candidate
	sorted             []float64 // their D
	high, chosen, best kernel.Above
	points             []kernel.Point
	pieceOf            []int // the piece that ends at each point, −1 for none
	lines              []kernel.Line
	flags              []uint32
	rows               []kernel.Row
	rays               *kernel.Rays
	screen             *kernel.StepScreen
}

// chunk is how many points are projected at once.
const chunk = 64

func newDirections() directions {
	return directions{
		rows: make([]kernel.Row, chunk+1), flags: make([]uint32, chunk),
		rays: new(kernel.Rays), screen: new(kernel.StepScreen),
	}
}

// finish returns RotD50 and RotD100 of a lane, in units of the motion.
func (r *rotation) finish(lane *rotatedLane, end pairEnd) (rotd50, rotd100 float64) {
	s := &r.directions
	if lane.wide < len(lane.pieces) {
		r.points = lane.points(r.points[:0])
		lane.widen(r.points)
	}
	above := s.choose(lane, end)
	s.trail(lane)
	for from := 0; from < len(s.candidates); from += lanes {
		r.search(lane, s.candidates[from:min(from+lanes, len(s.candidates))])
	}
	s.sorted = s.sorted[:0]
	for _, c := range s.candidates {
		u, v := end.toward(c.direction)
		s.sorted = append(s.sorted, lane.ringing.peak(c.d, u, v))
	}
	slices.Sort(s.sorted)
	n := len(s.sorted) + above // the middle two follow half − 1 that are greater
	return float64(0.5 * (s.sorted[n-half] + s.sorted[n-half-1])), s.sorted[len(s.sorted)-1]
}

// choose sets the candidates: the directions whose D, between L and the bound
// that follows from it, can be one of the middle two or the greatest. It returns
// the number of the others that are above the middle.
func (s *directions) choose(lane *rotatedLane, end pairEnd) (above int) {
	rings := end.length() > lane.floor
	if rings && lane.one.damping == 0 {
		lane.ring(end)
		rings = false
	}
	ground := 0.0
	for i := range lane.pieces {
		ground = max(ground, lane.pieces[i].ground)
	}
	top := lane.raise(12)
	most := lane.most(top)
	if rings {
		most = max(most, end.length())
	}
	limit := lane.piece.bound(most, ground)
	high, chosen, best := &s.high, &s.chosen, &s.best
	lane.polygon.reach.Above(limit, high)
	lane.polygon.reach.Above(lane.under(lane.floor, ground), chosen)
	lane.polygon.reach.Above(lane.under(top, ground), best)
	for w := range chosen {
		chosen[w] = chosen[w]&^high[w] | best[w]
	}
	if rings {
		s.addRinging(lane, end, top, limit)
	}
	return s.list(lane)
}

// addRinging adds the directions in which the motion after the last sample can be
// what matters.
func (s *directions) addRinging(lane *rotatedLane, end pairEnd, top, limit float64) {
	for i := range Directions {
		if upper := end.reach(i); upper >= top || upper > lane.floor && lane.polygon.reach[i] <= limit {
			s.chosen[i/64] |= 1 << (i % 64)
		}
	}
}

// list makes candidates of those chosen and counts the others that are high.
func (s *directions) list(lane *rotatedLane) (above int) {
	s.candidates = s.candidates[:0]
	for w, set := range s.chosen {
		above += bits.OnesCount64(s.high[w] &^ set)
		for ; set != 0; set &= set - 1 {
			i := 64*w + bits.TrailingZeros64(set)
			s.candidates = append(s.candidates, candidate{i, lane.reach[i]})
		}
	}
	return above
}

// under returns a number that a bound on pieces exceeds if and only if what it
// bounds exceeds the number returned, short of rounding.
func (lane *rotatedLane) under(bound, ground float64) float64 {
	const rounding = 1 - 0x1p-48
	return max(0, float64(rounding*bound/lane.piece.growth)-float64(lane.piece.reach*ground))
}

// ring raises L to the greatest |u| after the last sample, without damping.
func (lane *rotatedLane) ring(end pairEnd) {
	for i := range lane.polygon.reach {
		lane.polygon.reach[i] = max(lane.polygon.reach[i], end.reach(min(i, Directions-1))*(1-0x1p-50))
	}
}

// most returns a number that fewer than half of L exceed.
func (p *polygon) most(top float64) float64 {
	least := p.floor
	for range 8 {
		middle := float64(0.5 * (least + top))
		if p.above(middle) < half {
			top = middle
		} else {
			least = middle
		}
	}
	return top
}

// length bounds |u| in all directions after the last sample, reach in one.
func (e *pairEnd) length() float64 { return reach(reach(e.x, e.y), reach(e.vx, e.vy)) }

func (e *pairEnd) reach(i int) float64 { return reach(e.toward(i)) }

// toward returns displacement and velocity in a direction.
func (e *pairEnd) toward(i int) (u, v float64) {
	cos, sin := compass.Cos[i], compass.Sin[i]
	return toward(e.x, e.y, cos, sin), toward(e.vx, e.vy, cos, sin)
}

// trail makes points of the pieces of a lane, one after the other.
func (s *directions) trail(lane *rotatedLane) {
	s.points, s.pieceOf, s.lines = s.points[:0], s.pieceOf[:0], s.lines[:0]
	add := func(x, y float64, piece int, ground float64) {
		s.points = append(s.points, kernel.Point{X: x, Y: y})
		s.pieceOf = append(s.pieceOf, piece)
		s.lines = append(s.lines, kernel.Line{First: ground})
	}
	for i := range lane.pieces {
		p := &lane.pieces[i]
		if i == 0 || !p.follows(&lane.pieces[i-1]) {
			add(p.x, p.y, -1, 0)
		}
		add(p.xEnd, p.yEnd, i, p.ground)
	}
}

// search raises the D of up to as many candidates as there are lanes to the
// greatest |u| of the pieces.
func (r *rotation) search(lane *rotatedLane, candidates []candidate) {
	s := &r.directions
	want := ^uint32(0) >> (lanes - len(candidates))
	s.aim(lane, candidates)
	for from := 0; from+1 < len(s.points); from += chunk {
		n := min(chunk, len(s.points)-1-from)
		kernel.Project(s.rows[:n+1], s.rays, s.points[from:from+n+1], want)
		for l := range candidates {
			s.screen.Best[l] = candidates[l].d
		}
		kernel.ScreenSteps(s.screen, s.rows[:n+1], s.lines[from+1:from+n+1], s.flags[:n], want)
		for k, flags := range s.flags[:n] {
			i := s.pieceOf[from+k+1]
			if i < 0 {
				continue
			}
			for ; flags != 0; flags &= flags - 1 {
				l := bits.TrailingZeros32(flags)
				c := &candidates[l]
				c.d = r.follow(c.d, lane, &lane.pieces[i], s.rows[k][l], s.rows[k+1][l], s.rays.Cos[l], s.rays.Sin[l])
			}
		}
	}
}

// aim sets rays and screen for the candidates.
func (s *directions) aim(lane *rotatedLane, candidates []candidate) {
	n := float64(lane.every)
	phase := float64(n * lane.one.phase)
	force, curve, slope := curvature(float64(2*lane.one.damping*phase), float64(phase*phase))
	for l, c := range candidates {
		s.rays.Cos[l], s.rays.Sin[l] = compass.Cos[c.direction], compass.Sin[c.direction]
		s.screen.Force[l] = float64(force * float64(n*n))
		s.screen.Curve[l], s.screen.Slope[l] = curve, slope
	}
}

// follow returns the greater of best and the greatest |u| of a piece in a
// direction, with the displacements at its ends.
func (r *rotation) follow(best float64, lane *rotatedLane, s *piece, u, end, cos, sin float64) float64 {
	if lane.piece.bound(max(math.Abs(u), math.Abs(end)), s.ground) <= best {
		return best
	}
	o := lane.one
	x, y := r.pair[0].a[s.sample:], r.pair[1].a[s.sample:]
	a, b := toward(x[0], y[0], cos, sin), toward(x[1], y[1], cos, sin)
	if lane.cuts > 1 {
		p := newParts(groundedStep{u: u, a: a, next: b}, lane.cuts)
		a = p.a + float64(p.rise*float64(s.part))
		return o.step(best, u, end, a, a+p.rise)
	}
	if s.every == 1 {
		return o.step(best, u, end, a, b)
	}
	v := o.velocity(u, toward(s.xNext, s.yNext, cos, sin)-u, a, b)
	for k := 1; ; k++ {
		next, vNext := u+o.change(u, v, a, b), o.arrival(u, v, a, b)
		if o.bound(max(math.Abs(u), math.Abs(next)), math.Abs(a), math.Abs(b)) > best {
			best = o.within(best, u, v, next, vNext, a, b)
		}
		if k == s.every {
			return best
		}
		u, v, a, b = next, vNext, b, toward(x[k+1], y[k+1], cos, sin)
	}
}
