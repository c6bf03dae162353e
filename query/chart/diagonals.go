package chart

import (
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// diagonal is a line of equal SD, which falls, or of equal PSA, which rises.
type diagonal struct {
	tick
	unit  string
	rises bool
	psv   func(periodS float64) float64 // m/s
}

// diagonals are those at the steps of decades that the frame can have.
func (s *FourWay) diagonals(f *frame) (out []diagonal) {
	leastSD, mostSD, leastPSA, mostPSA := math.Inf(1), 0.0, math.Inf(1), 0.0
	for _, periodS := range []float64{f.x.from, f.x.to} {
		for _, psv := range []float64{f.y.from, f.y.to} {
			sd, _, psa := Reading{PeriodS: periodS, PSV: psv}.Values()
			leastSD, mostSD, leastPSA, mostPSA = min(leastSD, sd), max(mostSD, sd), min(leastPSA, psa), max(mostPSA, psa)
		}
	}
	for _, t := range logAxis("", leastSD/s.Units.SDInM, mostSD/s.Units.SDInM).ticks {
		value := t.at * s.Units.SDInM
		out = append(out, diagonal{t, s.Units.SD, false, func(periodS float64) float64 { return value * 2 * math.Pi / periodS }})
	}
	for _, t := range logAxis("", leastPSA, mostPSA).ticks {
		value := t.at * standardGravity
		out = append(out, diagonal{t, "g", true, func(periodS float64) float64 { return value * periodS / (2 * math.Pi) }})
	}
	return out
}

// within are the ends of the line within the frame, the upper one first; ok is false where
// it does not cross the frame.
func (d *diagonal) within(f *frame) (upper, lower vg.Point, ok bool) {
	pieces := f.ClipLinesXY([]vg.Point{f.point(f.x.from, d.psv(f.x.from)), f.point(f.x.to, d.psv(f.x.to))})
	if len(pieces) == 0 {
		return upper, lower, false
	}
	upper, lower = pieces[0][0], pieces[0][len(pieces[0])-1]
	if d.rises {
		upper, lower = lower, upper
	}
	return upper, lower, true
}

func (d *diagonal) draw(f *frame) {
	width := vg.Length(0.35)
	if d.isMain {
		width = 0.7
	}
	if upper, lower, ok := d.within(f); ok {
		f.StrokeLine2(draw.LineStyle{Color: rule, Width: width}, upper.X, upper.Y, lower.X, lower.Y)
	}
}

// taken is where curves and readings lie, which names of diagonals keep off.
func (s *FourWay) taken(f *frame, read []*Reading) *cover {
	c := newCover(f.Rectangle, nameCell)
	for _, curve := range s.Curves {
		for _, piece := range f.lines(s.PeriodsS, curve.Values) {
			for _, line := range f.ClipLinesXY(f.dash(piece, s.PeriodsS)) {
				c.add(line)
			}
		}
	}
	for _, r := range read {
		for _, line := range r.lines(f) {
			c.add(line)
		}
	}
	return c
}

const (
	nameCell vg.Length = 1 // of what names keep off
	nameStep vg.Length = 3 // between places that are tried
	nameEdge vg.Length = 6 // from the end of the line, and of the frame
)

// write names a main line, along it, as near to its upper end as there is a place which curves,
// readings and other names leave, and single spectra too, if there is one. Without a place
// it has no name.
func (d *diagonal) write(f *frame, each, taken *cover) {
	style := writing(noteSize, quiet)
	words := d.name + " " + d.unit
	b := slanted{along: vg.Point{X: diagonalRun, Y: -diagonalRun}, length: style.Width(words)}
	style.Rotation = -math.Pi / 4
	if d.rises {
		b.along.Y, style.Rotation = diagonalRun, math.Pi/4
	}
	upper, lower, ok := d.within(f)
	if !ok || !d.isMain {
		return
	}
	if !b.place(upper, lower, func() bool { return taken.isBlank(&b) && each.isBlank(&b) }) &&
		!b.place(upper, lower, func() bool { return taken.isBlank(&b) }) {
		return
	}
	taken.fill(&b)
	f.FillPolygon(paper, b.corners())
	f.FillText(style, b.at, words)
}

// diagonalRun is how far right one goes, and up or down, on a unit of a diagonal.
const diagonalRun vg.Length = math.Sqrt2 / 2

// slanted is the room of words that begin at a point and go along a diagonal.
type slanted struct {
	at, along vg.Point
	length    vg.Length
}

// nameHalf is half the height of a name.
const nameHalf vg.Length = noteSize * 0.6

// place moves the words down a line from its upper end to the first place that is right.
func (b *slanted) place(upper, lower vg.Point, isRight func() bool) bool {
	down := b.along
	if down.Y > 0 {
		down = down.Scale(-1)
	}
	way := (upper.Y-lower.Y)/diagonalRun - nameEdge
	for gone := nameEdge; gone+b.length <= way; gone += nameStep {
		b.at = upper.Add(down.Scale(gone))
		if b.along.Y > 0 {
			b.at = upper.Add(down.Scale(gone + b.length))
		}
		if isRight() {
			return true
		}
	}
	return false
}

// point is one of the words' room, by its way along it and off its middle.
func (b *slanted) point(along, off vg.Length) vg.Point {
	return vg.Point{
		X: b.at.X + vg.Length(float64(along*b.along.X)) - vg.Length(float64(off*b.along.Y)),
		Y: b.at.Y + vg.Length(float64(along*b.along.Y)) + vg.Length(float64(off*b.along.X)),
	}
}

func (b *slanted) corners() []vg.Point {
	return []vg.Point{b.point(0, nameHalf), b.point(b.length, nameHalf), b.point(b.length, -nameHalf), b.point(0, -nameHalf)}
}

// isBlank reports whether nothing covers a room, and it lies within the area.
func (c *cover) isBlank(b *slanted) bool {
	for _, p := range b.corners() {
		if _, ok := c.at(p); !ok {
			return false
		}
	}
	isBlank := true
	c.within(b, func(at int) { isBlank = isBlank && !c.isCovered[at] })
	return isBlank
}

// fill covers a room.
func (c *cover) fill(b *slanted) { c.within(b, func(at int) { c.isCovered[at] = true }) }

// within goes through the cells of a room and of a margin around it.
func (c *cover) within(b *slanted, do func(at int)) {
	for along := -c.cell; along <= b.length+c.cell; along += c.cell {
		for off := -nameHalf - c.cell; off <= nameHalf+c.cell; off += c.cell {
			if at, ok := c.at(b.point(along, off)); ok {
				do(at)
			}
		}
	}
}
