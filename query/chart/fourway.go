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

// IsEmpty reports whether no value is positive.
func (s *FourWay) IsEmpty() bool { return s.base().IsEmpty() }

// Draw draws the chart.
func (s *FourWay) Draw(c draw.Canvas) {
	base := s.base()
	h, f := s.layout(c, base)
	h.write(c)
	f.grid()
	diagonals := s.diagonals(&f)
	for i := range diagonals {
		diagonals[i].draw(&f)
	}
	each := base.drawEach(&f)
	read := s.readOn(&f)
	taken := s.taken(&f, read)
	for i := range diagonals {
		diagonals[i].write(&f, each, taken)
	}
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
	c.Max.X = c.Min.X + vg.Length(float64(decade)*across)
	c.Min.Y = c.Max.Y - vg.Length(float64(decade)*up)
	return c
}

// lines are those on which the three values of a reading are read.
func (r *Reading) lines(f *frame) [][]vg.Point {
	sd, _, psa := r.Values()
	at := f.point(r.PeriodS, r.PSV)
	return f.ClipLinesXY(
		[]vg.Point{{X: at.X, Y: f.Min.Y}, at}, []vg.Point{{X: f.Min.X, Y: at.Y}, at},
		[]vg.Point{at, f.point(f.x.to, sd*2*math.Pi/f.x.to)}, []vg.Point{at, f.point(f.x.from, psa*standardGravity*f.x.from/(2*math.Pi))},
	)
}

// read marks a point, with its lines, and writes the three values, each reading above the one
// before.
func (s *FourWay) read(f *frame, r *Reading, nth int) {
	sd, psv, psa := r.Values()
	at := f.point(r.PeriodS, r.PSV)
	f.StrokeLines(draw.LineStyle{Color: mark, Width: 0.8, Dashes: []vg.Length{3, 2}}, r.lines(f)...)
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
