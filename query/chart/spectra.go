package chart

import (
	"math"
	"slices"
	"strconv"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Spectra is a chart of many spectra and their statistics against period, above a strip
// that says how many hold up the statistics.
type Spectra struct {
	Title    string
	Notes    []string // lines below the title
	Foot     string   // below the chart
	Quantity string   // of the ordinates, with its unit
	PeriodsS []float64
	IsLinear bool // both axes; else both are logarithmic
	// Each has a value a period, NaN where a spectrum does not count.
	Each   [][]float64
	Band   Region
	Curves []Curve
	Marks  []Mark
	Counts []int // a period
}

// Region lies between two curves, of a value a period; nil for none.
type Region struct{ Low, High []float64 }

// Curve has a value a period, NaN for none.
type Curve struct {
	Name   string
	Kind   Kind
	Values []float64
}

// The room of the parts of the chart.
const (
	rightRoom vg.Length = 92 // of the curves' names
	stripRoom vg.Length = 34
	stripGap  vg.Length = 8
)

// IsEmpty reports whether no value is positive.
func (s *Spectra) IsEmpty() bool {
	_, highest := s.extent()
	return len(s.PeriodsS) == 0 || !(highest > 0)
}

// Draw draws the chart.
func (s *Spectra) Draw(c draw.Canvas) {
	h, f, strip := s.layout(c)
	h.write(c)
	f.grid()
	s.drawEach(&f)
	s.drawCurves(&f, &f)
	f.drawMarks(s.Marks, rightRoom-flagGap)
	f.axes(false)
	s.drawCounts(&strip, 1)
}

// layout is the heading, the frame of the spectra, and that of the counts below it. Something is
// there to be drawn.
func (s *Spectra) layout(c draw.Canvas) (h heading, f, strip frame) {
	lowest, highest := s.extent()
	f = frame{
		x: newAxis("period (s)", s.PeriodsS[0], s.PeriodsS[len(s.PeriodsS)-1], !s.IsLinear),
		y: newAxis(s.Quantity, lowest, highest, !s.IsLinear),
	}
	h = newHeading(c, s.Title, append(slices.Clone(s.Notes), outside(s.Marks, &f.x)...), s.Foot)
	strip = f
	bottom := footRoom + bottomRoom
	f.Canvas = draw.Crop(c, leftRoom, -rightRoom, bottom+stripRoom+stripGap, -h.room())
	f.Max.Y -= f.flagRoom(s.Marks)
	strip.Canvas = draw.Crop(c, leftRoom, -rightRoom, bottom, 0)
	strip.Max.Y = strip.Min.Y + stripRoom
	return h, f, strip
}

// extent is the least positive and the greatest value of all that is drawn. Of single
// spectra, a logarithmic axis shows down to a thousandth of the greatest.
func (s *Spectra) extent() (lowest, highest float64) {
	lowest = math.Inf(1)
	take := func(values []float64) {
		for i, v := range values {
			if v > 0 && !math.IsInf(v, 0) && i < len(s.PeriodsS) {
				lowest, highest = min(lowest, v), max(highest, v)
			}
		}
	}
	for _, curve := range s.Curves {
		take(curve.Values)
	}
	curves := lowest
	for _, values := range s.Each {
		take(values)
	}
	return max(lowest, min(curves, highest/1000)), highest
}

// tolerance is how far a line may lie from its spectrum: half a dot at 300 dots an inch.
const tolerance vg.Length = 0.12

// strokePoints is of how many points a stroke of single spectra is at least: each is an
// element of SVG, and long ones take long to fill.
const strokePoints = 300

// drawEach draws the single spectra, of which only that is drawn which can be seen, and lays
// the band over them. It returns where they lie.
func (s *Spectra) drawEach(f *frame) *cover {
	c := newCover(f.Rectangle, hair)
	f.SetLineStyle(draw.LineStyle{Color: single(len(s.Each)), Width: hair})
	var path vg.Path
	for _, values := range s.Each {
		for _, piece := range f.lines(s.PeriodsS, values) {
			for _, line := range f.ClipLinesXY(f.dash(simplify(piece, tolerance), s.PeriodsS)) {
				for _, seen := range c.add(line) {
					appendLine(&path, seen)
				}
			}
		}
		if len(path) > strokePoints {
			f.Stroke(path)
			path = nil
		}
	}
	if path != nil {
		f.Stroke(path)
	}
	if s.Band.Low != nil {
		f.region(veil, s.PeriodsS, s.Band.Low, s.Band.High)
	}
	return c
}

func appendLine(path *vg.Path, line []vg.Point) {
	path.Move(line[0])
	for _, p := range line[1:] {
		path.Line(p)
	}
}

// drawCurves draws the curves, and their names beside another frame, near where they end.
func (s *Spectra) drawCurves(f, beside *frame) {
	var names []label
	for _, curve := range s.Curves {
		f.curve(styles[curve.Kind], s.PeriodsS, curve.Values)
		if at := f.end(s.PeriodsS, curve.Values); at >= 0 {
			names = append(names, label{words: curve.Name, style: styles[curve.Kind], from: f.point(s.PeriodsS[at], curve.Values[at])})
		}
	}
	drawLabels(beside, rightRoom, names)
}

// end is the position of a curve's last value within the frame, -1 for none.
func (f *frame) end(xs, ys []float64) int {
	for i := len(xs) - 1; i >= 0; i-- {
		if f.x.has(xs[i]) && f.isShown(ys[i]) && f.y.has(ys[i]) {
			return i
		}
	}
	return -1
}

// drawCounts draws how many spectra count at each period, on an axis that reaches up to a
// number at least.
func (s *Spectra) drawCounts(f *frame, most int) {
	values := make([]float64, len(s.Counts))
	for i, n := range s.Counts {
		most, values[i] = max(most, n), float64(n)
	}
	f.y = axis{to: float64(most), label: "count", ticks: []tick{{0, "0", true}, {float64(most), strconv.Itoa(most), true}}}
	zero := make([]float64, len(values))
	f.grid()
	f.region(shade, s.PeriodsS, zero, values)
	f.curve(draw.LineStyle{Color: deep, Width: 0.8}, s.PeriodsS, values)
	f.axes(true)
}
