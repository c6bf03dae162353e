package query

import (
	"math"
	"strings"

	"swaybook/db"
	"swaybook/pipeline/siteclass"
	"swaybook/query/stats"
)

// attributes is what an expression sees of one motion. An unknown number is
// NaN, or noYear; an unknown string is empty. The type has no methods, since an
// expression could call them.
type attributes struct {
	Magnitude         float64 `expr:"magnitude"`
	DistanceKM        float64 `expr:"distance_km"`
	EpicentralKM      float64 `expr:"epicentral_km"`
	HypocentralKM     float64 `expr:"hypocentral_km"`
	RuptureKM         float64 `expr:"rupture_km"`
	JoynerBooreKM     float64 `expr:"jb_km"`
	Vs30MPS           float64 `expr:"vs30_m_s"`
	DepthKM           float64 `expr:"depth_km"`
	EventLatitude     float64 `expr:"event_latitude"`
	EventLongitude    float64 `expr:"event_longitude"`
	StationLatitude   float64 `expr:"station_latitude"`
	StationLongitude  float64 `expr:"station_longitude"`
	StepS             float64 `expr:"dt_s"`
	Samples           int     `expr:"samples"`
	DurationS         float64 `expr:"duration_s"`
	PGA               float64 `expr:"pga_g"`
	PGV               float64 `expr:"pgv_m_s"`
	PGD               float64 `expr:"pgd_m"`
	Arias             float64 `expr:"arias_m_s"`
	CAV               float64 `expr:"cav_m_s"`
	StandardisedCAV   float64 `expr:"cav_standardised_m_s"`
	Significant575    float64 `expr:"d5_75_s"`
	Significant595    float64 `expr:"d5_95_s"`
	Bracketed         float64 `expr:"bracketed_s"`
	RMS               float64 `expr:"rms_m_s2"`
	MeanPeriod        float64 `expr:"mean_period_s"`
	SpectrumIntensity float64 `expr:"spectrum_intensity_m"`
	AzimuthDeg        float64 `expr:"azimuth_deg"`
	LowCutHz          float64 `expr:"low_cut_hz"`
	HighCutHz         float64 `expr:"high_cut_hz"`
	UsableFromS       float64 `expr:"usable_from_s"`
	UsableToS         float64 `expr:"usable_to_s"`
	Year              int     `expr:"year"`

	Record        string `expr:"record"`
	Event         string `expr:"event"`
	EventName     string `expr:"event_name"`
	MagnitudeType string `expr:"magnitude_type"`
	Station       string `expr:"station"`
	Network       string `expr:"network"`
	StationName   string `expr:"station_name"`
	Siting        string `expr:"siting"`
	Instrument    string `expr:"instrument"`
	Component     string `expr:"component"`
	Axis          string `expr:"axis"`
	Format        string `expr:"format"`
	Processing    string `expr:"processing"`
	Source        string `expr:"source"`
	Warnings      string `expr:"warnings"`

	Quality qualityFlags `expr:"quality"`

	SiteClassEN1998 string `expr:"site_class_en1998"`
	SiteClassNEHRP  string `expr:"site_class_nehrp"`
}

// noYear is the year of a record that knows no time.
const noYear = math.MinInt

