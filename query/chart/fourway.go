package chart

import (
	"fmt"
	"math"
	"slices"
	"strconv"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// standardGravity in m/s² (ISO 80000-3).
const standardGravity = 9.80665

// FourWay is a chart of pseudo-velocity against period whose diagonals are lines of equal
// displacement and of equal pseudo-acceleration:
//
//	PSV = SD·ω,  PSA = PSV·ω,  ω = 2π/T.
//
// All axes are logarithmic and all decades equally long, so that the diagonals lie at 45°.
type FourWay struct {
	Title    string
	Notes    []string
	Foot     string
	PeriodsS []float64
	Units    FourWayUnits
	Each     [][]float64 // PSV in m/s, a value a period, NaN for none
	Curves   []Curve     // of PSV in m/s
	Readings []Reading
	Counts   []int // a period: how many spectra hold up the curves; nil where they are no statistics
}

// FourWayUnits are the units of SD and PSV; PSA is in g.
type FourWayUnits struct {
	SD, PSV         string
	SDInM, PSVInMPS float64 // one of them in m, and in m/s
}

// Reading is a point at which the three values are read and written.
type Reading struct {
	Name    string
	PeriodS float64
	PSV     float64 // m/s, NaN where nothing can be read
}

// Values are the three values at a point: SD in m, PSV in m/s, PSA in g.
func (r Reading) Values() (sd, psv, psa float64) {
	omega := 2 * math.Pi / r.PeriodS
	return r.PSV / omega, r.PSV, r.PSV * omega / standardGravity
}

// Draw draws the chart.
func (s *FourWay) Draw(c draw.Canvas) error {
	base := s.base()
	if _, highest := base.extent(); len(s.PeriodsS) == 0 || !(highest > 0) {
		return ErrNothing
	}
	h, f := s.layout(c, base)
	h.write(c)
	f.grid()
	diagonals := s.diagonals(&f)
	for i := range diagonals {
		diagonals[i].draw(&f)
	}
	base.drawEach(&f)
	for i := range diagonals {
		diagonals[i].write(&f)
	}
	read := s.readOn(&f)
	names := f
	if n := len(read); n > 0 {
		names.Min.Y += lineRoom * vg.Length(4*n+1)
	}
	base.drawCurves(&f, &names)
	f.axes(s.Counts == nil)
	if s.Counts != nil {
		strip := f
		strip.Max.Y = f.Min.Y - stripGap
		strip.Min.Y = strip.Max.Y - stripRoom
		base.drawCounts(&strip, 1)
	}
	for i, r := range read {
		s.read(&f, r, i)
	}
	return nil
}

// base is what the chart has in common with one of spectra.
func (s *FourWay) base() *Spectra {
	return &Spectra{PeriodsS: s.PeriodsS, Each: s.Each, Curves: s.Curves, Counts: s.Counts}
}

// mostSpan is the greatest PSV over the least that is shown: more decades leave no room for
// the others.
const mostSpan = 2000

// layout is the heading and the frame of the chart. Something is there to be drawn.
func (s *FourWay) layout(c draw.Canvas, base *Spectra) (h heading, f frame) {
	lowest, highest := base.extent()
	lowest = max(lowest, highest/mostSpan)
	per := s.Units.PSVInMPS
	f = frame{x: newAxis("period (s)", s.PeriodsS[0], s.PeriodsS[len(s.PeriodsS)-1], true)}
	f.y = inUnit(newAxis("PSV ("+s.Units.PSV+")", lowest/per, highest/per, true), per)
	h = newHeading(c, s.Title, append(slices.Clone(s.Notes), s.unread(&f)...), s.Foot)
	bottom := footRoom + bottomRoom
	if s.Counts != nil {
		bottom += stripRoom + stripGap
	}
	f.Canvas = equalDecades(draw.Crop(c, leftRoom, -rightRoom, bottom, -h.room()), &f)
	return h, f
}

// isOn reports whether a reading lies in a frame.
func (r *Reading) isOn(f *frame) bool {
	return f.x.has(r.PeriodS) && f.isShown(r.PSV) && f.y.has(r.PSV)
}

// readOn are the readings that lie in a frame.
func (s *FourWay) readOn(f *frame) (out []*Reading) {
	for i := range s.Readings {
		if s.Readings[i].isOn(f) {
			out = append(out, &s.Readings[i])
		}
	}
	return out
}

// unread is a note on the other ones.
func (s *FourWay) unread(f *frame) []string {
	var names []string
	for i := range s.Readings {
		if !s.Readings[i].isOn(f) {
			names = append(names, s.Readings[i].Name)
		}
	}
	return notShown(names)
}

// inUnit is an axis of values in SI whose ticks are round in a unit.
func inUnit(a axis, per float64) axis {
	a.from, a.to = a.from*per, a.to*per
	for i := range a.ticks {
		a.ticks[i].at *= per
	}
	return a
}

// equalDecades is the greatest part of an area, at its top left, in which decades of both
// axes are equally long.
func equalDecades(c draw.Canvas, f *frame) draw.Canvas {
	across, up := math.Log10(f.x.to/f.x.from), math.Log10(f.y.to/f.y.from)
	size := c.Size()
	decade := min(size.X/vg.Length(across), size.Y/vg.Length(up))
	c.Max.X = c.Min.X + decade*vg.Length(across)
	c.Min.Y = c.Max.Y - decade*vg.Length(up)
	return c
}

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

// write names a main line, along it at its upper end.
func (d *diagonal) write(f *frame) {
	style := writing(noteSize, quiet)
	words := d.name + " " + d.unit
	length := style.Width(words)
	upper, lower, ok := d.within(f)
	if !ok || !d.isMain || upper.Y-lower.Y < 2*length {
		return
	}
	const margin = 6
	run := vg.Length(math.Sqrt2 / 2)
	at := vg.Point{X: upper.X + margin, Y: upper.Y - margin}
	style.Rotation = -math.Pi / 4
	if d.rises {
		style.Rotation = math.Pi / 4
		at = vg.Point{X: upper.X - margin - length*run, Y: upper.Y - margin - length*run}
	}
	along := vg.Point{X: run, Y: run}
	if !d.rises {
		along.Y = -run
	}
	f.behind(at, along, length)
	f.FillText(style, at, words)
}

// behind lays paper behind words of a length that begin at a point and go a way.
func (f *frame) behind(at, along vg.Point, length vg.Length) {
	half := vg.Point{X: -along.Y, Y: along.X}.Scale(noteSize * 0.6)
	end := at.Add(along.Scale(length))
	f.FillPolygon(paper, []vg.Point{at.Add(half), end.Add(half), end.Sub(half), at.Sub(half)})
}

// read marks a point, with the lines on which its three values are read, and writes these,
// each reading above the one before.
func (s *FourWay) read(f *frame, r *Reading, nth int) {
	sd, psv, psa := r.Values()
	at := f.point(r.PeriodS, r.PSV)
	line := draw.LineStyle{Color: mark, Width: 0.8, Dashes: []vg.Length{3, 2}}
	for _, piece := range f.ClipLinesXY(
		[]vg.Point{{X: at.X, Y: f.Min.Y}, at}, []vg.Point{{X: f.Min.X, Y: at.Y}, at},
		[]vg.Point{at, f.point(f.x.to, sd*2*math.Pi/f.x.to)}, []vg.Point{at, f.point(f.x.from, psa*standardGravity*f.x.from/(2*math.Pi))},
	) {
		f.StrokeLines(line, piece)
	}
	f.DrawGlyph(draw.GlyphStyle{Color: mark, Radius: 2.4, Shape: draw.CircleGlyph{}}, at)
	words := []string{r.Name,
		fmt.Sprintf("SD %s %s", three(sd/s.Units.SDInM), s.Units.SD),
		fmt.Sprintf("PSV %s %s", three(psv/s.Units.PSVInMPS), s.Units.PSV),
		fmt.Sprintf("PSA %s g", three(psa))}
	style := writing(labelSize, mark)
	for i, w := range words {
		f.FillText(style, vg.Point{X: f.Max.X + 8, Y: f.Min.Y + lineRoom*vg.Length((nth+1)*len(words)-i)}, shorten(style, w, rightRoom-10))
	}
}

// three writes a number in three significant digits.
func three(x float64) string { return strconv.FormatFloat(x, 'g', 3, 64) }
