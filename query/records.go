package query

import (
	"context"
	"errors"
	"math"
	"slices"
	"time"

	"swaybook/db"
)

// RecordsQuestion asks which components a store holds.
type RecordsQuestion struct {
	Selection // component: ComponentRecorded, siting: SitingAll by default
}

// RecordRow describes one held component, or a pair over all directions. Nil
// fields are unknown.
type RecordRow struct {
	Record            string   `json:"record"`
	Event             *string  `json:"event"`
	EventName         *string  `json:"event_name"`
	Origin            *string  `json:"origin"` // UTC, RFC 3339
	Magnitude         *float64 `json:"magnitude"`
	MagnitudeType     *string  `json:"magnitude_type"`
	DepthKM           *float64 `json:"depth_km"`
	EventLatitude     *float64 `json:"event_latitude"`
	EventLongitude    *float64 `json:"event_longitude"`
	Network           *string  `json:"network"`
	Station           *string  `json:"station"`
	StationName       *string  `json:"station_name"`
	StationLatitude   *float64 `json:"station_latitude"`
	StationLongitude  *float64 `json:"station_longitude"`
	Vs30MPS           *float64 `json:"vs30_m_s"`
	SiteClassEN1998   *string  `json:"site_class_en1998"`
	SiteClassNEHRP    *string  `json:"site_class_nehrp"`
	DistanceKM        *float64 `json:"distance_km"` // the best of the following, see db.Distances
	EpicentralKM      *float64 `json:"epicentral_km"`
	HypocentralKM     *float64 `json:"hypocentral_km"`
	RuptureKM         *float64 `json:"rupture_km"`
	JoynerBooreKM     *float64 `json:"jb_km"`
	Instrument        *string  `json:"instrument"`
	Siting            string   `json:"siting"`
	Component         string   `json:"component"`
	Channel           *string  `json:"channel"`
	Axis              string   `json:"axis"` // "horizontal", "vertical" or "unknown"
	AzimuthDeg        *float64 `json:"azimuth_deg"`
	Start             *string  `json:"start"` // UTC, RFC 3339
	StepS             float64  `json:"dt_s"`
	Samples           int      `json:"samples"`
	DurationS         float64  `json:"duration_s"` // first sample to last
	PGA               float64  `json:"pga_g"`
	PGV               float64  `json:"pgv_m_s"`
	PGD               float64  `json:"pgd_m"`
	Arias             *float64 `json:"arias_m_s"`
	CAV               *float64 `json:"cav_m_s"`
	StandardisedCAV   *float64 `json:"cav_standardised_m_s"`
	Significant575    *float64 `json:"d5_75_s"`
	Significant595    *float64 `json:"d5_95_s"`
	Bracketed         *float64 `json:"bracketed_s"`
	RMS               *float64 `json:"rms_m_s2"`
	MeanPeriod        *float64 `json:"mean_period_s"`
	SpectrumIntensity *float64 `json:"spectrum_intensity_m"`
	Unit              *string  `json:"unit"` // of the file's numbers
	Processing        *string  `json:"processing"`
	LowCutHz          *float64 `json:"low_cut_hz"`
	HighCutHz         *float64 `json:"high_cut_hz"`
	UsableFromS       *float64 `json:"usable_from_s"`
	UsableToS         *float64 `json:"usable_to_s"` // null: no filter is known to end it
	Format            string   `json:"format"`
	Source            string   `json:"source"`
	Line              *int     `json:"line"`
	SHA256            string   `json:"sha256"`
	Warnings          []string `json:"warnings"`
	// Quality is what was found of the component as it was delivered, and behind the recipe.
	Quality []FindingRow `json:"quality"`
	// DuplicateOf is the record from which statistics take the motion instead.
	DuplicateOf *string `json:"duplicate_of"`
}

// FindingRow is one thing that is wrong with a component: the value measured and the bound
// that it is beyond, of a share without unit, else in s.
type FindingRow struct {
	Flag  string  `json:"flag"`
	Of    string  `json:"of"` // "delivered" or "conditioned"
	Value float64 `json:"value"`
	Bound float64 `json:"bound"`
	Words string  `json:"words"`
}