// numbers lists the attributes that can be unknown, NaN, in the sense of an
// expression: a motion that lacks one which the expression uses is left out.
var numbers = []struct {
	name string
	of   func(*attributes) float64
}{
	{"magnitude", func(a *attributes) float64 { return a.Magnitude }},
	{"distance_km", func(a *attributes) float64 { return a.DistanceKM }},
	{"epicentral_km", func(a *attributes) float64 { return a.EpicentralKM }},
	{"hypocentral_km", func(a *attributes) float64 { return a.HypocentralKM }},
	{"rupture_km", func(a *attributes) float64 { return a.RuptureKM }},
	{"jb_km", func(a *attributes) float64 { return a.JoynerBooreKM }},
	{"vs30_m_s", func(a *attributes) float64 { return a.Vs30MPS }},
	{"depth_km", func(a *attributes) float64 { return a.DepthKM }},
	{"event_latitude", func(a *attributes) float64 { return a.EventLatitude }},
	{"event_longitude", func(a *attributes) float64 { return a.EventLongitude }},
	{"station_latitude", func(a *attributes) float64 { return a.StationLatitude }},
	{"station_longitude", func(a *attributes) float64 { return a.StationLongitude }},
	{"dt_s", func(a *attributes) float64 { return a.StepS }},
	{"samples", func(a *attributes) float64 { return float64(a.Samples) }},
	{"duration_s", func(a *attributes) float64 { return a.DurationS }},
	{"pga_g", func(a *attributes) float64 { return a.PGA }},
	{"pgv_m_s", func(a *attributes) float64 { return a.PGV }},
	{"pgd_m", func(a *attributes) float64 { return a.PGD }},
	{"arias_m_s", func(a *attributes) float64 { return a.Arias }},
	{"cav_m_s", func(a *attributes) float64 { return a.CAV }},
	{"cav_standardised_m_s", func(a *attributes) float64 { return a.StandardisedCAV }},
	{"d5_75_s", func(a *attributes) float64 { return a.Significant575 }},
	{"d5_95_s", func(a *attributes) float64 { return a.Significant595 }},
	{"bracketed_s", func(a *attributes) float64 { return a.Bracketed }},
	{"rms_m_s2", func(a *attributes) float64 { return a.RMS }},
	{"mean_period_s", func(a *attributes) float64 { return a.MeanPeriod }},
	{"spectrum_intensity_m", func(a *attributes) float64 { return a.SpectrumIntensity }},
	{"azimuth_deg", func(a *attributes) float64 { return a.AzimuthDeg }},
	{"low_cut_hz", func(a *attributes) float64 { return a.LowCutHz }},
	{"high_cut_hz", func(a *attributes) float64 { return a.HighCutHz }},
	{"usable_from_s", func(a *attributes) float64 { return a.UsableFromS }},
	{"usable_to_s", func(a *attributes) float64 { return a.UsableToS }},
	{"year", yearOf},
}

// yearOf is NaN where no time is known.
func yearOf(a *attributes) float64 {
	if a.Year == noYear {
		return math.NaN()
	}
	return float64(a.Year)
}

// texts lists the attributes that are strings, "" where unknown.
var texts = []struct {
	name string
	of   func(*attributes) string
}{
	{"record", func(a *attributes) string { return a.Record }},
	{"event", func(a *attributes) string { return a.Event }},
	{"event_name", func(a *attributes) string { return a.EventName }},
	{"magnitude_type", func(a *attributes) string { return a.MagnitudeType }},
	{"station", func(a *attributes) string { return a.Station }},
	{"network", func(a *attributes) string { return a.Network }},
	{"station_name", func(a *attributes) string { return a.StationName }},
	{"siting", func(a *attributes) string { return a.Siting }},
	{"site_class_en1998", func(a *attributes) string { return a.SiteClassEN1998 }},
	{"site_class_nehrp", func(a *attributes) string { return a.SiteClassNEHRP }},
	{"instrument", func(a *attributes) string { return a.Instrument }},
	{"component", func(a *attributes) string { return a.Component }},
	{"axis", func(a *attributes) string { return a.Axis }},
	{"format", func(a *attributes) string { return a.Format }},
	{"processing", func(a *attributes) string { return a.Processing }},
	{"source", func(a *attributes) string { return a.Source }},
	{"warnings", func(a *attributes) string { return a.Warnings }},
}

// attributeDetails says what has to be read of components for an attribute;
// those that are not named are there always.
var attributeDetails = map[string]db.Details{
	"distance_km": db.DetailRecord, "epicentral_km": db.DetailRecord, "hypocentral_km": db.DetailRecord, "rupture_km": db.DetailRecord, "jb_km": db.DetailRecord,
	"vs30_m_s": db.DetailRecord, "station_latitude": db.DetailRecord, "station_longitude": db.DetailRecord,
	"year": db.DetailRecord, "station": db.DetailRecord, "network": db.DetailRecord, "station_name": db.DetailRecord, "site_class_en1998": db.DetailRecord, "site_class_nehrp": db.DetailRecord, "instrument": db.DetailRecord,
	"dt_s": db.DetailMotion, "axis": db.DetailMotion, "azimuth_deg": db.DetailMotion, "duration_s": db.DetailMotion | db.DetailChannel, "samples": db.DetailChannel,
	"pga_g": db.DetailPeaks, "pgv_m_s": db.DetailPeaks, "pgd_m": db.DetailPeaks,
	"arias_m_s": db.DetailMeasures, "cav_m_s": db.DetailMeasures, "cav_standardised_m_s": db.DetailMeasures, "d5_75_s": db.DetailMeasures, "d5_95_s": db.DetailMeasures, "bracketed_s": db.DetailMeasures, "rms_m_s2": db.DetailMeasures, "mean_period_s": db.DetailMeasures, "spectrum_intensity_m": db.DetailMeasures,
	"quality":    db.DetailFindings | db.DetailBand,
	"low_cut_hz": db.DetailBand, "high_cut_hz": db.DetailBand, "usable_from_s": db.DetailBand, "usable_to_s": db.DetailBand,
	"format": db.DetailChannel, "processing": db.DetailChannel, "source": db.DetailChannel, "warnings": db.DetailChannel,
}

