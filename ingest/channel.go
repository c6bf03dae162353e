package ingest

import "time"

// StandardGravity is g in m/s², exact by definition.
//
// Source: ISO 80000-3:2019, item 3-8.2 (3rd CGPM, 1901).
const StandardGravity = 9.80665

// Number is a quantity that a file may or may not state. The zero value is
// unknown.
type Number struct {
	Value float64
	Known bool
}

// Known returns the stated quantity v.
func Known(v float64) Number { return Number{Value: v, Known: true} }

// Or returns n, or other where n is unknown.
func (n Number) Or(other Number) Number {
	if n.Known {
		return n
	}
	return other
}

// Event is what a file says of the earthquake. Unknown text is empty, an
// unknown time is the zero time.
type Event struct {
	ID            string    // a catalogue's or network's own code
	Name          string    // in words
	Date          time.Time // day of the earthquake where only that is known
	Origin        time.Time // UTC
	Latitude      Number    // degrees, north positive
	Longitude     Number    // degrees, east positive
	DepthKM       Number
	Magnitude     Number
	MagnitudeType string // Mw, ML, Ms, MJMA …
}

// Station is what a file says of the recording site.
type Station struct {
	Network    string
	Code       string
	Name       string
	Latitude   Number // degrees, north positive
	Longitude  Number // degrees, east positive
	ElevationM Number
	Vs30       Number // m/s
	// SiteClass is the ground type of EN 1998-1 (A to E, S1, S2) that the file
	// states, whether measured or inferred; "" where unknown.
	SiteClass string
}

// Distances are the distances from an earthquake to a station whose kind a file
// states, in km.
//
// Source: Abrahamson and Shedlock, Seismological Research Letters 68(1), 1997,
// for the last two (from memory).
type Distances struct {
	EpicentralKM  Number // along the surface, to the epicentre
	HypocentralKM Number // to the hypocentre
	RuptureKM     Number // to the nearest point of the rupture
	JoynerBooreKM Number // along the surface, to the rupture's projection onto it
}

// Or returns d, with those of other where d knows none.
func (d Distances) Or(other Distances) Distances {
	return Distances{
		EpicentralKM: d.EpicentralKM.Or(other.EpicentralKM), HypocentralKM: d.HypocentralKM.Or(other.HypocentralKM),
		RuptureKM: d.RuptureKM.Or(other.RuptureKM), JoynerBooreKM: d.JoynerBooreKM.Or(other.JoynerBooreKM),
	}
}

// Siting says what an instrument stands on, which decides whether its motion
// is a ground motion.
type Siting string

// The sitings that a channel can have. SitingUnknown means that the file does
// not say.
const (
	SitingUnknown   Siting = "unknown"
	SitingFreeField Siting = "free-field"
	SitingGround    Siting = "ground"
	SitingStructure Siting = "structure"
	SitingBorehole  Siting = "borehole"
)

// Axis is the kind of direction a channel measures.
type Axis int

// The axes. AxisUnknown is a channel whose file gives no direction at all.
const (
	AxisUnknown Axis = iota
	AxisHorizontal
	AxisVertical
)

// Orientation is the direction of a channel's positive motion.
type Orientation struct {
	Axis Axis
	// AzimuthDeg is clockwise from north in [0, 360), for horizontal axes whose
	// azimuth is known.
	AzimuthDeg Number
	// Label is the direction as the file writes it ("N-S", "Long", "H1", "Up").
	Label string
	// Order is 1 or 2 where the label itself ranks a horizontal without azimuth
	// (longitudinal before transverse, H1 before H2), else 0.
	Order int
}

// Processing is the state of correction that a file declares.
type Processing string

// The states of processing.
const (
	ProcessingUnknown     Processing = "unknown"
	ProcessingRaw         Processing = "raw"          // scaled counts or uncorrected acceleration
	ProcessingCorrected   Processing = "corrected"    // filtered or baseline-corrected by the network
	ProcessingMeanRemoved Processing = "mean-removed" // scaled counts less the mean of the whole record
)

// Channel is one direction of motion as a reader found it.
type Channel struct {
	Event       Event
	Station     Station
	Instrument  string // place of the instrument at the station, in words; "" where there is only one
	ChannelCode string // the station's or the file's own channel number, "" where there is none
	Siting      Siting
	Orientation Orientation
	DistanceKM  Number // event to station, as stated, of unknown kind
	Distances   Distances

	Start time.Time // time of the first sample, UTC; zero where unknown
	// StepS is the time between samples in s, > 0.
	StepS float64
	// Acceleration is the ground acceleration in m/s², all values finite.
	Acceleration []float64
	// Unit is the unit of the file's numbers, as this package spells it, and
	// UnitMPS2 the value of one such unit in m/s².
	Unit     string
	UnitMPS2 float64

	Processing Processing
	LowCutHz   Number // corner of the high-pass (low-cut) filter already applied
	HighCutHz  Number // corner of the low-pass (high-cut) filter already applied
	// HeaderPeak is the peak acceleration that the header states, in m/s²; its
	// sign is not significant.
	HeaderPeak Number

	Line     int      // 1-based line of the first sample; 0 where the file has no lines
	Warnings []string // what a reader accepted but a person should know
	Findings []Finding
}
