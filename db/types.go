package db

import (
	"errors"
	"time"
)

// ErrNoStore says that there is no store at the path.
var ErrNoStore = errors.New("no such store")

// ErrNewer says that the store was written by a newer program.
var ErrNewer = errors.New("store is newer than this program")

// ErrDamaged says that what the store holds of a component is not what was stored.
var ErrDamaged = errors.New("damaged in the store")

// ErrAltered says that an edition shows something else than when it was made, so that there is
// no answer, whatever it is about.
var ErrAltered = errors.New("the store is damaged")

// Roles that a stored component can have.
const (
	RoleH1 = "h1"
	RoleH2 = "h2"
	RoleV  = "v"
)

// The axes of components.
const (
	AxisHorizontal = "horizontal"
	AxisVertical   = "vertical"
	AxisUnknown    = "unknown"
)

// Roles of what is computed of both horizontals over all directions: the median
// and the maximum. They have spectra and measures, and no component.
const (
	RoleRotD50  = "rotd50"
	RoleRotD100 = "rotd100"
)

// Names of the measures stored with every component.
const (
	MeasurePGA               = "pga_m_s2"
	MeasurePGV               = "pgv_m_s"
	MeasurePGD               = "pgd_m"
	MeasureArias             = "arias_m_s"            // Arias intensity in m/s
	MeasureCAV               = "cav_m_s"              // cumulative absolute velocity in m/s
	MeasureStandardisedCAV   = "cav_standardised_m_s" // of seconds above 0.025 g only
	MeasureSignificant575    = "d5_75_s"              // significant durations in s
	MeasureSignificant595    = "d5_95_s"
	MeasureBracketed         = "bracketed_s"          // between first and last 0.05 g, in s
	MeasureRMS               = "rms_m_s2"             // root mean square over the significant duration, in m/s²
	MeasureMeanPeriod        = "mean_period_s"        // in s
	MeasureSpectrumIntensity = "spectrum_intensity_m" // Housner"s, in m
)

// Event is an earthquake. Nil and empty fields are unknown.
type Event struct {
	Code          string // where several stand for one earthquake, that of the first of them
	OwnCode       string // that by which the record came; for reading only
	Name          string
	Origin        time.Time // UTC
	LatitudeDeg   *float64
	LongitudeDeg  *float64
	DepthKM       *float64
	Magnitude     *float64
	MagnitudeType string
}

// Station is a recording site. Nil and empty fields are unknown.
type Station struct {
	Network      string
	Code         string
	Name         string
	LatitudeDeg  *float64
	LongitudeDeg *float64
	ElevationM   *float64
	Vs30MPS      *float64
	SiteClass    string // as somebody states it
}

// Record is one event at one instrument. Event and Station are nil where
// unknown.
type Record struct {
	Code       string
	Event      *Event
	Station    *Station
	Instrument string
	Siting     string
	Start      time.Time
	Distances  Distances
	// The rows of the two, 0 where unknown; for reading only.
	EventID, StationID int64
}

// Distances are from the earthquake to the station, in km.
type Distances struct {
	BestKM        *float64
	EpicentralKM  *float64
	HypocentralKM *float64
	RuptureKM     *float64
	JoynerBooreKM *float64
}

// Component is one direction of a record, without its samples.
type Component struct {
	Role       string
	Axis       string // AxisHorizontal, AxisVertical or AxisUnknown
	Label      string // direction as the file writes it
	Rank       int    // 1 or 2 where the label ranks a horizontal without azimuth
	AzimuthDeg *float64
	Channel    string
	Start      time.Time // of the first sample, UTC; zero where unknown
	StepS      float64
	Samples    int
	Unit       string // of the file's numbers
	Processing string
	LowCutHz   *float64
	HighCutHz  *float64
	HeaderPeak *float64 // m/s²
	Warnings   []string
	Findings   []Finding // as it was delivered; for writing, and where they are asked for
	SourceID   int64
	SourceLine int
	// Of the source file, for reading only.
	SourcePath, SourceSHA256, SourceFormat string
}

// Finding is one thing that is wrong with a motion: the value measured and the bound that
// it is beyond.
type Finding struct {
	Flag         string
	Value, Bound float64
	Words        string
}

// Source is a file whose channels are stored.
type Source struct {
	Path     string
	SHA256   string
	Size     int64
	Modified time.Time
	Format   string
}

// Rejection is a file, or a channel of it, that could not be stored.
type Rejection struct {
	Path   string
	Line   int // 0 where the cause is not in one line
	Cause  string
	SHA256 string // "" where the file could not be read
}

// Grid is the periods and damping ratios of a generation. A stored spectrum
// has one value a period.
type Grid struct {
	PeriodsS []float64
	Dampings []float64
}

// Generation is what was computed under one recipe, grid and solver.
type Generation struct {
	ID     int64
	Recipe Recipe
	Solver string
	Grid   Grid
}

// Motion is a component's samples with what conditioning goes by.
type Motion struct {
	Acceleration        []float64 // m/s²
	StepS               float64
	State               string  // of processing
	LowCutHz, HighCutHz float64 // corners that the header or the catalogue states, NaN for none
}

// Conditioning is what a recipe did to a component before its spectrum was computed.
type Conditioning struct {
	StepS     float64
	Samples   int
	LeadS     float64  // of its first sample over the component's
	LowCutHz  *float64 // corners of the filters that the recipe applied
	HighCutHz *float64
	LongS     *float64 // longest period that its high-pass filter leaves, in s
	// Findings are what is wrong with the motion as the recipe left it; for writing, and
	// where findings are asked for.
	Findings []Finding
}

// Spectra is what is computed of one component, in the form in which it is stored.
type Spectra struct {
	sd           [][]byte // ordinates by damping
	measures     map[string]float64
	conditioning *Conditioning
}

// NewSpectra takes SD in m for every damping of the grid (outer) at every period
// (inner), the measures by name, and what was done to the component before, nil for
// nothing.
func NewSpectra(sd [][]float64, measures map[string]float64, conditioning *Conditioning) Spectra {
	s := Spectra{measures: measures, conditioning: conditioning}
	for _, values := range sd {
		s.sd = append(s.sd, encodeOrdinates(make([]byte, 0, OrdinateWidth*len(values)), values))
	}
	return s
}
