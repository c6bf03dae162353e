package chart

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Trace is a series of equal steps, and the extreme that is marked on it.
type Trace struct {
	Name         string // of the direction
	FromS, StepS float64
	Values       []float64
	PeakS, Peak  float64 // when it comes on the clock of FromS, and its value
}

// Panel is some traces of one quantity, on one scale.
type Panel struct {
	Quantity, Unit string
	Traces         []Trace // as many in every panel of a chart
}

// most is the greatest size of a value.
func (p *Panel) most() (most float64) {
	for _, t := range p.Traces {
		for _, v := range t.Values {
			most = max(most, math.Abs(v))
		}
		most = max(most, math.Abs(t.Peak))
	}
	return most
}

// aroundZero is an axis of both signs, somewhat more than a size to either side. Its ticks
// keep away from its ends, where the next lane's are; a high lane has more of them.
func aroundZero(most float64, height vg.Length) axis {
	if !(most > 0) {
		most = 1
	}
	a := axis{from: -1.15 * most, to: 1.15 * most}
	step, pairs := stepBelow(0.75*most), 1.0
	if height > highLane {
		step = stepBelow(most / 2)
		pairs = math.Floor(most / step)
	}
	for n := pairs; n > 0; n-- {
		a.ticks = append(a.ticks, tick{-n * step, three(-n * step), true}, tick{n * step, three(n * step), true})
	}
	a.ticks = append(a.ticks, tick{at: 0, name: "0"})
	slices.SortFunc(a.ticks, func(s, t tick) int { return cmp.Compare(s.at, t.at) })
	return a
}

// highLane has room for more than three ticks.
const highLane vg.Length = 60

// draw draws the traces below each other on lanes of one height, with their names and peaks
// beside.
func (p *Panel) draw(c draw.Canvas, x axis, withX bool) {
	n := vg.Length(len(p.Traces))
	height := c.Size().Y / n
	f := frame{x: x, y: aroundZero(p.most(), height)}
	for i := range p.Traces {
		f.Canvas = c
		f.Max.Y = c.Max.Y - height*vg.Length(i)
		f.Min.Y = f.Max.Y - height + laneGap
		f.grid()
		p.Traces[i].draw(&f, p.Unit)
		f.axes(withX && i == len(p.Traces)-1)
	}
	middle := (c.Min.Y + c.Max.Y) / 2
	c.FillText(upwards(writing(labelSize, ink)), vg.Point{X: c.Min.X - leftRoom + 8, Y: middle}, p.Quantity+" ("+p.Unit+")")
}

const laneGap vg.Length = 3

// draw draws the trace on a lane, and marks its peak.
func (t *Trace) draw(f *frame, unit string) {
	f.StrokeLines(draw.LineStyle{Color: tone, Width: hair}, f.columns(t.FromS, t.StepS, t.Values)...)
	if at := f.point(t.PeakS, t.Peak); f.x.has(t.PeakS) {
		f.DrawGlyph(draw.GlyphStyle{Color: ink, Radius: 2.2, Shape: draw.RingGlyph{}}, at)
	}
	at := vg.Point{X: f.Max.X + 6, Y: (f.Min.Y + f.Max.Y) / 2}
	f.FillText(bold(labelSize, tone), at.Add(vg.Point{Y: lineRoom / 2}), t.Name)
	words := fmt.Sprintf("%s %s at %.2f s", three(t.Peak), unit, t.PeakS)
	style := fitting(ink, words, rightRoom-8)
	f.FillText(style, at.Sub(vg.Point{Y: lineRoom / 2}), shorten(style, words, rightRoom-8))
}

// columns is a series as a line that has, in each column of the width of a hair, the least
// and the greatest value at their places, in the order in which they come: more cannot be
// seen.
func (f *frame) columns(fromS, stepS float64, values []float64) [][]vg.Point {
	var line []vg.Point
	least, greatest, column := -1, -1, 0
	put := func(i int) {
		line = append(line, f.point(fromS+float64(stepS*float64(i)), values[i]))
	}
	flush := func() {
		if least < 0 {
			return
		}
		put(min(least, greatest))
		if least != greatest {
			put(max(least, greatest))
		}
	}
	for i, v := range values {
		x := fromS + float64(stepS*float64(i)) // rounded, so that both places fall into one column
		if !f.x.has(x) {
			continue
		}
		if at := int((f.point(x, 0).X - f.Min.X) / hair); least < 0 || at != column {
			flush()
			least, greatest, column = i, i, at
			continue
		}
		if v < values[least] {
			least = i
		}
		if v > values[greatest] {
			greatest = i
		}
	}
	flush()
	if len(line) < 2 {
		return nil
	}
	return [][]vg.Point{line}
}
