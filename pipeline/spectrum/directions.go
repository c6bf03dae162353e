package spectrum

import (
	"math"
	"math/bits"
	"slices"

	"swaybook/pipeline/internal/kernel"
)

// candidate is a direction whose D must be known, or known not to be the greatest:
// best tells that it can be nothing else.
type candidate struct {
	direction int
	d         float64
	best      bool
}

// directions is the work space of the search for the D of candidates, a lane each.
type directions struct {
	candidates         []candidate
	sorted             []float64 // their D
	greatest           float64   // of them
	high, chosen, best kernel.Above
	points             []kernel.Point
	pieceOf            []int      // the piece that ends at each point, −1 for none
	top, topRow        kernel.Row // the greatest |u| of each candidate and its row
	lines              []kernel.Line
	flags, seen        []uint32
	rows               []kernel.Row
	rays               *kernel.Rays
	screen             *kernel.StepScreen
}

// chunk is how many steps between points are projected at once.
const chunk = 256

func newDirections() directions {
	return directions{
		rows: make([]kernel.Row, chunk+1), flags: make([]uint32, chunk+1),
		rays: new(kernel.Rays), screen: new(kernel.StepScreen),
	}
}

// finish returns RotD50 and RotD100 of a lane, in units of the motion.
func (r *rotation) finish(lane *rotatedLane) (rotd50, rotd100 float64) {
	s := &r.directions
	above := s.choose(lane)
	s.trail(lane)
	s.greatest = kernel.Greatest(&lane.reach)
	for from := 0; from < len(s.candidates); from += lanes {
		r.search(lane, s.candidates[from:min(from+lanes, len(s.candidates))], above)
	}
	for i := range s.candidates {
		c := &s.candidates[i]
		u, v := lane.end.toward(c.direction)
		c.d = lane.ringing.peak(c.d, u, v)
	}
	s.sort()
	lower, upper := s.middle(above)
	return float64(0.5 * (lower + upper)), s.sorted[len(s.sorted)-1]
}

// sort sets sorted to the D of the candidates, as far as they are known.
func (s *directions) sort() {
	s.sorted = s.sorted[:0]
	for _, c := range s.candidates {
		s.sorted = append(s.sorted, c.d)
	}
	slices.Sort(s.sorted)
}

// middle returns the middle two of all D, the D of so many others being above
// them: they follow half − 1 that are greater.
func (s *directions) middle(above int) (lower, upper float64) {
	n := len(s.sorted) + above
	return s.sorted[n-half-1], s.sorted[n-half]
}

// choose sets the candidates: the directions whose D, between L and the bound
// that follows from it, can be one of the middle two or the greatest. It returns
// the number of the others that are above the middle.
func (s *directions) choose(lane *rotatedLane) (above int) {
	end := &lane.end
	rings := lane.one.damping > 0 && end.length() > lane.floor
	ground := lane.bend()
	top := lane.raise(8)
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
		chosen[w] &^= high[w]
	}
	if rings {
		s.addRinging(lane, top, limit)
	}
	return s.list(lane)
}

// addRinging adds the directions in which the motion after the last sample can be
// what matters.
func (s *directions) addRinging(lane *rotatedLane, top, limit float64) {
	for i := range Directions {
		if upper := lane.end.reach(i); upper >= top || upper > lane.floor && lane.polygon.reach[i] <= limit {
			s.chosen[i/64] |= 1 << (i % 64)
		}
	}
}

