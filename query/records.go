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
	Record            string     `json:"record" parquet:"record"`
	Event             *string    `json:"event" parquet:"event,dict"`
	EventName         *string    `json:"event_name" parquet:"event_name"`
	Origin            *time.Time `json:"origin" parquet:"origin,timestamp(microsecond)"` // UTC
	Magnitude         *float64   `json:"magnitude" parquet:"magnitude"`
	MagnitudeType     *string    `json:"magnitude_type" parquet:"magnitude_type,dict"`
	DepthKM           *float64   `json:"depth_km" parquet:"depth_km" unit:"km"`
	EventLatitude     *float64   `json:"event_latitude" parquet:"event_latitude" unit:"deg"`
	EventLongitude    *float64   `json:"event_longitude" parquet:"event_longitude" unit:"deg"`
	Network           *string    `json:"network" parquet:"network,dict"`
	Station           *string    `json:"station" parquet:"station,dict"`
	StationName       *string    `json:"station_name" parquet:"station_name"`
	StationLatitude   *float64   `json:"station_latitude" parquet:"station_latitude" unit:"deg"`
	StationLongitude  *float64   `json:"station_longitude" parquet:"station_longitude" unit:"deg"`
	Vs30MPS           *float64   `json:"vs30_m_s" parquet:"vs30_m_s" unit:"m/s"`
	SiteClassEN1998   *string    `json:"site_class_en1998" parquet:"site_class_en1998,dict"`
	SiteClassNEHRP    *string    `json:"site_class_nehrp" parquet:"site_class_nehrp,dict"`
	DistanceKM        *float64   `json:"distance_km" parquet:"distance_km" unit:"km"` // the best of the following, see db.Distances
	EpicentralKM      *float64   `json:"epicentral_km" parquet:"epicentral_km" unit:"km"`
	HypocentralKM     *float64   `json:"hypocentral_km" parquet:"hypocentral_km" unit:"km"`
	RuptureKM         *float64   `json:"rupture_km" parquet:"rupture_km" unit:"km"`
	JoynerBooreKM     *float64   `json:"jb_km" parquet:"jb_km" unit:"km"`
	Instrument        *string    `json:"instrument" parquet:"instrument"`
	Siting            string     `json:"siting" parquet:"siting,dict"`
	Component         string     `json:"component" parquet:"component,dict"`
	Channel           *string    `json:"channel" parquet:"channel"`
	Axis              string     `json:"axis" parquet:"axis,dict"` // "horizontal", "vertical" or "unknown"
	AzimuthDeg        *float64   `json:"azimuth_deg" parquet:"azimuth_deg" unit:"deg"`
	Start             *time.Time `json:"start" parquet:"start,timestamp(microsecond)"` // UTC
	StepS             float64    `json:"dt_s" parquet:"dt_s" unit:"s"`
	Samples           int        `json:"samples" parquet:"samples"`
	DurationS         float64    `json:"duration_s" parquet:"duration_s" unit:"s"` // first sample to last
	PGA               float64    `json:"pga_g" parquet:"pga_g" unit:"g"`
	PGV               float64    `json:"pgv_m_s" parquet:"pgv_m_s" unit:"m/s"`
	PGD               float64    `json:"pgd_m" parquet:"pgd_m" unit:"m"`
	Arias             *float64   `json:"arias_m_s" parquet:"arias_m_s" unit:"m/s"`
	CAV               *float64   `json:"cav_m_s" parquet:"cav_m_s" unit:"m/s"`
	StandardisedCAV   *float64   `json:"cav_standardised_m_s" parquet:"cav_standardised_m_s" unit:"m/s"`
	Significant575    *float64   `json:"d5_75_s" parquet:"d5_75_s" unit:"s"`
	Significant595    *float64   `json:"d5_95_s" parquet:"d5_95_s" unit:"s"`
	Bracketed         *float64   `json:"bracketed_s" parquet:"bracketed_s" unit:"s"`
	RMS               *float64   `json:"rms_m_s2" parquet:"rms_m_s2" unit:"m/s²"`
	MeanPeriod        *float64   `json:"mean_period_s" parquet:"mean_period_s" unit:"s"`
	SpectrumIntensity *float64   `json:"spectrum_intensity_m" parquet:"spectrum_intensity_m" unit:"m"`
	Unit              *string    `json:"unit" parquet:"unit,dict"` // of the file's numbers
	Processing        *string    `json:"processing" parquet:"processing,dict"`
	LowCutHz          *float64   `json:"low_cut_hz" parquet:"low_cut_hz" unit:"Hz"`
	HighCutHz         *float64   `json:"high_cut_hz" parquet:"high_cut_hz" unit:"Hz"`
	UsableFromS       *float64   `json:"usable_from_s" parquet:"usable_from_s" unit:"s"`
	UsableToS         *float64   `json:"usable_to_s" parquet:"usable_to_s" unit:"s"` // null: no filter is known to end it
	Format            string     `json:"format" parquet:"format,dict"`
	Source            string     `json:"source" parquet:"source"`
	Line              *int       `json:"line" parquet:"line"`
	SHA256            string     `json:"sha256" parquet:"sha256"`
	Warnings          []string   `json:"warnings" parquet:"warnings,list"`
	// Quality is what was found of the component as it was delivered, and behind the recipe.
	Quality []FindingRow `json:"quality" parquet:"quality,list"`
	// DuplicateOf is the record from which statistics take the motion instead.
	DuplicateOf *string `json:"duplicate_of" parquet:"duplicate_of"`
}

// FindingRow is one thing that is wrong with a component: the value measured and the bound
// that it is beyond, both in Unit. Rows that say the same are equal: a unit is there once.
type FindingRow struct {
	Flag  string  `json:"flag" parquet:"flag,dict"`
	Of    string  `json:"of" parquet:"of,dict"` // "delivered" or "conditioned"
	Value float64 `json:"value" parquet:"value"`
	Bound float64 `json:"bound" parquet:"bound"`
	Unit  *string `json:"unit" parquet:"unit"` // nil of ratios and counts
	Words string  `json:"words" parquet:"words"`
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
		answer.Rows = make([]RecordRow, 0, len(picked.motions))
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
			rows = append(rows, FindingRow{Flag: f.Flag, Of: of, Value: f.Value, Bound: f.Bound, Unit: unitOfFlag(f.Flag), Words: f.Words})
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

func timeOrNull(at time.Time) *time.Time {
	if at.IsZero() {
		return nil
	}
	at = at.UTC()
	return &at
}

// timeText is in RFC 3339, as in JSON, "" of an unknown one.
func timeText(at *time.Time) string {
	if at == nil {
		return ""
	}
	return at.Format(time.RFC3339Nano)
}

func lineOrNull(n int) *int {
	if n == 0 {
		return nil
	}
	return &n
}