// RecordsAnswer lists components in the order of record code and role.
type RecordsAnswer struct {
	Selection SelectionReport
	Rows      []RecordRow
}

// Ask answers the question from one snapshot of the store. Where nothing is
// selected the error is an EmptyError, and the answer an empty list that can be
// written all the same.
func (q RecordsQuestion) Ask(ctx context.Context, store *db.Store) (*RecordsAnswer, error) {
	q, err := q.withDefaults()
	if err != nil {
		return nil, err
	}
	answer := &RecordsAnswer{}
	err = view(ctx, store, &q.Selection, func(snapshot *db.Snapshot) error {
		picked, err := pick(ctx, snapshot, q.Selection, db.AllDetails)
		if picked == nil {
			return err
		}
		answer.Selection = picked.report
		for i := range picked.motions {
			answer.Rows = append(answer.Rows, rowOf(&picked.motions[i]))
		}
		return err
	})
	return answer, err
}

func (q RecordsQuestion) withDefaults() (RecordsQuestion, error) {
	var err error
	q.Selection, err = q.ofEverything().withDefaults(ComponentRecorded, SitingAll, storedComponents)
	return q, err
}

func rowOf(m *motion) RecordRow {
	row := recordRow(m.members[0])
	a := m.attributes()
	for i, into := range row.intensities() {
		*into = knownOrNull(*intensitiesOf(&a)[i])
	}
	row.DuplicateOf = orNull(m.versionOf)
	if m.isRotated() {
		row.takePair(m)
	}
	return row
}

// intensities are the fields of the measures beside the peaks, in the order of
// intensitiesOf.
func (r *RecordRow) intensities() []**float64 {
	return []**float64{
		&r.Arias, &r.CAV, &r.StandardisedCAV, &r.Significant575, &r.Significant595, &r.Bracketed, &r.RMS, &r.MeanPeriod, &r.SpectrumIntensity,
	}
}

// takePair makes the row of a pair's first component that of the pair: numbers
// as an expression sees them, but for the length, which is that of the motion, the
// longer one; and texts of both.
func (r *RecordRow) takePair(m *motion) {
	second := recordRow(m.members[1])
	a := m.attributes()
	r.Component, r.Axis, r.AzimuthDeg, r.Line = a.Component, a.Axis, nil, nil
	r.StepS, r.Samples, r.DurationS = a.StepS, max(r.Samples, second.Samples), max(r.DurationS, second.DurationS)
	r.PGA, r.PGV, r.PGD = a.PGA, a.PGV, a.PGD
	r.LowCutHz, r.HighCutHz = knownOrNull(a.LowCutHz), knownOrNull(a.HighCutHz)
	r.UsableFromS, r.UsableToS = &a.UsableFromS, finiteOrNull(a.UsableToS)
	r.Channel, r.Unit = orNull(both(orEmpty(r.Channel), orEmpty(second.Channel))), orNull(both(orEmpty(r.Unit), orEmpty(second.Unit)))
	r.Processing, r.Format, r.Source = orNull(a.Processing), a.Format, a.Source
	r.SHA256 = both(r.SHA256, second.SHA256)
	for _, f := range second.Quality {
		if !slices.Contains(r.Quality, f) {
			r.Quality = append(r.Quality, f)
		}
	}
	for _, w := range second.Warnings {
		if !slices.Contains(r.Warnings, w) {
			r.Warnings = append(r.Warnings, w)
		}
	}
}

func finiteOrNull(x float64) *float64 {
	if math.IsInf(x, 0) {
		return nil
	}
	return knownOrNull(x)
}

func knownOrNull(x float64) *float64 {
	if !isKnown(x) {
		return nil
	}
	return &x
}