// WhereAttributes lists every attribute that an expression may use, for people.
func WhereAttributes() string {
	findings := make([]string, len(flags))
	for i, f := range flags {
		findings[i] = "quality." + f.name
	}
	return "numbers " + numberNames() + "; strings " + textNames() + "; true or false " + strings.Join(findings, ", ")
}

func isKnown(x float64) bool { return !math.IsNaN(x) }

// componentAttributes describes one stored component.
func componentAttributes(c *db.HeldComponent) attributes {
	k := conditioned(c)
	fromS, toS := k.UsableBand()
	a := attributes{
		UsableFromS: fromS, UsableToS: toS, Quality: qualityOf(c),
		StepS: c.StepS, Samples: c.Samples, DurationS: duration(c),
		PGA: c.PGA / StandardGravity, PGV: c.PGV, PGD: c.PGD,
		AzimuthDeg: orNaN(c.AzimuthDeg), LowCutHz: k.LowCutHz, HighCutHz: k.HighCutHz,
		Component: c.Role, Axis: c.Axis, Format: c.SourceFormat, Processing: c.Processing, Source: c.SourcePath, Warnings: strings.Join(c.Warnings, "; "),
	}
	for i, name := range intensities {
		*intensitiesOf(&a)[i] = math.NaN()
		if value, ok := c.Measures[name]; ok {
			*intensitiesOf(&a)[i] = value
		}
	}
	describeRecord(&a, c.Record)
	return a
}

// intensities are the measures beside the peaks, in the order of intensitiesOf; an
// attribute has the name of its measure.
var intensities = []string{
	db.MeasureArias,
	db.MeasureCAV,
	db.MeasureStandardisedCAV,
	db.MeasureSignificant575,
	db.MeasureSignificant595,
	db.MeasureBracketed,
	db.MeasureRMS,
	db.MeasureMeanPeriod,
	db.MeasureSpectrumIntensity,
}

func intensitiesOf(a *attributes) []*float64 {
	return []*float64{
		&a.Arias,
		&a.CAV,
		&a.StandardisedCAV,
		&a.Significant575,
		&a.Significant595,
		&a.Bracketed,
		&a.RMS,
		&a.MeanPeriod,
		&a.SpectrumIntensity,
	}
}

// duration is the time from the first sample to the last in s.
func duration(c *db.HeldComponent) float64 { return float64(c.Samples-1) * c.StepS }

func describeRecord(a *attributes, r *db.Record) {
	a.Record, a.Siting, a.Instrument = r.Code, r.Siting, r.Instrument
	a.Year = year(r)
	d := &r.Distances
	a.DistanceKM, a.EpicentralKM, a.HypocentralKM = orNaN(d.BestKM), orNaN(d.EpicentralKM), orNaN(d.HypocentralKM)
	a.RuptureKM, a.JoynerBooreKM = orNaN(d.RuptureKM), orNaN(d.JoynerBooreKM)
	event, station := r.Event, r.Station
	if event == nil {
		event = &db.Event{}
	}
	if station == nil {
		station = &db.Station{}
	}
	a.Event, a.EventName, a.MagnitudeType = event.Code, event.Name, event.MagnitudeType
	a.Magnitude, a.DepthKM = orNaN(event.Magnitude), orNaN(event.DepthKM)
	a.EventLatitude, a.EventLongitude = orNaN(event.LatitudeDeg), orNaN(event.LongitudeDeg)
	a.Station, a.Network, a.StationName = station.Code, station.Network, station.Name
	a.Vs30MPS = orNaN(station.Vs30MPS)
	a.SiteClassEN1998, a.SiteClassNEHRP = siteClasses(station)
	a.StationLatitude, a.StationLongitude = orNaN(station.LatitudeDeg), orNaN(station.LongitudeDeg)
}

