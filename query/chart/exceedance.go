package chart

import (
	"math"
	"slices"
	"sort"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Exceedance is a chart of the shares of motions that are above values of some quantities,
// with levels marked on them.
type Exceedance struct {
	Title    string
	Notes    []string // lines below the title
	Foot     string   // below the chart
	Share    string   // what the shares are of
	IsLinear bool     // the axis of values; else it is logarithmic
	Panels   []ExceedancePanel
}

// ExceedancePanel is the curve of one quantity.
type ExceedancePanel struct {
	Quantity string    // with its unit
	Values   []float64 // of the motions, ascending
	Above    []float64 // share of motions above each
	Levels   []Level
}

// Level is a value and what it is; a design value or a capacity is drawn over the whole
// height, others up to the curve.
type Level struct {
	Name  string
	Kind  Kind
	Value float64
}

// at is the share of motions above a value.
func (p *ExceedancePanel) at(value float64) float64 {
	i := sort.Search(len(p.Values), func(i int) bool { return p.Values[i] > value })
	if i == 0 {
		return 1
	}
	return p.Above[i-1]
}

// levelRoom is that of the levels' names, panelGap between panels.
const levelRoom, panelGap vg.Length = 164, 6

// shown are the positions of the panels of which a value is positive.
func (s *Exceedance) shown() (out []int) {
	for i := range s.Panels {
		values := s.Panels[i].Values
		if n := len(values); n > 0 && values[n-1] > 0 {
			out = append(out, i)
		}
	}
	return out
}

// IsEmpty reports whether no value is positive.
func (s *Exceedance) IsEmpty() bool { return s.shown() == nil }

// Draw draws the chart.
func (s *Exceedance) Draw(c draw.Canvas) {
	shown := s.shown()
	h := newHeading(c, s.Title, s.Notes, s.Foot)
	h.write(c)
	area := s.area(c, h)
	for i, at := range shown {
		f := s.frame(area, at, i, len(shown))
		s.Panels[at].draw(&f)
	}
}

// area is that of the panels.
func (s *Exceedance) area(c draw.Canvas, h heading) draw.Canvas {
	return draw.Crop(c, leftRoom, -levelRoom, footRoom, -h.room())
}

// frame is that of a panel, the nth of some from the top.
func (s *Exceedance) frame(area draw.Canvas, panel, nth, of int) frame {
	height := area.Size().Y / vg.Length(of)
	f := frame{Canvas: area, x: s.Panels[panel].axis(s.IsLinear), y: linearAxis(s.Share, 100)}
	f.Max.Y = area.Max.Y - height*vg.Length(nth)
	f.Min.Y = f.Max.Y - height + bottomRoom + panelGap
	return f
}

// axis has all values and levels.
func (p *ExceedancePanel) axis(isLinear bool) axis {
	lowest, highest := math.Inf(1), 0.0
	take := func(x float64) {
		if x > 0 && !math.IsInf(x, 0) {
			lowest, highest = min(lowest, x), max(highest, x)
		}
	}
	for _, x := range p.Values {
		take(x)
	}
	for _, l := range p.Levels {
		take(l.Value)
	}
	return newAxis(p.Quantity, lowest, highest, !isLinear)
}

// curve is the line of steps.
func (p *ExceedancePanel) curve(f *frame) []vg.Point {
	line := []vg.Point{f.point(f.x.from, 100)}
	before := 100.0
	for i, x := range p.Values {
		if x > f.x.from {
			line = append(line, f.point(x, before), f.point(x, 100*p.Above[i]))
		}
		before = 100 * p.Above[i]
	}
	return append(line, f.point(f.x.to, 0))
}

// draw draws the curve and the levels, and names these beside where they meet it.
func (p *ExceedancePanel) draw(f *frame) {
	f.grid()
	var names []label
	for _, l := range p.Levels {
		if f.x.has(l.Value) {
			names = append(names, label{words: l.Name, style: styles[l.Kind], from: f.point(l.Value, 100*p.at(l.Value))})
		}
	}
	drawLabels(f, levelRoom, slices.Clone(names))
	for _, l := range p.Levels {
		if !f.x.has(l.Value) {
			continue
		}
		at := f.point(l.Value, 100*p.at(l.Value))
		if l.Kind == Design || l.Kind == Capacity {
			at.Y = f.Max.Y
		}
		f.StrokeLine2(styles[l.Kind], at.X, f.Min.Y, at.X, at.Y)
	}
	f.StrokeLines(draw.LineStyle{Color: deep, Width: 1.4}, f.ClipLinesXY(simplify(p.curve(f), tolerance))...)
	for _, n := range names {
		f.DrawGlyph(draw.GlyphStyle{Color: n.style.Color, Radius: 2.4, Shape: draw.CircleGlyph{}}, n.from)
	}
	f.axes(true)
}
