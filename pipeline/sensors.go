package pipeline

import (
	"math"
	"strings"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// parallelDeg is how far apart two azimuths of one direction may be stated.
const parallelDeg = 2

// canBeOne reports whether two components measure one direction at one time and
// place, as far as they say.
func canBeOne(a, b *db.Version) bool {
	return !differ(a.EventID, b.EventID) && !differ(a.StationCode, b.StationCode) && overlap(a, b) && areParallel(a, b)
}

// differ reports whether both are known and not the same.
func differ[T comparable](a, b T) bool {
	var unknown T
	return a != unknown && b != unknown && a != b
}

func overlap(a, b *db.Version) bool {
	return a.Start.IsZero() || b.Start.IsZero() || !a.End().Before(b.Start) && !b.End().Before(a.Start)
}

// areParallel reports whether two components measure one direction, either way
// round. Of equal samples it is enough that none says otherwise.
func areParallel(a, b *db.Version) bool {
	unknown := axes[ingest.AxisUnknown]
	switch {
	case a.Axis != b.Axis:
		return a.Digest == b.Digest && (a.Axis == unknown || b.Axis == unknown)
	case a.Axis == axes[ingest.AxisVertical]:
		return true
	case a.AzimuthDeg != nil && b.AzimuthDeg != nil:
		return math.Abs(math.Remainder(*a.AzimuthDeg-*b.AzimuthDeg, 180)) <= parallelDeg
	}
	return strings.EqualFold(a.Label, b.Label) || a.Digest == b.Digest
}

// areTwoSensors reports whether two components are of instruments that stand on
// different things or that their network tells apart: on one foundation, or down one
// borehole, motions are much alike.
func areTwoSensors(a, b *db.Version) bool {
	unknown := string(ingest.SitingUnknown)
	return a.SourceSHA256 == b.SourceSHA256 || a.Siting != b.Siting && a.Siting != unknown && b.Siting != unknown ||
		a.SourceFormat == b.SourceFormat && (differ(a.Instrument, b.Instrument) || differ(a.Channel, b.Channel))
}

// isOneSensorProcessed reports whether two components are, by all that is said of
// them, of one sensor, one as recorded and the other corrected. Where many stand side by
// side, in structures and boreholes, it takes the same channel.
func isOneSensorProcessed(a, b *db.Version) bool {
	if a.EventID == 0 || a.EventID != b.EventID || a.StationCode == "" || a.StationCode != b.StationCode || differ(a.Network, b.Network) {
		return false
	}
	if a.Start.IsZero() || b.Start.IsZero() || !areRawAndCorrected(a, b) || areTwoSensors(a, b) || differ(a.Instrument, b.Instrument) {
		return false
	}
	return a.Channel == b.Channel && a.Channel != "" || !differ(a.Channel, b.Channel) && !standsAmongOthers(a) && !standsAmongOthers(b)
}

// areRawAndCorrected reports whether one of the two says that it is as recorded, but
// perhaps for its mean, and the other that it is corrected. What says nothing may be
// in either state, and does not speak for one sensor.
func areRawAndCorrected(a, b *db.Version) bool {
	const corrected = string(ingest.ProcessingCorrected)
	return a.Processing == corrected && isAsRecorded(b) || b.Processing == corrected && isAsRecorded(a)
}

func isAsRecorded(v *db.Version) bool {
	return v.Processing == string(ingest.ProcessingRaw) || v.Processing == string(ingest.ProcessingMeanRemoved)
}

// statedTolerance is how far the starts of two components of one motion may be stated
// from where their samples are most alike: a header may round the time to a second, and
// the other cut it off.
const statedTolerance = 1500 * time.Millisecond

// areAtStatedTimes reports whether a starts lagS seconds after b as both state.
func areAtStatedTimes(a, b *db.Version, lagS float64) bool {
	return math.Abs(a.Start.Sub(b.Start).Seconds()-lagS) <= statedTolerance.Seconds()
}

func standsAmongOthers(v *db.Version) bool {
	return v.Siting == string(ingest.SitingStructure) || v.Siting == string(ingest.SitingBorehole)
}
