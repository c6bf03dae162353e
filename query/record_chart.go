package query

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"swaybook/query/chart"
)

// directionKinds are the lines of roles in figures.
var directionKinds = map[string]chart.Kind{
	string(ComponentH1): chart.FirstHorizontal, string(ComponentH2): chart.SecondHorizontal, string(ComponentV): chart.Vertical,
	string(ComponentRotD50): chart.AllDirections, string(ComponentRotD100): chart.AllDirections,
}

// Chart is the record as a page: its traces, how its energy builds up, and its spectra with
// periods marked. It needs the figure, with a trace at least.
func (a *RecordAnswer) Chart(units Units, marks []chart.Mark) *chart.Record {
	c := &chart.Record{
		Title: "Record " + printable(a.Code), Notes: a.chartNotes(), Foot: Caution, Panels: a.panels(units),
	}
	c.FromS, c.ToS, c.Clock = a.clock()
	for i := range a.Figure.Traces {
		c.BuildUps = append(c.BuildUps, a.buildUp(&a.Figure.Traces[i], units))
	}
	c.Spectra = a.pageSpectra()
	c.Spectra.Marks = marks
	c.Sections = []chart.Section{{Title: "Delivered and computed", Lines: a.processingLines()}, {Title: "Quality", Lines: a.qualityLines()}}
	return c
}

func (a *RecordAnswer) chartNotes() []string {
	r := &a.Rows[0]
	var notes []string
	for _, words := range []string{r.eventWords(), r.stationWords(), phrase(r.distanceWords(), "recipe "+a.Recipe)} {
		if words != "" {
			notes = append(notes, words)
		}
	}
	return notes
}

// shownShare is the share of a peak from which on the motion in the pads of filters is shown.
const shownShare = 0.01

// clock is what is shown of the traces: what was delivered, and of what the recipe has put
// before and behind it that in which any quantity reaches a share of its peak.
func (a *RecordAnswer) clock() (fromS, toS float64, words string) {
	fromS, toS = math.Inf(1), math.Inf(-1)
	isCut := false
	for i := range a.Figure.Traces {
		t := &a.Figure.Traces[i]
		first, last := t.shown()
		lead := 0.0
		for _, c := range a.Conditioned {
			if c.Component == t.Component {
				lead = c.LeadS
			}
		}
		r := a.row(t.Component)
		end := t.FromS + t.StepS*float64(len(t.Acceleration)-1)
		from, to := max(t.FromS, min(t.FromS+lead, first)), min(end, max(t.FromS+lead+r.DurationS, last))
		isCut = isCut || from > t.FromS || to < end
		fromS, toS = min(fromS, from), max(toS, to)
	}
	words = "from the first sample delivered"
	if isCut {
		words += fmt.Sprintf("; what is not shown is below %s of the peaks", percentText(shownShare))
	}
	return fromS, toS, words
}

// shown are the times between which any quantity reaches a share of its peak.
func (t *RecordTrace) shown() (fromS, toS float64) {
	g := &t.Ground
	first, last := len(t.Acceleration), -1
	for i, x := range t.Acceleration {
		if math.Abs(x) >= shownShare*math.Abs(g.PGA.Value) || math.Abs(g.Velocity[i]) >= shownShare*math.Abs(g.PGV.Value) || math.Abs(g.Displacement[i]) >= shownShare*math.Abs(g.PGD.Value) {
			first, last = min(first, i), i
		}
	}
	return t.FromS + t.StepS*float64(first), t.FromS + t.StepS*float64(last)
}

// row is that of a role.
func (a *RecordAnswer) row(role string) *RecordRow {
	return &a.Rows[slices.IndexFunc(a.Rows, func(r RecordRow) bool { return r.Component == role })]
}

// panels are acceleration, velocity and displacement.
func (a *RecordAnswer) panels(units Units) []chart.Panel {
	velocity, _, perVelocity := MeasurePSV.unitOf(units)
	length, _, perLength := MeasureSD.unitOf(units)
	panels := []chart.Panel{{Quantity: "acceleration", Unit: "g"}, {Quantity: "velocity", Unit: velocity}, {Quantity: "displacement", Unit: length}}
	for i := range a.Figure.Traces {
		t := &a.Figure.Traces[i]
		g := &t.Ground
		for k, of := range []struct {
			values []float64
			peak   [2]float64 // value, time
			per    float64
		}{
			{t.Acceleration, [2]float64{g.PGA.Value, g.PGA.AtS}, StandardGravity},
			{g.Velocity, [2]float64{g.PGV.Value, g.PGV.AtS}, perVelocity},
			{g.Displacement, [2]float64{g.PGD.Value, g.PGD.AtS}, perLength},
		} {
			panels[k].Traces = append(panels[k].Traces, chart.Trace{
				Name: a.row(t.Component).direction(), FromS: t.FromS, StepS: t.StepS, Values: scaled(of.values, of.per),
				Peak: of.peak[0] / of.per, PeakS: t.FromS + of.peak[1],
			})
		}
	}
	return panels
}

// direction names a component with its azimuth.
func (r *RecordRow) direction() string {
	if r.AzimuthDeg == nil {
		return r.Component
	}
	return fmt.Sprintf("%s, %s°", r.Component, shortest(*r.AzimuthDeg))
}

