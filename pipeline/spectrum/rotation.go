package spectrum

import (
	"math"
	"math/bits"
	"slices"

	"swaybook/pipeline/internal/kernel"
)

// rotation is the work space for a pair of components: both motions, scaled
// alike, and what is known of each lane of the group in hand.
//
// Vectors of the plane obey the bounds of single components, because their length
// is the greatest of their components over all directions, and lengths of bounds
// bound it. So blocks of steps are passed over where a bound on |u| stays below
// the floor of a lane. Of the others the most promising are marched again first, and
// tell roughly what each lane reaches in all directions. Then all are, and what in
// them is not within the fence of a lane is gathered in pieces. From these follow,
// at the end, the directions whose D must be known, and their D. A lane whose ceiling
// turns out to be too low is searched again with a higher one.
type rotation struct {
	pair                  [2]*motion
	blockNorms, stepNorms []kernel.Line // blockLines and stepLines of both as lengths
	strideNorms           [len(strides)][]kernel.Line
	peak                  float64            // the greatest length of the ground acceleration
	fence                 *kernel.Fence      // slow: those of the lanes, in units of the march
	orbits                *kernel.OrbitFence // what free vibrations do not leave it
	lane                  [lanes]rotatedLane
	points                []kernel.Point
	order                 []int                // blocks
	levels                [maxLevel + 1]uint32 // slow: the lanes whose pieces have 2ⁱ steps
	every                 int                  // slow: the least number of steps in a piece
	first, second         []float64            // D of the components
	directions            directions
	sweep                 *kernel.Sweep
	displaced             *kernel.Displaced // fast
	vibration             *kernel.Vibration // slow
	cut, loose            uint32            // slow: lanes whose steps are cut, and those judged by free vibrations
}

// span is the bound on |u| over some time,
//
//	max|u| <= growth·(m + reach·max|a|),
//
// with m the greater |u| at both ends: func bounds, time in steps.
type span struct{ growth, reach float64 }

// newSpan returns that over n steps of the given phase.
func newSpan(phase, damping, n float64) span {
	reach, growth, _ := bounds(float64(n*phase), damping)
	return span{growth, float64(float64(n*n) * reach)}
}

// bent is the span of parts, of which a bound on ü is known: |u| exceeds that at
// both ends by an eighth of it at most.
var bent = span{1, 0.125}

func (s *span) bound(u, a float64) float64 { return s.growth * (u + float64(s.reach*a)) }

// rotatedLane is one oscillator of the group in hand.
//
// It is looked at in pieces over which the bound is close: parts of a step where
// its period is short, else one step or several (every).
type rotatedLane struct {
	polygon
	index    int
	phase    float64 // of whole steps
	ringing  *ringing
	end      pairEnd // of the motion
	one      *slow   // the oscillator, the shortest piece its step
	cuts     int     // those in a step
	whole    line    // of whole steps
	every    int     // steps in a piece, 1 if cut
	unit     float64 // of displacements that are swept
	rows     span    // over the time between two samples that are looked at
	part     span    // over a part of a step, or over a step that is not cut
	piece    span    // over a piece, with its bend for the ground acceleration
	pieces   []piece
	wide     int  // pieces that the polygon has taken in
	fenced   bool // whether the rotation has the fence of the polygon
	searches int  // with ceilings that were too low
}

// piece is one that can matter: where it starts, how many steps it takes in, the
// displacements of both motions at its start, at the next sample and at its end,
// and a bound on the length of ü of a part, or of the ground acceleration of steps,
// in steps of one.
type piece struct {
	sample, part, every            int
	x, y, xNext, yNext, xEnd, yEnd float64
	bend                           float64
}

// absorbPieces is how many pieces a lane gathers before its polygon takes them
// in, so that what that costs is shared.
const absorbPieces = 64

// pairEnd is the state of both motions at the last sample, velocities over ω.
type pairEnd struct{ x, y, vx, vy float64 }

