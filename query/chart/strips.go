package chart

import (
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Strip is the part of a chart that is nearest to one period, or to one motion's value, in
// points from its top left corner: where a reader points who asks for what is there.
type Strip struct {
	Panel               int     // by position, of charts that have several
	Position            int     // of the period, or of the value
	X, Y, Width, Height float64 // of the part
	At                  float64 // where the period, or the value, itself lies
}

// Strips are the parts of a chart of a size, from left to right: of every period within the
// frame the part that is nearer to it, on the axis, than to others.
func (s *Spectra) Strips(size Size) []Strip {
	if s.IsEmpty() {
		return nil
	}
	_, f, _ := s.layout(size.canvas())
	return f.strips(s.PeriodsS, size)
}

// Strips are those of the chart's frame, as of Spectra.
func (s *FourWay) Strips(size Size) []Strip {
	if s.IsEmpty() {
		return nil
	}
	_, f := s.layout(size.canvas(), s.base())
	return f.strips(s.PeriodsS, size)
}

// Strips are, panel by panel, those of the motions' values; of values that lie within a point
// of each other that of the greatest.
func (s *Exceedance) Strips(size Size) (out []Strip) {
	shown := s.shown()
	area := s.area(size.canvas(), newHeading(size.canvas(), s.Title, s.Notes, s.Foot))
	for i, at := range shown {
		f := s.frame(area, at, i, len(shown))
		var apart []Strip
		for _, strip := range f.strips(s.Panels[at].Values, size) {
			strip.Panel = at
			if n := len(apart); n > 0 && strip.At-apart[n-1].At < 1 {
				strip.X, strip.Width = apart[n-1].X, strip.Width+strip.X-apart[n-1].X
				apart = apart[:n-1]
			}
			apart = append(apart, strip)
		}
		out = append(out, apart...)
	}
	return out
}

// canvas is one on which nothing can be drawn.
func (s Size) canvas() draw.Canvas {
	return draw.Canvas{Rectangle: vg.Rectangle{Max: vg.Point{X: s.Width, Y: s.Height}}}
}

// strips are those of ascending places on the axis across.
func (f *frame) strips(places []float64, size Size) (out []Strip) {
	for i, t := range places {
		if !f.x.has(t) {
			continue
		}
		x := float64(f.point(t, f.y.from).X)
		out = append(out, Strip{Position: i, X: float64(f.Min.X), At: x, Y: float64(size.Height - f.Max.Y), Height: float64(f.Size().Y)})
		if n := len(out); n > 1 {
			middle := (out[n-2].At + x) / 2
			out[n-2].Width, out[n-1].X = middle-out[n-2].X, middle
		}
	}
	if n := len(out); n > 0 {
		out[n-1].Width = math.Max(0, float64(f.Max.X)-out[n-1].X)
	}
	return out
}
