package chart

import (
	"math"

	"gonum.org/v1/plot/vg"
)

// cover is what lines of one width and one opaque colour have covered, by square cells.
type cover struct {
	area          vg.Rectangle
	cell          vg.Length
	columns, rows int
	isCovered     []bool
}

// newCover is a blank area for lines of a width.
func newCover(area vg.Rectangle, width vg.Length) *cover {
	c := &cover{area: area, cell: width}
	size := area.Size()
	c.columns, c.rows = int(size.X/c.cell)+1, int(size.Y/c.cell)+1
	c.isCovered = make([]bool, c.columns*c.rows)
	return c
}

// at is the cell of a point, if it has one.
func (c *cover) at(p vg.Point) (at int, ok bool) {
	column, row := int((p.X-c.area.Min.X)/c.cell), int((p.Y-c.area.Min.Y)/c.cell)
	return row*c.columns + column, column >= 0 && row >= 0 && column < c.columns && row < c.rows
}

// newShare is the share of a segment's cells that must be blank for it to be seen.
const newShare = 0.35

// add covers a line and returns what can be seen of it: the pieces that are not drawn over
// others' cells. Many lines cost no more than the area that they cover.
func (c *cover) add(line []vg.Point) (seen [][]vg.Point) {
	var piece []vg.Point
	for i := 1; i < len(line); i++ {
		if c.segment(line[i-1], line[i]) {
			if piece == nil {
				piece = append(piece, line[i-1])
			}
			piece = append(piece, line[i])
			continue
		}
		if piece != nil {
			seen = append(seen, piece)
		}
		piece = nil
	}
	if piece != nil {
		seen = append(seen, piece)
	}
	return seen
}

// segment covers a segment and reports whether it can be seen.
func (c *cover) segment(a, b vg.Point) bool {
	steps := max(1, int(math.Ceil(math.Hypot(float64(b.X-a.X), float64(b.Y-a.Y))/float64(c.cell))))
	blank, last := 0, -1
	count := 0
	for i := range steps + 1 {
		t := vg.Length(i) / vg.Length(steps)
		at, ok := c.at(vg.Point{X: a.X + vg.Length(float64(t*(b.X-a.X))), Y: a.Y + vg.Length(float64(t*(b.Y-a.Y)))})
		if !ok || at == last {
			continue
		}
		last = at
		count++
		if !c.isCovered[at] {
			c.isCovered[at] = true
			blank++
		}
	}
	return count > 0 && float64(blank) >= newShare*float64(count)
}

// simplify leaves points out that lie within a distance of the line without them.
//
// Source: D. H. Douglas and T. K. Peucker, "Algorithms for the reduction of the number of
// points required to represent a digitized line or its caricature", Cartographica 10, 1973,
// 112–122.
func simplify(line []vg.Point, distance vg.Length) []vg.Point {
	if len(line) < 3 {
		return line
	}
	keep := make([]bool, len(line))
	keep[0], keep[len(line)-1] = true, true
	simplifyBetween(line, keep, 0, len(line)-1, distance)
	out := make([]vg.Point, 0, len(line))
	for i, k := range keep {
		if k {
			out = append(out, line[i])
		}
	}
	return out
}

func simplifyBetween(line []vg.Point, keep []bool, from, to int, distance vg.Length) {
	farthest, at := distance, -1
	for i := from + 1; i < to; i++ {
		if d := distanceTo(line[i], line[from], line[to]); d > farthest {
			farthest, at = d, i
		}
	}
	if at < 0 {
		return
	}
	keep[at] = true
	simplifyBetween(line, keep, from, at, distance)
	simplifyBetween(line, keep, at, to, distance)
}

// distanceTo is that of a point to a segment.
func distanceTo(p, a, b vg.Point) vg.Length {
	along, off := b.Sub(a), p.Sub(a)
	length := along.Dot(along)
	if length == 0 {
		return vg.Length(math.Hypot(float64(off.X), float64(off.Y)))
	}
	t := min(1, max(0, off.Dot(along)/length))
	rest := off.Sub(along.Scale(t))
	return vg.Length(math.Hypot(float64(rest.X), float64(rest.Y)))
}
