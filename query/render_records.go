package query

import (
	"bytes"
	"fmt"
	"io"
	"strconv"
	"strings"
)

// Write renders the list: all fields as CSV and JSON, those that fit a screen
// as a table. The error is a UsageError for an unknown format and otherwise one
// of w.
func (a *RecordsAnswer) Write(w io.Writer, format Format) error {
	return writeRows(w, "records", format, a.Rows, a.table, recordsHeader, (*RecordRow).csv)
}

// rows is the table of the answer.
func (a *RecordsAnswer) rows() table {
	t := table{columns: []column{
		{name: "record", isWord: true}, {name: "component", isWord: true},
		{name: "event", isWord: true}, {name: "magnitude"}, {name: "station", isWord: true}, {name: "distance", unit: "km"},
		{name: "siting", isWord: true}, {name: "step", unit: "s"}, {name: "samples"},
		{name: "PGA", unit: "g"}, {name: "PGV", unit: "m/s"}, {name: "PGD", unit: "m"}, {name: "format", isWord: true},
	}}
	for i := range a.Rows {
		r := &a.Rows[i]
		t.add(r.Record, r.Component, orDash(r.Event), shortOrDash(r.Magnitude), orDash(r.Station), figure(orNaN(r.DistanceKM)),
			r.Siting, shortest(r.StepS), strconv.Itoa(r.Samples), figure(r.PGA), figure(r.PGV), figure(r.PGD), r.Format)
	}
	return t
}

func (a *RecordsAnswer) table() []byte {
	t := a.rows()
	text := append(t.appendTo(nil), a.findings()...)
	if remarks := a.Selection.Remarks(); remarks != "" {
		text = append(append(text, '\n'), remarks...)
	}
	return text
}

// mostFindings is how many rows' findings follow a table: more are for a file.
const mostFindings = 20

// findings are the sentences of the rows of which something was found, "" for none.
func (a *RecordsAnswer) findings() string {
	var b strings.Builder
	with := 0
	for i := range a.Rows {
		r := &a.Rows[i]
		if len(r.Quality) == 0 {
			continue
		}
		if with++; with <= mostFindings {
			fmt.Fprintf(&b, "  %s %s: %s\n", r.Record, r.Component, r.qualityWords())
		}
	}
	switch {
	case with == 0:
		return ""
	case with > mostFindings:
		fmt.Fprintf(&b, "  and in %d more: --format csv or json has all\n", with-mostFindings)
	}
	return "\nFound in " + countOf(with, "row", "rows") + ":\n" + b.String()
}

// recordsHeader names the columns as the fields of JSON are named.
var recordsHeader = []string{
	"record", "event", "event_name", "origin", "magnitude", "magnitude_type", "depth_km", "event_latitude", "event_longitude",
	"network", "station", "station_name", "station_latitude", "station_longitude", "vs30_m_s", "site_class_en1998", "site_class_nehrp",
	"distance_km", "epicentral_km", "hypocentral_km", "rupture_km", "jb_km",
	"instrument", "siting", "component", "channel", "axis", "azimuth_deg", "start", "dt_s", "samples", "duration_s",
	"pga_g", "pgv_m_s", "pgd_m",
	"arias_m_s", "cav_m_s", "cav_standardised_m_s", "d5_75_s", "d5_95_s", "bracketed_s", "rms_m_s2", "mean_period_s", "spectrum_intensity_m",
	"unit", "processing", "low_cut_hz", "high_cut_hz", "usable_from_s", "usable_to_s", "format", "source", "line", "sha256", "warnings", "quality", "duplicate_of",
}

// csv is the list as one text, for few rows.
func (a *RecordsAnswer) csv() []byte {
	var b bytes.Buffer // which has no errors
	_ = csvLines(&b, a.Rows, recordsHeader, (*RecordRow).csv)
	return b.Bytes()
}

// csv writes the cells in the order of recordsHeader; an unknown is an empty
// cell, warnings are joined with "; ".
func (r *RecordRow) csv(l *csvLine) {
	l.words(r.Record, orEmpty(r.Event), orEmpty(r.EventName), timeText(r.Origin))
	l.number(orNaN(r.Magnitude))
	l.word(orEmpty(r.MagnitudeType))
	l.number(orNaN(r.DepthKM))
	l.number(orNaN(r.EventLatitude))
	l.number(orNaN(r.EventLongitude))
	l.words(orEmpty(r.Network), orEmpty(r.Station), orEmpty(r.StationName))
	for _, x := range []*float64{r.StationLatitude, r.StationLongitude, r.Vs30MPS} {
		l.number(orNaN(x))
	}
	l.words(orEmpty(r.SiteClassEN1998), orEmpty(r.SiteClassNEHRP))
	for _, x := range []*float64{r.DistanceKM, r.EpicentralKM, r.HypocentralKM, r.RuptureKM, r.JoynerBooreKM} {
		l.number(orNaN(x))
	}
	l.words(orEmpty(r.Instrument), r.Siting, r.Component, orEmpty(r.Channel), r.Axis)
	l.number(orNaN(r.AzimuthDeg))
	l.word(timeText(r.Start))
	l.number(r.StepS)
	l.integer(r.Samples)
	for _, x := range []float64{r.DurationS, r.PGA, r.PGV, r.PGD} {
		l.number(x)
	}
	for _, x := range r.intensities() {
		l.number(orNaN(*x))
	}
	l.words(orEmpty(r.Unit), orEmpty(r.Processing))
	l.number(orNaN(r.LowCutHz))
	l.number(orNaN(r.HighCutHz))
	l.number(orNaN(r.UsableFromS))
	l.number(orNaN(r.UsableToS))
	l.words(r.Format, r.Source, lineText(r.Line), r.SHA256, strings.Join(r.Warnings, "; "), r.qualityWords(), orEmpty(r.DuplicateOf))
	l.end()
}

// qualityWords are the findings, each as "flag: sentence", of the conditioned motion as
// "flag behind the recipe: sentence", joined with "; ".
func (r *RecordRow) qualityWords() string {
	words := make([]string, len(r.Quality))
	for i := range r.Quality {
		words[i] = r.Quality[i].text()
	}
	return strings.Join(words, "; ")
}

func (f *FindingRow) text() string {
	if f.Of == ofConditioned {
		return f.Flag + " behind the recipe: " + f.Words
	}
	return f.Flag + ": " + f.Words
}

// Write renders the list. The error is a UsageError for an unknown format and
// otherwise one of w.
func (a *RejectionsAnswer) Write(w io.Writer, format Format) error {
	return writeRows(w, "rejections", format, a.Rows, a.table, []string{"source", "line", "cause", "sha256"}, (*RejectionRow).csv)
}

// rows is the table of the answer.
func (a *RejectionsAnswer) rows() table {
	t := table{columns: []column{{name: "source", isWord: true}, {name: "line"}, {name: "cause", isWord: true}}}
	for i := range a.Rows {
		r := &a.Rows[i]
		line := lineText(r.Line)
		if line == "" {
			line = "-"
		}
		t.add(r.Source, line, r.Cause)
	}
	return t
}

func (a *RejectionsAnswer) table() []byte {
	t := a.rows()
	return t.appendTo(nil)
}

func (r *RejectionRow) csv(l *csvLine) {
	l.words(r.Source, lineText(r.Line), r.Cause, orEmpty(r.SHA256))
	l.end()
}
