package query

import (
	"slices"

	"swaybook/query/chart"
)

// FourWay is the spectra of the answer's only role at all dampings of the grid as a four-way
// chart, with what is read at the marks at 5 % damping or, where the grid lacks that, at the
// first. It needs the figure.
func (a *RecordAnswer) FourWay(units Units, marks []chart.Mark) *chart.FourWay {
	sd, _, sdInM := MeasureSD.unitOf(units)
	psv, _, psvInMPS := MeasurePSV.unitOf(units)
	c := &chart.FourWay{
		Title: "Four-way spectra of " + printable(a.Code) + ", component " + a.Rows[0].Component, Notes: append(a.chartNotes(), a.Rows[0].bandWords()+"; grey outside"), Foot: Caution,
		PeriodsS: a.Figure.PeriodsS, Units: chart.FourWayUnits{SD: sd, PSV: psv, SDInM: sdInM, PSVInMPS: psvInMPS},
	}
	c.Each, c.Curves = a.damped(MeasurePSV, 1)
	at := max(0, slices.IndexFunc(c.Curves, func(curve chart.Curve) bool { return curve.Kind == chart.UsuallyDamped }))
	c.Readings = readings(c.PeriodsS, c.Curves[at:min(at+1, len(c.Curves))], marks)
	return c
}
