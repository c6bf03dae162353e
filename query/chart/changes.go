package chart

import (
	"math"
	"slices"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Changes is a chart of statistics of spectra against period before and after something
// happened, above how much each changed, and how many spectra held it up before and after.
type Changes struct {
	Title         string
	Notes         []string
	Foot          string
	Quantity      string // of the ordinates, with its unit
	Before, After string // when
	PeriodsS      []float64
	Pairs         []Pair
	CountsBefore  []int // a period, as CountsAfter
	CountsAfter   []int
}

// Pair is a statistic before and after, of a value a period, NaN for none.
type Pair struct {
	Name          string
	Kind          Kind
	Before, After []float64
}

// ratios are the changes in %.
func (p *Pair) ratios() []float64 {
	out := make([]float64, len(p.After))
	for i := range out {
		out[i] = 100 * (p.After[i]/p.Before[i] - 1)
	}
	return out
}

// changeRoom is the room of the changes.
const changeRoom vg.Length = 76

// base is what the chart has in common with one of spectra.
func (s *Changes) base() *Spectra {
	b := &Spectra{PeriodsS: s.PeriodsS, Counts: s.CountsAfter}
	for _, p := range s.Pairs {
		b.Curves = append(b.Curves, Curve{p.Name, p.Kind, p.Before}, Curve{p.Name, p.Kind, p.After})
	}
	return b
}

// IsEmpty reports whether no value is positive.
func (s *Changes) IsEmpty() bool { return s.base().IsEmpty() }

// Draw draws the chart.
func (s *Changes) Draw(c draw.Canvas) {
	base := s.base()
	lowest, highest := base.extent()
	h := newHeading(c, s.Title, s.Notes, s.Foot)
	h.write(c)
	bottom := footRoom + bottomRoom
	x := newAxis("period (s)", s.PeriodsS[0], s.PeriodsS[len(s.PeriodsS)-1], true)
	upper := frame{x: x, y: newAxis(s.Quantity, lowest, highest, true)}
	upper.Canvas = draw.Crop(c, leftRoom, -rightRoom, bottom+stripRoom+changeRoom+2*stripGap, -h.room())
	lower := frame{x: x, y: s.changeAxis()}
	lower.Canvas = draw.Crop(c, leftRoom, -rightRoom, bottom+stripRoom+stripGap, 0)
	lower.Max.Y = lower.Min.Y + changeRoom
	strip := frame{x: x}
	strip.Canvas = draw.Crop(c, leftRoom, -rightRoom, bottom, 0)
	strip.Max.Y = strip.Min.Y + stripRoom
	s.drawPairs(&upper)
	s.drawChanges(&lower)
	base.drawCounts(&strip, slices.Max(append([]int{1}, s.CountsBefore...)))
	s.drawBefore(&strip)
}

// changeAxis reaches as far down as up, to a tenth of a percent at least.
func (s *Changes) changeAxis() axis {
	most := 0.1
	for _, p := range s.Pairs {
		for i, r := range p.ratios() {
			if !math.IsNaN(r) && !math.IsInf(r, 0) && i < len(s.PeriodsS) {
				most = max(most, math.Abs(r))
			}
		}
	}
	most = stepAbove(most)
	return spanAxis("change (%)", -most, most)
}

// was is the line of what was before.
var was = draw.LineStyle{Color: quiet, Width: 0.9, Dashes: []vg.Length{3, 2}}

func (s *Changes) drawPairs(f *frame) {
	f.grid()
	var names []label
	for _, p := range s.Pairs {
		f.curve(was, s.PeriodsS, p.Before)
		f.curve(styles[p.Kind], s.PeriodsS, p.After)
		if at := f.end(s.PeriodsS, p.Before); at >= 0 {
			names = append(names, label{p.Name + ", " + s.Before, was, f.point(s.PeriodsS[at], p.Before[at])})
		}
		if at := f.end(s.PeriodsS, p.After); at >= 0 {
			names = append(names, label{p.Name + ", " + s.After, styles[p.Kind], f.point(s.PeriodsS[at], p.After[at])})
		}
	}
	drawLabels(f, rightRoom, names)
	f.axes(false)
}

func (s *Changes) drawChanges(f *frame) {
	f.grid()
	zero := f.point(f.x.from, 0).Y
	f.StrokeLine2(draw.LineStyle{Color: quiet, Width: 0.8}, f.Min.X, zero, f.Max.X, zero)
	var names []label
	for _, p := range s.Pairs {
		ratios := p.ratios()
		f.curve(styles[p.Kind], s.PeriodsS, ratios)
		if at := f.end(s.PeriodsS, ratios); at >= 0 {
			names = append(names, label{p.Name, styles[p.Kind], f.point(s.PeriodsS[at], ratios[at])})
		}
	}
	drawLabels(f, rightRoom, names)
	f.axes(false)
}

// drawBefore draws how many counted before, over those after, in their axis.
func (s *Changes) drawBefore(f *frame) {
	values := make([]float64, len(s.CountsBefore))
	for i, n := range s.CountsBefore {
		values[i] = float64(n)
	}
	f.curve(was, s.PeriodsS, values)
}