// list makes candidates of those chosen and of the best, and counts the others
// that are high.
func (s *directions) list(lane *rotatedLane) (above int) {
	s.candidates = s.candidates[:0]
	for w := range s.chosen {
		set := s.chosen[w] | s.best[w]
		above += bits.OnesCount64(s.high[w] &^ set)
		for ; set != 0; set &= set - 1 {
			bit := bits.TrailingZeros64(set)
			s.candidates = append(s.candidates, candidate{
				direction: 64*w + bit, d: lane.reach[64*w+bit], best: s.chosen[w]>>bit&1 == 0,
			})
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
func (lane *rotatedLane) ring() {
	for i := range lane.polygon.reach {
		lane.polygon.reach[i] = max(lane.polygon.reach[i], lane.end.reach(min(i, Directions-1))*(1-0x1p-50))
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
		add(p.xEnd, p.yEnd, i, p.bend)
	}
}

// search raises the D of up to as many candidates as there are lanes to the
// greatest |u| of the pieces, as far as that matters: up to the lower of the middle
// values of what is known of all, and for those that can only be the best up to the
// greatest.
func (r *rotation) search(lane *rotatedLane, candidates []candidate, above int) {
	s := &r.directions
	s.aim(lane, candidates)
	s.seen = resize(s.seen, len(s.points))
	clear(s.seen)
	for from := 0; from+1 < len(s.points); from += chunk {
		s.project(from, len(candidates))
		r.searchTops(lane, candidates, from)
	}
	s.sort()
	lower, _ := s.middle(above)
	for l := range candidates {
		s.screen.Best[l] = max(candidates[l].d, lower)
		if candidates[l].best {
			s.screen.Best[l] = s.greatest
		}
	}
	for from := 0; from+1 < len(s.points); from += chunk {
		if len(s.points) > chunk+1 { // else they still are
			s.project(from, len(candidates))
		}
		n := len(s.rows) - 1
		kernel.ScreenSteps(s.screen, s.rows, s.lines[from+1:from+1+n], s.flags[:n], ^uint32(0)>>(lanes-len(candidates)))
		for k, flags := range s.flags[:n] {
			for flags &^= s.seen[from+1+k]; flags != 0; flags &= flags - 1 {
				r.look(lane, candidates, from, k+1, bits.TrailingZeros32(flags))
			}
		}
	}
}

// project sets rows to the points from one on, up to a chunk of steps between them,
// in the directions of so many candidates.
func (s *directions) project(from, candidates int) {
	n := min(chunk+1, len(s.points)-from)
	s.rows = s.rows[:n]
	kernel.Project(s.rows, s.rays, s.points[from:from+n], ^uint32(0)>>(lanes-candidates))
}

// searchTops looks into the piece beside the greatest point of each candidate,
// where that is what L is, on the side where the next point is greater: it usually
// settles the others. Of those that can only be the best it does so for the first.
func (r *rotation) searchTops(lane *rotatedLane, candidates []candidate, from int) {
	s := &r.directions
	want, lead := uint32(0), -1
	for l := range candidates {
		c := &candidates[l]
		if !c.best {
			want |= 1 << l
		} else if lead < 0 || c.d > candidates[lead].d {
			lead = l
		}
	}
	if lead >= 0 {
		want |= 1 << lead
	}
	kernel.GreatestRows(&s.top, &s.topRow, s.rows)
	for n := len(s.rows); want != 0; want &= want - 1 {
		l := bits.TrailingZeros32(want)
		k := int(s.topRow[l])
		switch {
		case s.top[l] < lane.reach[candidates[l].direction]:
		case k > 0 && (k+1 == n || math.Abs(s.rows[k-1][l]) > math.Abs(s.rows[k+1][l])):
			r.look(lane, candidates, from, k, l)
		case k+1 < n:
			r.look(lane, candidates, from, k+1, l)
		}
	}
}

// look raises the D of a candidate to the greatest |u| of the piece that ends at
// row k, if that matters.
func (r *rotation) look(lane *rotatedLane, candidates []candidate, from, k, l int) {
	s := &r.directions
	s.seen[from+k] |= 1 << l
	i := s.pieceOf[from+k]
	if i < 0 {
		return
	}
	c := &candidates[l]
	best := max(c.d, s.screen.Best[l])
	if c.best {
		best = max(best, s.greatest)
	}
	if d := r.follow(best, lane, &lane.pieces[i], s.rows[k-1][l], s.rows[k][l], s.rays.Cos[l], s.rays.Sin[l]); d > best {
		c.d, s.greatest = d, max(s.greatest, d)
	}
}

// aim sets rays and screen for the candidates.
func (s *directions) aim(lane *rotatedLane, candidates []candidate) {
	n := float64(lane.every)
	phase := float64(n * lane.one.phase)
	force, curve, slope := curvature(float64(2*lane.one.damping*phase), float64(phase*phase))
	if lane.cuts > 1 {
		force, curve, slope = 1, 0, 0 // their bend is what bounds ü
	}
	for l, c := range candidates {
		s.rays.Cos[l], s.rays.Sin[l] = compass.Cos[c.direction], compass.Sin[c.direction]
		s.screen.Force[l] = float64(force * float64(n*n))
		s.screen.Curve[l], s.screen.Slope[l], s.screen.Best[l] = curve, slope, 0
	}
}

// follow returns the greater of best and the greatest |u| of a piece in a
// direction, with the displacements at its ends.
func (r *rotation) follow(best float64, lane *rotatedLane, s *piece, u, end, cos, sin float64) float64 {
	if lane.piece.bound(max(math.Abs(u), math.Abs(end)), s.bend) <= best {
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