func recordRow(c *db.HeldComponent) RecordRow {
	event, station := c.Record.Event, c.Record.Station
	if event == nil {
		event = &db.Event{}
	}
	if station == nil {
		station = &db.Station{}
	}
	d := &c.Record.Distances
	k := conditioned(c)
	fromS, toS := k.UsableBand()
	en1998, nehrp := siteClasses(station)
	return RecordRow{
		Record: c.Record.Code,
		Event:  orNull(event.Code), EventName: orNull(event.Name), Origin: timeOrNull(event.Origin),
		Magnitude: event.Magnitude, MagnitudeType: orNull(event.MagnitudeType), DepthKM: event.DepthKM,
		EventLatitude: event.LatitudeDeg, EventLongitude: event.LongitudeDeg,
		Network: orNull(station.Network), Station: orNull(station.Code), StationName: orNull(station.Name),
		StationLatitude: station.LatitudeDeg, StationLongitude: station.LongitudeDeg, Vs30MPS: station.Vs30MPS,
		SiteClassEN1998: orNull(en1998), SiteClassNEHRP: orNull(nehrp),
		DistanceKM: d.BestKM, EpicentralKM: d.EpicentralKM, HypocentralKM: d.HypocentralKM, RuptureKM: d.RuptureKM, JoynerBooreKM: d.JoynerBooreKM,
		Instrument: orNull(c.Record.Instrument), Siting: c.Record.Siting,
		Component: c.Role, Channel: orNull(c.Channel), Axis: c.Axis, AzimuthDeg: c.AzimuthDeg, Start: timeOrNull(startOf(c)),
		StepS: c.StepS, Samples: c.Samples, DurationS: duration(c),
		PGA: c.PGA / StandardGravity, PGV: c.PGV, PGD: c.PGD,
		Unit: orNull(c.Unit), Processing: orNull(c.Processing), LowCutHz: knownOrNull(k.LowCutHz), HighCutHz: knownOrNull(k.HighCutHz),
		UsableFromS: &fromS, UsableToS: finiteOrNull(toS),
		Format: c.SourceFormat, Source: c.SourcePath, Line: lineOrNull(c.SourceLine), SHA256: c.SourceSHA256,
		Warnings: append([]string{}, c.Warnings...), Quality: findingRows(c),
	}
}

// The motions in which something is found.
const (
	ofDelivered   = "delivered"
	ofConditioned = "conditioned"
)

func findingRows(c *db.HeldComponent) []FindingRow {
	rows := make([]FindingRow, 0, len(c.Findings))
	add := func(of string, found []db.Finding) {
		for _, f := range found {
			rows = append(rows, FindingRow{Flag: f.Flag, Of: of, Value: f.Value, Bound: f.Bound, Words: f.Words})
		}
	}
	add(ofDelivered, c.Findings)
	if c.Conditioning != nil {
		add(ofConditioned, c.Conditioning.Findings)
	}
	return rows
}

// startOf is the time of the component's first sample, or of its record's where
// that alone is known.
func startOf(c *db.HeldComponent) time.Time {
	if c.Start.IsZero() {
		return c.Record.Start
	}
	return c.Start
}

// RejectionRow is a file, or a channel of it, that could not be stored.
type RejectionRow struct {
	Source string  `json:"source"`
	Line   *int    `json:"line"` // nil where the cause is not in one line
	Cause  string  `json:"cause"`
	SHA256 *string `json:"sha256"` // nil where the file could not be read
}

// RejectionsAnswer lists rejections in the order of path and line.
type RejectionsAnswer struct {
	Rows []RejectionRow
}

// Rejections lists what could not be stored, as of a run where one is given; see
// Selection.AsOf. None is no error.
func Rejections(ctx context.Context, store *db.Store, asOf int64) (*RejectionsAnswer, error) {
	var found []db.Rejection
	err := viewAny(ctx, store, asOf, func(snapshot *db.Snapshot) (err error) {
		found, err = snapshot.Rejections(ctx)
		return err
	})
	if err != nil && !errors.Is(err, db.ErrEmpty) {
		return nil, err
	}
	answer := &RejectionsAnswer{Rows: make([]RejectionRow, len(found))}
	for i, r := range found {
		answer.Rows[i] = RejectionRow{Source: r.Path, Line: lineOrNull(r.Line), Cause: r.Cause, SHA256: orNull(r.SHA256)}
	}
	return answer, nil
}

func orNull(s string) *string {
	if s == "" {
		return nil
	}
	return &s
}

func timeOrNull(at time.Time) *string {
	if at.IsZero() {
		return nil
	}
	s := at.UTC().Format(time.RFC3339Nano)
	return &s
}

func lineOrNull(n int) *int {
	if n == 0 {
		return nil
	}
	return &n
}