func newRotation() *rotation {
	return &rotation{
		pair:  [2]*motion{newMotion(), newMotion()},
		fence: new(kernel.Fence), orbits: new(kernel.OrbitFence),
		directions: newDirections(), sweep: new(kernel.Sweep), displaced: new(kernel.Displaced),
		vibration: new(kernel.Vibration),
	}
}

// isLight reports whether the work space is worth keeping: motions that go round
// for long, of oscillators short against the step, take pieces by the million.
func (r *rotation) isLight() bool {
	pieces := 0
	for l := range r.lane {
		pieces += cap(r.lane[l].pieces)
	}
	return pieces <= 1<<17
}

// load is that of a motion for both, scaled alike.
func (r *rotation) load(first, second []float64) (known float64, done bool) {
	top := max(greatest(first), greatest(second)) // NaN where one is
	if math.IsNaN(top) {
		return math.NaN(), true
	}
	if len(first) < 2 || top == 0 {
		return 0, true
	}
	for i, samples := range [][]float64{first, second} {
		r.pair[i].scale(samples, top)
		r.pair[i].measure()
	}
	return 0, false
}

// prepare makes lengths of what bounds are made of.
func (r *rotation) prepare(strided [len(strides)]bool) {
	first, second := r.pair[0], r.pair[1]
	r.blockNorms = norms(r.blockNorms, first.blockLines, second.blockLines)
	r.stepNorms = norms(r.stepNorms, first.stepLines, second.stepLines)
	first.loadStrides(strided)
	second.loadStrides(strided)
	for i, used := range strided {
		if used {
			r.strideNorms[i] = norms(r.strideNorms[i], first.strides[i].lines, second.strides[i].lines)
		}
	}
	r.peak = 0
	for _, line := range r.blockNorms {
		r.peak = max(r.peak, line.First)
	}
}

func norms(dst, first, second []kernel.Line) []kernel.Line {
	dst = resize(dst, len(first))
	for i, x := range first {
		y := second[i]
		dst[i] = kernel.Line{First: reach(x.First, y.First), Second: reach(x.Second, y.Second)}
	}
	return dst
}

// marks are those of the first motion; a rotation leaves in their peaks what both
// make together.
func (r *rotation) marks() []kernel.Mark { return r.pair[0].marks[:r.pair[0].blocks()] }

// begin makes a lane ready.
func (r *rotation) begin(l, index int, phase float64, ringing *ringing) *rotatedLane {
	lane := &r.lane[l]
	lane.index, lane.phase, lane.ringing = index, phase, ringing
	lane.polygon.begin(r.first[index], r.second[index])
	lane.pieces, lane.wide, lane.every, lane.fenced, lane.unit, lane.searches = lane.pieces[:0], 0, 1, false, 1, 0
	return lane
}

// sweptBlocks is how many blocks of a group are swept before any is looked at
// closely: enough to know roughly what its motions reach in all directions.
const sweptBlocks = 20

// pairGroup is a group of oscillators, slow or fast.
type pairGroup interface {
	live() uint32
	march(m *motion)                         // sets the marks of a motion
	areSquares() bool                        // whether their peaks are
	limitPair(r *rotation)                   // sets the screen of blocks from floors
	sweep(r *rotation, b int)                // sweeps the samples of a block
	gather(r *rotation, b int, flags uint32) // collects pieces of a block
	last(m *motion, l int) state             // displacement and velocity at the end
}

// solve puts RotD50 and RotD100 of a group whose lanes have begun into dst50 and
// dst100. lines is what blocks are screened with.
func (r *rotation) solve(g pairGroup, lines []kernel.Line, dst50, dst100 []float64) {
	first, second := r.pair[0], r.pair[1]
	g.march(first)
	g.march(second)
	marks := r.marks()
	kernel.JoinPeaks(marks, marks, second.marks[:len(marks)], g.areSquares())
	for live := g.live(); live != 0; live &= live - 1 {
		l := bits.TrailingZeros32(live)
		lane, x, y := &r.lane[l], g.last(first, l), g.last(second, l)
		lane.end = pairEnd{x.x, y.x, x.y / lane.phase, y.y / lane.phase}
	}
	r.collect(g, lines)
	for live := g.live(); live != 0; live &= live - 1 {
		lane := &r.lane[bits.TrailingZeros32(live)]
		dst50[lane.index], dst100[lane.index] = r.finish(lane)
	}
}