// siteClasses are the ground type after EN 1998-1 and the site class after NEHRP
// by Vs30, "" where it is unknown. A ground type that somebody states stands where
// Vs30 is unknown, and over that of Vs30 where it is one that Vs30 cannot tell: E,
// S1 or S2.
func siteClasses(s *db.Station) (en1998, nehrp string) {
	en1998 = s.SiteClass
	if s.Vs30MPS == nil {
		return en1998, ""
	}
	site, errSite := siteclass.NEHRP(*s.Vs30MPS)
	ground, err := siteclass.EN1998(*s.Vs30MPS)
	if err != nil || errSite != nil {
		return en1998, ""
	}
	if !siteclass.NeedsMoreThanVs30(siteclass.Class(en1998)) {
		en1998 = string(ground)
	}
	return en1998, string(site)
}

// year is that of the origin, UTC, or of the record's start where the origin is
// unknown.
func year(r *db.Record) int {
	if t := timeOf(r); !t.IsZero() {
		return t.Year()
	}
	return noYear
}

// pairAttributes describes a horizontal pair as one motion. Peaks are combined
// as the ordinates are; those of a rotated pair are its own, unknown where nobody
// asked for them. Of what the components do not share, the less favourable value
// stands for both: the longer step, the shorter duration, the higher low cut and
// the lower high cut, unknown where one is. The azimuth is unknown. Strings that
// differ are joined with " + ".
func pairAttributes(m *motion) attributes {
	component := Component(m.role)
	a, b := componentAttributes(m.members[0]), componentAttributes(m.members[1])
	a.Component, a.AzimuthDeg, a.Quality = m.role, math.NaN(), qualityOf(m.members...)
	switch {
	case m.rotated != nil:
		a.PGA, a.PGV, a.PGD = m.rotated.PGA/StandardGravity, m.rotated.PGV, m.rotated.PGD
	case component.IsRotated():
		a.PGA, a.PGV, a.PGD = math.NaN(), math.NaN(), math.NaN()
	default:
		combine := combiner(component)
		a.PGA, a.PGV, a.PGD = combine(a.PGA, b.PGA), combine(a.PGV, b.PGV), combine(a.PGD, b.PGD)
	}
	for i, value := range intensitiesOf(&a) {
		*value = strength(component)(*value, *intensitiesOf(&b)[i])
	}
	// The builtins give NaN where either is NaN.
	a.StepS, a.Samples, a.DurationS = max(a.StepS, b.StepS), min(a.Samples, b.Samples), min(a.DurationS, b.DurationS)
	a.LowCutHz, a.HighCutHz = max(a.LowCutHz, b.LowCutHz), min(a.HighCutHz, b.HighCutHz)
	a.UsableFromS, a.UsableToS = max(a.UsableFromS, b.UsableFromS), min(a.UsableToS, b.UsableToS)
	a.Axis, a.Format, a.Processing, a.Source = both(a.Axis, b.Axis), both(a.Format, b.Format), both(a.Processing, b.Processing), both(a.Source, b.Source)
	a.Warnings = both(a.Warnings, b.Warnings)
	return a
}

// strength gives a measure of a pair from those of its components: the larger of both for
// what is a maximum over directions, else the geometric mean.
func strength(component Component) func(a, b float64) float64 {
	if component == ComponentRotD100 {
		component = ComponentLarger
	}
	return combiner(component)
}

// combiner gives the ordinate of a pair from those of its components. It is
// symmetric, so the order in which components arrive is immaterial.
func combiner(component Component) func(a, b float64) float64 {
	if component == ComponentLarger {
		return func(a, b float64) float64 { return max(a, b) }
	}
	return stats.GeometricMean
}

func both(a, b string) string {
	if a == b {
		return a
	}
	return a + " + " + b
}

func orNaN(x *float64) float64 {
	if x == nil {
		return math.NaN()
	}
	return *x
}
