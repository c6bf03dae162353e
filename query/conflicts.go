package query

import (
	"context"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"time"

	"swaybook/db"
	"swaybook/pipeline/geodesy"
)

// ConflictRow is a value that somebody states and that is not taken, because
// somebody who comes first states another.
type ConflictRow struct {
	Subject   string  `json:"subject"` // "event", "station" or "record"
	Code      string  `json:"code"`
	Attribute string  `json:"attribute"`
	Taken     string  `json:"taken"`
	TakenFrom string  `json:"taken_from"` // "catalogue", "metadata", "computed" or "header"
	TakenFile *string `json:"taken_file"`
	Other     string  `json:"other"`
	OtherFrom string  `json:"other_from"`
	OtherFile *string `json:"other_file"`
}

// ConflictsAnswer lists conflicts by subject, code and attribute.
type ConflictsAnswer struct {
	Rows []ConflictRow
}

// Conflicts lists what is stated of events, stations and records and differs from
// what is taken by more than statements of one fact do, as of a run where one is given; see
// Selection.AsOf. None is no error.
func Conflicts(ctx context.Context, store *db.Store, asOf int64) (*ConflictsAnswer, error) {
	answer := &ConflictsAnswer{}
	err := view(ctx, store, &Selection{AsOf: asOf}, func(snapshot *db.Snapshot) error {
		disputed, err := snapshot.Disputed(ctx)
		if err != nil {
			return err
		}
		for _, d := range disputed {
			answer.add(d)
		}
		scaled, err := snapshot.ScaledVersions(ctx, scaleShare)
		for i := range scaled {
			answer.addScaled(&scaled[i])
		}
		return err
	})
	return answer, err
}

// scaleShare is how much larger one version of a motion may be than another before both
// cannot be right: processing changes amplitudes by less (common practice).
const scaleShare = 0.1

// addScaled lists versions of one motion that differ by a factor: one has a wrong unit or
// scale, and statistics take one of them.
func (a *ConflictsAnswer) addScaled(v *db.ScaledVersions) {
	a.Rows = append(a.Rows, ConflictRow{
		Subject: db.SubjectRecord, Code: v.FirstCode, Attribute: "amplitude of " + v.Role, Taken: "1", TakenFrom: db.ByHeader, TakenFile: orNull(v.FirstPath),
		Other: fmt.Sprintf("%.4g times, in version %s", math.Abs(v.Scale), v.SecondCode), OtherFrom: db.ByHeader, OtherFile: orNull(v.SecondPath),
	})
}

func (a *ConflictsAnswer) add(d db.Disputed) {
	taken := d.Statements[0]
	shown := map[string]bool{}
	for _, s := range d.Statements[1:] {
		if shown[s.Value] || agree(d, taken.Value, s.Value) {
			continue
		}
		shown[s.Value] = true
		row := ConflictRow{
			Subject: d.Kind, Code: d.Code, Attribute: d.Attribute, Taken: taken.Value, TakenFrom: taken.By, TakenFile: orNull(taken.Source),
			Other: s.Value, OtherFrom: s.By, OtherFile: orNull(s.Source),
		}
		if d.Attribute == db.AttributeCode {
			row.TakenFrom, row.OtherFrom = "association", "association"
		}
		a.Rows = append(a.Rows, row)
	}
}

// scalesApart is how far magnitudes of one earthquake on two scales may lie apart:
// the scales measure different things, but were made to meet.
const scalesApart = 1.0

// agree reports whether two values of an attribute state the same within what
// networks round and round off.
//
// No source defines the limits; they are common practice.
func agree(d db.Disputed, a, b string) bool {
	switch d.Attribute {
	case db.AttributeName:
		return true // names are spelt in many ways and decide nothing
	case db.AttributeIdentifier, db.AttributeCode, db.AttributeSiteClass:
		return a == b || d.Attribute == db.AttributeIdentifier && schemeOf(a) != schemeOf(b)
	case db.AttributeOriginTime:
		at, _ := time.Parse(time.RFC3339Nano, a)
		other, _ := time.Parse(time.RFC3339Nano, b)
		return at.Sub(other).Abs() <= time.Second
	case db.AttributePosition:
		limitKM := 1.0
		if d.Kind == db.SubjectStation {
			limitKM = 0.1
		}
		return apartKM(a, b) <= limitKM
	case db.AttributeMagnitude:
		m, kind, _ := strings.Cut(a, " ")
		n, otherKind, _ := strings.Cut(b, " ")
		if kind != otherKind && kind != "" && otherKind != "" {
			return within(m, n, scalesApart, 0)
		}
		return within(m, n, 0.05, 0)
	case db.AttributeDepth:
		return within(a, b, 1, 0)
	case db.AttributeElevation:
		return within(a, b, 10, 0)
	case db.AttributeVs30:
		return within(a, b, 0, 0.01)
	}
	return within(a, b, 1, 0.02) // distances
}

func schemeOf(identifier string) string {
	scheme, _, _ := strings.Cut(identifier, ":")
	return scheme
}

// within reports whether two numbers differ by no more than a limit, or than a
// share of the first.
func within(a, b string, limit, share float64) bool {
	x, y := statedNumber(a), statedNumber(b)
	// Decimals such as 6.15 and 6.1 are a little more than 0.05 apart as doubles.
	return math.Abs(x-y) <= max(limit, share*math.Abs(x))*(1+1e-9)
}

func statedNumber(s string) float64 {
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		return math.NaN()
	}
	return v
}

// apartKM is the distance of two positions.
func apartKM(a, b string) float64 {
	lat, lon, _ := strings.Cut(a, " ")
	otherLat, otherLon, _ := strings.Cut(b, " ")
	line, err := geodesy.Inverse(statedNumber(lat), statedNumber(lon), statedNumber(otherLat), statedNumber(otherLon))
	if err != nil {
		return math.NaN()
	}
	return line.LengthM / 1000
}

// Write renders the list. The error is a UsageError for an unknown format and
// otherwise one of w.
func (a *ConflictsAnswer) Write(w io.Writer, format Format) error {
	return writeRows(w, "conflicts", format, a.Rows, a.table, conflictsHeader, (*ConflictRow).csv)
}

// rows is the table of the answer.
func (a *ConflictsAnswer) rows() table {
	t := table{columns: []column{
		{name: "subject", isWord: true}, {name: "code", isWord: true}, {name: "attribute", isWord: true},
		{name: "taken", isWord: true}, {name: "from", isWord: true}, {name: "other", isWord: true}, {name: "from", isWord: true},
	}}
	for i := range a.Rows {
		r := &a.Rows[i]
		t.add(r.Subject, r.Code, r.Attribute, r.Taken, fromWords(r.TakenFrom, r.TakenFile), r.Other, fromWords(r.OtherFrom, r.OtherFile))
	}
	return t
}

func (a *ConflictsAnswer) table() []byte {
	t := a.rows()
	return t.appendTo(nil)
}

func fromWords(from string, file *string) string {
	if file == nil || *file == from {
		return from
	}
	return from + " " + *file
}

// conflictsHeader names the columns as the fields of JSON are named.
var conflictsHeader = []string{"subject", "code", "attribute", "taken", "taken_from", "taken_file", "other", "other_from", "other_file"}

func (r *ConflictRow) csv(l *csvLine) {
	l.words(r.Subject, r.Code, r.Attribute, r.Taken, r.TakenFrom, orEmpty(r.TakenFile), r.Other, r.OtherFrom, orEmpty(r.OtherFile))
	l.end()
}