// collect gathers the pieces of a group that can matter.
func (r *rotation) collect(g pairGroup, lines []kernel.Line) {
	*r.pair[0].screen = kernel.Screen{}
	g.limitPair(r)
	order := r.inOrder(lines, g.live())
	*r.sweep = kernel.Sweep{}
	for _, b := range order[:min(sweptBlocks, len(order))] {
		g.sweep(r, b)
	}
	r.settle(g.live())
	for wanted := g.live(); wanted != 0; wanted = r.misjudged(wanted) {
		r.gather(g, lines, wanted)
	}
}

// maxSearches is how many searches are made of a lane, the last without a ceiling.
const maxSearches = 4

// gather gathers the pieces of the lanes flagged from the blocks in order.
func (r *rotation) gather(g pairGroup, lines []kernel.Line, want uint32) {
	g.limitPair(r)
	for _, b := range r.order {
		flags := r.passing(b, lines) & want
		g.gather(r, b, flags)
		if r.absorb(flags) {
			g.limitPair(r)
		}
	}
	for ; want != 0; want &= want - 1 {
		r.widen(&r.lane[bits.TrailingZeros32(want)])
	}
}

// misjudged flags the lanes whose middle values of D may exceed the ceiling, and
// makes them ready for another search with a higher one, at last without any.
func (r *rotation) misjudged(searched uint32) (found uint32) {
	for ; searched != 0; searched &= searched - 1 {
		l := bits.TrailingZeros32(searched)
		lane := &r.lane[l]
		if lane.exceeding() < half {
			continue
		}
		found |= 1 << l
		lane.pieces, lane.wide, lane.fenced = lane.pieces[:0], 0, false
		lane.raise(7)
		if lane.searches++; lane.searches < maxSearches {
			lane.estimate()
		} else {
			lane.ceiling = math.Inf(1)
			lane.enclose()
		}
	}
	return found
}

// exceeding returns in how many directions D may exceed the ceiling.
func (lane *rotatedLane) exceeding() (count int) {
	set := &lane.set
	lane.reach.Above(lane.under(lane.ceiling, lane.bend()), set)
	if lane.end.length() > lane.ceiling {
		for i := range Directions {
			if lane.end.reach(i) > lane.ceiling {
				set[i/64] |= 1 << (i % 64)
			}
		}
	}
	return countOf(set)
}

// bend returns the greatest bend of the pieces.
func (lane *rotatedLane) bend() (most float64) {
	for i := range lane.pieces {
		most = max(most, lane.pieces[i].bend)
	}
	return most
}

// inOrder lists the blocks that can matter, those first that have the greatest
// peaks of most lanes, then those that can matter to most.
func (r *rotation) inOrder(lines []kernel.Line, live uint32) []int {
	m := r.pair[0]
	m.flagTops(m.done)
	kernel.ScreenSquares(m.screen, r.marks(), lines, m.flags)
	r.order = r.order[:0]
	for b := range m.flags {
		if m.flags[b]&live != 0 {
			r.order = append(r.order, b)
		}
	}
	rank := func(b int) int { return lanes*bits.OnesCount32(m.done[b]&live) + bits.OnesCount32(m.flags[b]&live) }
	slices.SortStableFunc(r.order, func(a, b int) int { return rank(b) - rank(a) })
	return r.order
}

// settle starts the polygons of lanes with what sweeps have found.
func (r *rotation) settle(live uint32) {
	for ; live != 0; live &= live - 1 {
		l := bits.TrailingZeros32(live)
		lane := &r.lane[l]
		lane.settle(r.sweep, l, lane.unit)
		if lane.one.damping == 0 {
			lane.ring()
		}
		lane.raise(7)
		lane.estimate()
	}
}

