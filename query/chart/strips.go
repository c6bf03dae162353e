package chart

import (
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Strip is the part of a chart that is nearest to one period, in points from its top left
// corner: where a reader points who asks for the values at that period.
type Strip struct {
	Period              int     // by position
	X, Y, Width, Height float64 // of the part
	At                  float64 // where the period itself lies
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

// canvas is one on which nothing can be drawn.
func (s Size) canvas() draw.Canvas {
	return draw.Canvas{Rectangle: vg.Rectangle{Max: vg.Point{X: s.Width, Y: s.Height}}}
}

func (f *frame) strips(periodsS []float64, size Size) (out []Strip) {
	for i, t := range periodsS {
		if !f.x.has(t) {
			continue
		}
		x := float64(f.point(t, f.y.from).X)
		out = append(out, Strip{Period: i, X: float64(f.Min.X), At: x, Y: float64(size.Height - f.Max.Y), Height: float64(f.Size().Y)})
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
