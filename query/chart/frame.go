package chart

import (
	"image/color"
	"math"
	"slices"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// frame is a rectangle with two axes.
type frame struct {
	draw.Canvas // the area of the data
	x, y        axis
}

// point is where a value lies.
func (f *frame) point(x, y float64) vg.Point {
	size := f.Size()
	// Products are rounded, so that a point is the same where they could be fused with the sum.
	return vg.Point{X: f.Min.X + vg.Length(float64(size.X)*f.x.at(x)), Y: f.Min.Y + vg.Length(float64(size.Y)*f.y.at(y))}
}

// isShown reports whether a value can be drawn, if perhaps outside the frame.
func (f *frame) isShown(y float64) bool {
	return !math.IsNaN(y) && !math.IsInf(y, 0) && (!f.y.isLog || y > 0)
}

// lines are the points of a curve, in pieces where values are missing.
func (f *frame) lines(xs, ys []float64) (out [][]vg.Point) {
	var piece []vg.Point
	for i, x := range xs {
		if f.x.has(x) && f.isShown(ys[i]) {
			piece = append(piece, f.point(x, ys[i]))
			continue
		}
		if piece != nil {
			out = append(out, piece)
		}
		piece = nil
	}
	if piece != nil {
		out = append(out, piece)
	}
	return out
}

// grid draws the lines of the ticks.
func (f *frame) grid() {
	line := draw.LineStyle{Color: rule, Width: 0.5}
	for _, t := range f.x.ticks {
		f.StrokeLine2(line, f.point(t.at, f.y.from).X, f.Min.Y, f.point(t.at, f.y.from).X, f.Max.Y)
	}
	for _, t := range f.y.ticks {
		f.StrokeLine2(line, f.Min.X, f.point(f.x.from, t.at).Y, f.Max.X, f.point(f.x.from, t.at).Y)
	}
}

// The room that axes take beside the frame.
const (
	leftRoom   vg.Length = 44
	bottomRoom vg.Length = 28
)

// axes draws the two axes with the names of their ticks; that of x only where it is shown.
func (f *frame) axes(withX bool) {
	line := draw.LineStyle{Color: ink, Width: 0.7}
	f.StrokeLine2(line, f.Min.X, f.Min.Y, f.Max.X, f.Min.Y)
	f.StrokeLine2(line, f.Min.X, f.Min.Y, f.Min.X, f.Max.Y)
	names := writing(labelSize, ink)
	right := names
	right.XAlign = draw.XRight
	isNamed := f.y.named(f.Size().Y, labelSize+1)
	for i, t := range f.y.ticks {
		at := f.point(f.x.from, t.at)
		f.StrokeLine2(line, at.X-3, at.Y, at.X, at.Y)
		if isNamed(i) {
			f.FillText(right, vg.Point{X: at.X - 5, Y: at.Y}, t.name)
		}
	}
	middle := f.Min.Add(f.Max).Scale(0.5)
	if f.y.label != "" {
		f.FillText(upwards(names), vg.Point{X: f.Min.X - leftRoom + 8, Y: middle.Y}, f.y.label)
	}
	centred := names
	centred.XAlign = draw.XCenter
	room := 3 * labelSize
	for _, t := range f.x.ticks {
		room = max(room, names.Width(t.name)+labelSize/2)
	}
	isNamed = f.x.named(f.Size().X, room)
	for i, t := range f.x.ticks {
		at := f.point(t.at, f.y.from)
		f.StrokeLine2(line, at.X, at.Y-3, at.X, at.Y)
		if withX && isNamed(i) {
			f.FillText(centred, vg.Point{X: at.X, Y: at.Y - 9}, t.name)
		}
	}
	if withX {
		f.FillText(centred, vg.Point{X: middle.X, Y: f.Min.Y - 21}, f.x.label)
	}
}

// curve draws a curve within the frame only.
func (f *frame) curve(style draw.LineStyle, xs, ys []float64) {
	for _, piece := range f.lines(xs, ys) {
		f.StrokeLines(style, f.ClipLinesXY(f.dash(piece, xs))...)
	}
}

// dash is a piece of a curve or, of one point, a short line through it, since a line of one
// point draws nothing. It keeps away from the points of other values.
func (f *frame) dash(piece []vg.Point, xs []float64) []vg.Point {
	if len(piece) != 1 {
		return piece
	}
	at := piece[0]
	half := dashRoom / 2
	for _, x := range xs {
		if apart := vg.Length(math.Abs(float64(f.point(x, f.y.to).X - at.X))); apart > 0 {
			half = min(half, 0.4*apart)
		}
	}
	half = max(half, hair)
	return []vg.Point{{X: at.X - half, Y: at.Y}, {X: at.X + half, Y: at.Y}}
}

// dashRoom is the length of the line that stands for a lone point: one sees its dashes.
const dashRoom vg.Length = 12

// region fills what lies between two curves, piece by piece.
func (f *frame) region(fill color.Color, xs, low, high []float64) {
	both := make([]float64, len(xs))
	for i := range xs {
		both[i] = low[i] + high[i] // NaN where either is
	}
	at := 0
	for _, piece := range f.lines(xs, both) {
		for !(f.x.has(xs[at]) && f.isShown(both[at])) {
			at++
		}
		var above, below []vg.Point
		for i := range piece {
			above, below = append(above, f.point(xs[at+i], high[at+i])), append(below, f.point(xs[at+i], low[at+i]))
		}
		outline := f.dash(above, xs)
		for _, p := range slices.Backward(f.dash(below, xs)) {
			outline = append(outline, p)
		}
		f.FillPolygon(fill, f.ClipPolygonXY(outline))
		at += len(piece)
	}
}