// estimate sets the ceiling above what the floor is likely to rise to, the more the
// farther apart samples are and the less the motion dies away: the floor of a sweep
// is below the median by a few per cent as a rule.
func (lane *rotatedLane) estimate() {
	phase := float64(lane.phase * float64(lane.every))
	share := 1.04 + min(float64(phase*phase)*0.125, 0.1)
	if lane.one.damping < freeDamping {
		share += 0.12
	}
	lane.ceiling = float64(share * lane.floor)
	lane.enclose()
}

// passing flags the lanes that a block can still matter to.
func (r *rotation) passing(b int, lines []kernel.Line) uint32 {
	m := r.pair[0]
	kernel.ScreenSquares(m.screen, r.marks()[b:b+1], lines[b:b+1], m.flags[b:b+1])
	return m.flags[b]
}

// absorb takes the pieces that lanes have gathered into their polygons, if there
// are enough of them, and reports whether it did.
func (r *rotation) absorb(flags uint32) (done bool) {
	for ; flags != 0; flags &= flags - 1 {
		lane := &r.lane[bits.TrailingZeros32(flags)]
		if len(lane.pieces)-lane.wide < absorbPieces {
			continue
		}
		done = true
		r.widen(lane)
		lane.raise(6)
		lane.enclose()
		lane.fenced = false
	}
	return done
}

// widen takes the pieces that a lane has gathered into its L.
func (r *rotation) widen(lane *rotatedLane) {
	r.points = lane.points(r.points[:0])
	lane.widen(r.points)
}

// points appends the ends of the pieces that the polygon has not taken in yet.
func (lane *rotatedLane) points(list []kernel.Point) []kernel.Point {
	for i := range lane.pieces[lane.wide:] {
		s := &lane.pieces[lane.wide+i]
		if i == 0 || !s.follows(&lane.pieces[lane.wide+i-1]) {
			list = append(list, kernel.Point{X: s.x, Y: s.y})
		}
		list = append(list, kernel.Point{X: s.xEnd, Y: s.yEnd})
	}
	lane.wide = len(lane.pieces)
	return list
}

// follows reports whether a piece begins where another ends.
func (s *piece) follows(before *piece) bool { return s.x == before.xEnd && s.y == before.yEnd }

// within returns the share of the fence within which a span of a lane with ground
// acceleration up to a may begin and end and still not matter, −1 for none: beyond
// it by the bound of the span, it must not leave the fence in any direction.
func (lane *rotatedLane) within(s *span, a float64) float64 {
	if share := 1/s.growth - float64(s.reach*a)/lane.polygon.least; share > 0 {
		return share
	}
	return -1
}

// fewCuts is how many parts are looked at without asking first whether the free
// vibration can matter, if it dies away.
const fewCuts = 4

// isLoose reports whether free vibrations of the lane are judged.
func (lane *rotatedLane) isLoose() bool {
	return lane.cuts > fewCuts || lane.cuts > 1 && lane.one.damping < freeDamping
}

// setOrbits sets the region of steps, in units of unit, that stay within the fence of
// a lane with their free vibration and the straight-line solution about which it is:
// that is level·a + change·(a' − a) under ground acceleration a.
func (r *rotation) setOrbits(l int, unit, level, change float64) {
	lane, o := &r.lane[l], r.orbits
	for k := range lane.fence {
		x, y := lane.fence[k].normal()
		x, y = x/unit, y/unit
		s := &o.Sides[k]
		s.XX[l], s.XY[l], s.YY[l] = float64(x*x), float64(2*float64(x*y)), float64(y*y)
		s.X[l], s.Y[l] = x, y
	}
	least := float64(lane.least * unit)
	o.First[l], o.Second[l] = math.Abs(level)/least, math.Abs(change)/least
	o.Inner[l] = 1 / float64(least*least)
	o.Level[l], o.Slope[l], o.Rise[l] = float64(0.5*level), change, float64(0.5*o.First[l])
}

