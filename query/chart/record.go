package chart

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Record is a page about one record: its traces on one clock, how its energy builds up, its
// spectra, and what is known of it.
type Record struct {
	Title    string
	Notes    []string // lines below the title
	Foot     string   // below the chart
	Clock    string   // what the time counts from
	FromS    float64  // what is shown of the traces
	ToS      float64
	Panels   []Panel
	BuildUps []BuildUp
	Spectra  RecordSpectra
	Sections []Section // beside the spectra
}

// BuildUp is how Arias intensity grows along a trace.
type BuildUp struct {
	Name         string // of the direction
	Kind         Kind
	FromS, StepS float64
	Shares       []float64 // of the whole, by sample
	Marks        []BuildUpMark
	Words        []string // lines beside
}

// BuildUpMark is a share and the time by which it has come, on the clock of FromS.
type BuildUpMark struct{ Share, AtS float64 }

// RecordSpectra are spectra against period, on logarithmic axes.
type RecordSpectra struct {
	Title    string
	Quantity string // of the ordinates, with its unit
	PeriodsS []float64
	Whole    [][]float64 // drawn faint, below the curves
	Curves   []Curve
	Marks    []Mark
}

// Section is some sentences under a heading.
type Section struct {
	Title string
	Lines []string
}

// The heights of the page's parts.
const (
	buildUpRoom vg.Length = 62
	spectraRoom vg.Length = 176
	pageGap     vg.Length = 7
	spectraGap  vg.Length = 74 // for the names of curves
	// sectionsShare is the part of the width that sections take beside spectra.
	sectionsShare = 0.38
)

// IsEmpty reports whether there is no trace.
func (s *Record) IsEmpty() bool { return len(s.Panels) == 0 || !(s.ToS > s.FromS) }

// Draw draws the page.
func (s *Record) Draw(c draw.Canvas) {
	x := spanAxis("time (s) "+s.Clock, s.FromS, s.ToS)
	notes := s.Notes
	if periods := s.Spectra.axis(); periods != nil {
		notes = append(slices.Clone(notes), outside(s.Spectra.Marks, periods)...)
	}
	h := newHeading(c, s.Title, notes, s.Foot)
	h.write(c)
	below := footRoom + bottomRoom + spectraRoom
	s.drawSpectra(draw.Crop(c, leftRoom, 0, footRoom+bottomRoom, 0))
	below += 2*pageGap + bottomRoom
	area := draw.Crop(c, leftRoom, -rightRoom, below, -h.room())
	s.drawBuildUps(draw.Canvas{Canvas: c.Canvas, Rectangle: vg.Rectangle{Min: area.Min, Max: vg.Point{X: area.Max.X, Y: area.Min.Y + buildUpRoom}}}, x)
	area.Min.Y += buildUpRoom + pageGap
	height := (area.Size().Y + pageGap) / vg.Length(len(s.Panels))
	for i := range s.Panels {
		panel := area
		panel.Max.Y = area.Max.Y - height*vg.Length(i)
		panel.Min.Y = panel.Max.Y - height + pageGap
		s.Panels[i].draw(panel, x, false)
	}
}

// drawBuildUps draws the build-ups, with dots at their marks.
func (s *Record) drawBuildUps(c draw.Canvas, x axis) {
	f := frame{Canvas: c, x: x, y: axis{to: 1.03, label: "Arias (%)"}}
	seen := map[float64]bool{}
	for _, b := range s.BuildUps {
		for _, m := range b.Marks {
			if !seen[m.Share] {
				f.y.ticks = append(f.y.ticks, tick{m.Share, three(100 * m.Share), true})
			}
			seen[m.Share] = true
		}
	}
	f.grid()
	step := f.Size().Y / vg.Length(max(1, len(s.BuildUps)))
	for i, b := range s.BuildUps {
		style := styles[b.Kind]
		f.StrokeLines(style, f.columns(b.FromS, b.StepS, b.Shares)...)
		for _, m := range b.Marks {
			f.DrawGlyph(draw.GlyphStyle{Color: tone, Radius: 2, Shape: draw.CircleGlyph{}}, f.point(m.AtS, m.Share))
		}
		at := vg.Point{X: f.Max.X + 6, Y: f.Max.Y - step*vg.Length(i) - labelSize/2}
		f.StrokeLine2(style, at.X, at.Y, at.X+14, at.Y)
		for k, words := range b.Words {
			text := writing(noteSize, ink)
			left := at.X
			if k == 0 {
				text, left = writing(labelSize, tone), at.X+17
				words = b.Name + "  " + words
			}
			f.FillText(text, vg.Point{X: left, Y: at.Y - (labelSize+1)*vg.Length(k)}, shorten(text, words, f.Max.X+rightRoom-2-left))
		}
	}
	f.axes(true)
}

// axis is that of the periods, nil of none.
func (s *RecordSpectra) axis() *axis {
	if len(s.PeriodsS) == 0 {
		return nil
	}
	a := newAxis("period (s)", s.PeriodsS[0], s.PeriodsS[len(s.PeriodsS)-1], true)
	return &a
}

// drawSpectra draws the spectra and, beside them, the sections.
func (s *Record) drawSpectra(c draw.Canvas) {
	c.Max.Y = c.Min.Y + spectraRoom
	sections := c
	sections.Min.X = c.Max.X - (c.Size().X+leftRoom)*sectionsShare
	drawSections(sections, s.Sections)
	c.Max.X = sections.Min.X - spectraGap
	base := Spectra{PeriodsS: s.Spectra.PeriodsS, Each: s.Spectra.Whole, Curves: s.Spectra.Curves}
	lowest, highest := base.extent()
	if !(highest > 0) {
		return
	}
	c.FillText(bold(labelSize, ink), vg.Point{X: c.Min.X, Y: c.Max.Y - labelSize/2}, s.Spectra.Title)
	c.Max.Y -= labelSize + 6
	f := frame{Canvas: c, x: *s.Spectra.axis(), y: newAxis(s.Spectra.Quantity, lowest, highest, true)}
	f.Max.Y -= f.flagRoom(s.Spectra.Marks)
	f.grid()
	base.drawEach(&f)
	base.drawCurves(&f, &f)
	f.drawMarks(s.Spectra.Marks, spectraGap-flagGap)
	f.axes(true)
}

// drawSections writes the sections below each other, as far as there is room.
func drawSections(c draw.Canvas, sections []Section) {
	y := c.Max.Y - labelSize/2
	style := writing(noteSize, ink)
	for _, section := range sections {
		c.FillText(bold(labelSize, ink), vg.Point{X: c.Min.X, Y: y}, section.Title)
		y -= labelSize + 2
		for i, line := range section.Lines {
			for _, words := range wrap(style, line, c.Size().X-4, math.MaxInt) {
				if y < c.Min.Y-bottomRoom+noteSize {
					c.FillText(style, vg.Point{X: c.Min.X, Y: y}, fmt.Sprintf("… and %d more", len(section.Lines)-i))
					return
				}
				c.FillText(style, vg.Point{X: c.Min.X, Y: y}, words)
				y -= noteSize + 1.5
			}
			y -= 1.5
		}
		y -= 4
	}
}
