package chart

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Scatter is a chart of points, those of each group in a shape of its own, over a logarithmic
// axis to the right and a linear one upwards.
type Scatter struct {
	Title  string
	Notes  []string // lines below the title
	Foot   string   // below the chart
	X, Y   string   // what the axes are of, with units
	Groups []PointGroup
}

// PointGroup is some points; X is positive.
type PointGroup struct {
	Name string
	X, Y []float64
}

// shapes are those of groups, in their order, open ones first, which show through where
// they overlap; of more groups than there are the last is repeated.
var shapes = []draw.GlyphDrawer{
	draw.RingGlyph{}, draw.SquareGlyph{}, draw.TriangleGlyph{}, draw.PlusGlyph{}, draw.CrossGlyph{}, draw.BoxGlyph{}, draw.PyramidGlyph{}, draw.CircleGlyph{},
}

// pointRadius is the size of a point, pointCell within which points of one shape cannot be
// told apart.
const pointRadius, pointCell vg.Length = 2.2, 1

// IsEmpty reports whether there is no point.
func (s *Scatter) IsEmpty() bool {
	return !slices.ContainsFunc(s.Groups, func(g PointGroup) bool { return len(g.X) > 0 })
}

// Draw draws the chart.
func (s *Scatter) Draw(c draw.Canvas) {
	h := newHeading(c, s.Title, s.Notes, s.Foot)
	h.write(c)
	f := s.frame(c, &h)
	f.grid()
	order := make([]int, len(s.Groups))
	for i := range order {
		order[i] = i
	}
	// Few points lie over many.
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(len(s.Groups[b].X), len(s.Groups[a].X)) })
	for _, i := range order {
		for _, p := range f.distinct(&s.Groups[i]) {
			f.DrawGlyph(shapeOf(i), p)
		}
	}
	s.key(&f)
	f.axes(true)
}

func shapeOf(group int) draw.GlyphStyle {
	return draw.GlyphStyle{Color: tone, Radius: pointRadius, Shape: shapes[min(group, len(shapes)-1)]}
}

// frame is that of all points.
func (s *Scatter) frame(c draw.Canvas, h *heading) (f frame) {
	lowX, highX, lowY, highY := math.Inf(1), math.Inf(-1), math.Inf(1), math.Inf(-1)
	for _, g := range s.Groups {
		for i, x := range g.X {
			lowX, highX, lowY, highY = min(lowX, x), max(highX, x), min(lowY, g.Y[i]), max(highY, g.Y[i])
		}
	}
	// Half a unit of room keeps points off the axes.
	f = frame{x: newAxis(s.X, lowX, highX, true), y: spanAxis(s.Y, math.Floor(2*lowY-0.5)/2, math.Ceil(2*highY+0.5)/2)}
	f.Canvas = draw.Crop(c, leftRoom, -rightRoom, footRoom+bottomRoom, -h.room())
	return f
}

// distinct are the points of a group of which no two are in one cell.
func (f *frame) distinct(g *PointGroup) (out []vg.Point) {
	seen := map[[2]int]bool{}
	for i, x := range g.X {
		p := f.point(x, g.Y[i])
		cell := [2]int{int(math.Floor(float64(p.X / pointCell))), int(math.Floor(float64(p.Y / pointCell)))}
		if !seen[cell] {
			seen[cell] = true
			out = append(out, p)
		}
	}
	return out
}

// key says beside the frame what the shapes are, with how many points there are.
func (s *Scatter) key(f *frame) {
	beside := draw.Crop(f.Canvas, 0, rightRoom, 0, 0) // glyphs are drawn within their canvas only
	at := vg.Point{X: f.Max.X + 12, Y: f.Max.Y - labelSize}
	style := writing(labelSize, ink)
	for i, g := range s.Groups {
		if len(g.X) == 0 {
			continue
		}
		beside.DrawGlyph(shapeOf(i), at)
		f.FillText(style, vg.Point{X: at.X + 8, Y: at.Y}, shorten(style, fmt.Sprintf("%s: %d", g.Name, len(g.X)), rightRoom-24))
		at.Y -= labelStep + 2
	}
}