// screenOrbits clears the flags of lanes of the steps of a block, from a sample on,
// that are within the region of setOrbits.
func (r *rotation) screenOrbits(from int, flags []uint32) {
	x, y, n := r.pair[0], r.pair[1], len(flags)
	orbits := kernel.Orbits{
		X: x.states[:n], Y: y.states[:n], GroundX: x.a[from : from+n+1], GroundY: y.a[from : from+n+1],
		Lines: r.stepNorms[from : from+n],
	}
	kernel.ScreenOrbits(r.orbits, &orbits, flags)
}

// gatherStep collects the parts of a step that are not within the fence. With little
// damping the free vibration about its straight-line solution (type fast), of which
// many are just within the limits, is held against those first. a is the greatest
// length of the ground acceleration in the step.
func (lane *rotatedLane) gatherStep(sample int, x, y groundedStep, a float64) {
	if lane.one.damping < freeDamping {
		w := &lane.whole
		xLine, xRise := w.line(x.a, x.next)
		yLine, yRise := w.line(y.a, y.next)
		from, to := kernel.Point{X: xLine, Y: yLine}, kernel.Point{X: xLine + xRise, Y: yLine + yRise}
		vx, vy := float64((x.v-xRise)*w.inverse), float64((y.v-yRise)*w.inverse)
		if lane.surrounds(&lane.limits, 0, x.u-xLine, vx, y.u-yLine, vy, from, to) {
			return
		}
	}
	lane.gatherParts(sample, newParts(x, lane.cuts), newParts(y, lane.cuts), a)
}

// groundedStep is the motion at the start of a step, and the ground acceleration
// at both ends.
type groundedStep struct{ u, v, a, next float64 }

// line gives straight-line solutions of steps: inverse is 1/φ, square 1/φ² and lag
// 2ζ/φ.
type line struct{ inverse, square, lag float64 }

func newLine(phase, damping float64) line {
	return line{1 / phase, 1 / float64(phase*phase), float64(2*damping) / phase}
}

// line returns the solution at the start of a step and its change over it.
func (w *line) line(a, next float64) (at, rise float64) {
	slope := next - a
	return -float64(w.square * (a - float64(w.lag*slope))), -float64(w.square * slope)
}

// gatherParts collects the parts of a step that are not within the fence.
func (lane *rotatedLane) gatherParts(sample int, first, second parts, a float64) {
	o := lane.one
	a = float64(a * first.square)
	limit := lane.within(&lane.part, a)
	outside := lane.isBeyond(first.u, second.u, limit)
	for part := range lane.cuts {
		x, y := first, second
		first.next(o)
		second.next(o)
		next := lane.isBeyond(first.u, second.u, limit)
		if outside || next {
			bend := a
			if lane.cuts > 1 {
				bend = float64(o.growth * max(reach(x.bend(o), y.bend(o)), reach(first.bend(o), second.bend(o))))
			}
			lane.pieces = append(lane.pieces, piece{
				sample: sample, part: part, every: 1, x: x.u, y: y.u,
				xNext: first.u, yNext: second.u, xEnd: first.u, yEnd: second.u, bend: bend})
		}
		outside = next
	}
}

// parts follows a step in parts, in units of one.
type parts struct{ u, v, a, rise, square float64 }

// newParts cuts a step.
func newParts(s groundedStep, cuts int) parts {
	n := float64(cuts)
	square := 1 / float64(n*n)
	return parts{u: s.u, v: s.v / n, a: float64(s.a * square), rise: float64((s.next - s.a) / n * square), square: square}
}

func (p *parts) next(o *slow) {
	next := p.a + p.rise
	p.u, p.v = p.u+o.change(p.u, p.v, p.a, next), o.arrival(p.u, p.v, p.a, next)
	p.a = next
}

// bend returns ü, but for its sign.
func (p *parts) bend(o *slow) float64 {
	return math.FMA(o.series.linear, p.v, math.FMA(o.series.square, p.u, p.a))
}