func (a *RecordAnswer) buildUp(t *RecordTrace, units Units) chart.BuildUp {
	r := a.row(t.Component)
	b := chart.BuildUp{Name: t.Component, Kind: directionKinds[t.Component], FromS: t.FromS, StepS: t.StepS, Shares: t.Shares}
	for _, m := range t.Marks {
		b.Marks = append(b.Marks, chart.BuildUpMark{Share: m.Share, AtS: t.FromS + m.AtS})
	}
	unit, per := units.ofLength("m/s")
	b.Words = []string{
		figure(orNaN(r.Arias)/per) + " " + unit,
		fmt.Sprintf("5–75 %.1f s, 5–95 %.1f s", orNaN(r.Significant575), orNaN(r.Significant595)),
	}
	return b
}

// pageSpectra are PSA of all roles at one damping, or of one role at several.
func (a *RecordAnswer) pageSpectra() chart.RecordSpectra {
	f := a.Figure
	s := chart.RecordSpectra{Quantity: "PSA (g)", PeriodsS: f.PeriodsS}
	if len(f.Spectra) == 0 {
		return s
	}
	const grey = "; grey: outside the usable band"
	s.Title = "Damping " + percentText(f.Spectra[0].Damping) + grey
	if isOfOne := len(a.Rows) == 1; isOfOne {
		s.Title = "Component " + a.Rows[0].Component + grey
		s.Whole, s.Curves = a.damped(MeasurePSA, 1)
		return s
	}
	for i := range f.Spectra {
		x := &f.Spectra[i]
		if x.Component == string(ComponentRotD100) {
			continue // one curve over all directions is enough beside the components
		}
		whole, usable := f.ordinates(x, MeasurePSA, 1)
		s.Whole = append(s.Whole, whole)
		s.Curves = append(s.Curves, chart.Curve{Name: x.Component, Kind: directionKinds[x.Component], Values: usable})
	}
	// The widest line lies below the others.
	slices.SortStableFunc(s.Curves, func(x, y chart.Curve) int {
		return btoi(y.Kind == chart.AllDirections) - btoi(x.Kind == chart.AllDirections)
	})
	return s
}

// ordinates are those of a spectrum in a unit, at all periods and at those that are usable.
func (f *RecordFigure) ordinates(s *RecordSpectrum, m Measure, per float64) (whole, usable []float64) {
	whole, usable = make([]float64, len(s.SD)), make([]float64, len(s.SD))
	for p, sd := range s.SD {
		whole[p] = m.of(sd, omega(f.PeriodsS[p])) / per
		if usable[p] = math.NaN(); s.IsUsable[p] {
			usable[p] = whole[p]
		}
	}
	return whole, usable
}

// damped are the spectra of the answer's only role, damping by damping.
func (a *RecordAnswer) damped(m Measure, per float64) (whole [][]float64, curves []chart.Curve) {
	f := a.Figure
	for i := range f.Spectra {
		s := &f.Spectra[i]
		all, usable := f.ordinates(s, m, per)
		whole = append(whole, all)
		curves = append(curves, chart.Curve{Name: percentText(s.Damping) + " damped", Kind: f.dampingKind(s.Damping), Values: usable})
	}
	return whole, curves
}

// dampingKind is the line of a damping, by how many of the others are lighter.
func (f *RecordFigure) dampingKind(ratio float64) chart.Kind {
	if ratio == usualDamping {
		return chart.UsuallyDamped
	}
	lighter := map[float64]bool{}
	for _, s := range f.Spectra {
		lighter[s.Damping] = s.Damping < ratio && s.Damping != usualDamping
	}
	n := 0
	for _, isLighter := range lighter {
		n += btoi(isLighter)
	}
	return chart.OtherDamping(n)
}

// processingLines say how each role was delivered and what was computed of it.
func (a *RecordAnswer) processingLines() (out []string) {
	for i := range a.Conditioned {
		c := &a.Conditioned[i]
		r := a.row(c.Component)
		corners := ""
		if low, high := orNaN(r.LowCutHz), orNaN(r.HighCutHz); isDefined(low) || isDefined(high) {
			corners = "corners " + figure(low) + " and " + figure(high) + " Hz"
		}
		out = append(out, c.Component+": "+phrase(cmp.Or(orEmpty(r.Processing), "processing unknown"), c.words(), corners, r.bandWords()))
	}
	return out
}

// qualityLines are what was found and what is lacking.
func (a *RecordAnswer) qualityLines() (out []string) {
	for i := range a.Rows {
		r := &a.Rows[i]
		if a.motions[i].isRotated() {
			continue // those of its components
		}
		for _, f := range r.Quality {
			out = append(out, r.Component+": "+printable(f.text()))
		}
		for _, w := range r.Warnings {
			out = append(out, r.Component+": warning: "+printable(w))
		}
		if r.DuplicateOf != nil {
			out = append(out, r.Component+": statistics take "+printable(*r.DuplicateOf)+" instead")
		}
	}
	for _, l := range a.Lacking {
		out = append(out, l.Component+": lacking: "+printable(l.Reason))
	}
	if out == nil {
		out = []string{"nothing was found"}
	}
	return out
}
