package query

import (
	"fmt"
	"io"
	"strconv"
	"strings"
)

// Write renders what is known: as a table for people, in their units, and in SI as JSON, and as
// CSV in the rows of a RecordsAnswer. The error is a UsageError for another format and otherwise
// one of w.
func (a *RecordAnswer) Write(w io.Writer, format Format, units Units) error {
	rows := RecordsAnswer{Rows: a.Rows}
	return answer{"record", func() []byte { return a.table(units) }, rows.csv, a.object}.write(w, format)
}

// Remarks are the lines on what is lacking.
func (a *RecordAnswer) Remarks() string {
	var b strings.Builder
	for _, l := range a.Lacking {
		fmt.Fprintf(&b, "lacking: %s: %s\n", l.Component, printable(l.Reason))
	}
	return b.String()
}

func (a *RecordAnswer) table(units Units) []byte {
	first := &a.Rows[0]
	text := fmt.Appendf(nil, "Record %s\n\n", printable(a.Code))
	for _, line := range [][2]string{
		{"event", first.eventWords()}, {"station", first.stationWords()}, {"distance", first.distanceWords()}, {"recipe", a.Recipe},
	} {
		if line[1] != "" {
			text = fmt.Appendf(text, "%-9s %s\n", line[0], line[1])
		}
	}
	text = append(text, '\n')
	text = a.deliveredTable().appendTo(text)
	text = append(text, '\n')
	text = a.measuresTable(units).appendTo(text)
	text = append(text, '\n')
	for i := range a.Conditioned {
		text = fmt.Appendf(text, "computed: %s: %s\n", a.Conditioned[i].Component, a.Conditioned[i].words())
	}
	for i := range a.Conditioned { // of pairs are those of their components
		text = append(text, a.row(a.Conditioned[i].Component).remarks()...)
	}
	return append(text, a.Remarks()...)
}

// remarks are the lines on where a row comes from and what was found of it.
func (r *RecordRow) remarks() string {
	var b strings.Builder
	line := func(what, words string) { fmt.Fprintf(&b, "%s: %s: %s\n", what, r.Component, printable(words)) }
	source := r.Source
	if r.Line != nil {
		source += ":" + lineText(r.Line)
	}
	line("source", source+" ("+r.Format+")")
	for _, w := range r.Warnings {
		line("warning", w)
	}
	if len(r.Quality) > 0 {
		line("found", r.qualityWords())
	}
	if r.DuplicateOf != nil {
		line("statistics take instead", *r.DuplicateOf)
	}
	return b.String()
}

// deliveredTable is how the components were delivered, and the band that is usable.
func (a *RecordAnswer) deliveredTable() *table {
	t := &table{columns: []column{
		{name: "component", isWord: true}, {name: "channel", isWord: true}, {name: "azimuth", unit: "deg"}, {name: "start", isWord: true},
		{name: "step", unit: "s"}, {name: "samples"}, {name: "length", unit: "s"}, {name: "unit", isWord: true}, {name: "processing", isWord: true},
		{name: "low cut", unit: "Hz"}, {name: "high cut", unit: "Hz"}, {name: "usable from", unit: "s"}, {name: "to", unit: "s"},
	}}
	for i := range a.Rows {
		r := &a.Rows[i]
		t.add(r.Component, orDash(r.Channel), shortOrDash(r.AzimuthDeg), orDash(orNull(timeText(r.Start))), shortest(r.StepS), strconv.Itoa(r.Samples), figure(r.DurationS),
			orDash(r.Unit), orDash(r.Processing), figure(orNaN(r.LowCutHz)), figure(orNaN(r.HighCutHz)), figure(orNaN(r.UsableFromS)), figure(orNaN(r.UsableToS)))
	}
	return t
}

// measuresTable is the measures of the motions of which the spectra were computed.
func (a *RecordAnswer) measuresTable(units Units) *table {
	t := &table{columns: []column{
		{name: "component", isWord: true}, {name: "PGA", unit: "g"}, {name: "PGV", unit: "m/s"}, {name: "PGD", unit: "m"},
		{name: "Arias", unit: "m/s"}, {name: "CAV", unit: "m/s"}, {name: "CAV > 0.025 g", unit: "m/s"}, {name: "5-75%", unit: "s"}, {name: "5-95%", unit: "s"},
		{name: "over 0.05 g", unit: "s"}, {name: "rms", unit: "m/s2"}, {name: "mean period", unit: "s"}, {name: "SI", unit: "m"},
	}}
	pers := make([]float64, len(t.columns))
	for i := range t.columns {
		t.columns[i].unit, pers[i] = units.ofLength(t.columns[i].unit)
	}
	for i := range a.Rows {
		r := &a.Rows[i]
		values := []float64{r.PGA, r.PGV, r.PGD}
		for _, x := range r.intensities() {
			values = append(values, orNaN(*x))
		}
		cells := []string{r.Component}
		for k, v := range values {
			cells = append(cells, figure(v/pers[k+1]))
		}
		t.add(cells...)
	}
	return t
}

// object has the rows of query records, and what was computed of.
func (a *RecordAnswer) object() object {
	rows := make([]*RecordRow, len(a.Rows))
	for i := range rows {
		rows[i] = &a.Rows[i]
	}
	conditioned := make([]object, len(a.Conditioned))
	for i, c := range a.Conditioned {
		conditioned[i] = object{{"component", c.Component}, {"is_conditioned", c.IsConditioned}, {"dt_s", c.StepS}, {"samples", c.Samples}, {"lead_s", c.LeadS}}
	}
	lacking := make([]object, len(a.Lacking))
	for i, l := range a.Lacking {
		lacking[i] = object{{"component", l.Component}, {"reason", l.Reason}}
	}
	return object{{"record", a.Code}, {"recipe", a.Recipe}, {"components", rows}, {"computed_of", conditioned}, {"lacking", lacking}}
}
