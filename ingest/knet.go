package ingest

import (
	"time"
)

// knet reads the ASCII files of the Japanese K-NET and KiK-net networks: 17
// header lines, then integer counts of one component.
//
// Source: NIED, About K-NET ASCII format, and the KiK-net supplement to it. The
// sign convention (north, east and up positive) and the time zone of the stamps
// are common practice.
type knet struct{}

// Info describes the format.
func (knet) Info() Info {
	return Info{
		Name: "knet", Title: "K-NET and KiK-net ASCII (NIED)", Channels: "one",
		Unit: "counts with a scale in gal", NotRead: "WIN32 binary",
	}
}

// knetDelay is how long before its "Record Time" a file's first sample was
// taken: the delay of the recorder's trigger.
const knetDelay = 15 * time.Second

// japan is the zone of all stamps in these files.
var japan = time.FixedZone("JST", 9*60*60)

// knetNoHeight is the station height that means "not available".
const knetNoHeight = -9999

// The indices of the header lines, counted from 0.
const (
	knetOrigin = iota
	knetLatitude
	knetLongitude
	knetDepth
	knetMagnitude
	knetStation
	knetStationLatitude
	knetStationLongitude
	knetHeight
	knetRecordTime
	knetRate
	knetDuration
	knetDirection
	knetScale
	knetPeak
	knetCorrection
	knetMemo
	knetHeaderLines
)

// knetLabels are the labels of the header lines, the modern spelling first. The
// longer of two that begin alike comes first.
var knetLabels = [knetHeaderLines][]string{
	knetOrigin:           {"Origin Time"},
	knetLatitude:         {"Lat."},
	knetLongitude:        {"Long.", "Lon."},
	knetDepth:            {"Depth. (km)"},
	knetMagnitude:        {"Mag."},
	knetStation:          {"Station Code"},
	knetStationLatitude:  {"Station Lat."},
	knetStationLongitude: {"Station Long.", "Station Lon."},
	knetHeight:           {"Station Height(m)"},
	knetRecordTime:       {"Record Time"},
	knetRate:             {"Sampling Freq(Hz)"},
	knetDuration:         {"Duration Time(s)"},
	knetDirection:        {"Dir."},
	knetScale:            {"Scale Factor"},
	knetPeak:             {"Max. Acc. (gal)"},
	knetCorrection:       {"Last Correction"},
	knetMemo:             {"Memo."},
}

// knetPlaces are the direction codes: what they measure and where.
var knetPlaces = map[string]struct {
	label, place string
}{
	"N-S": {"N-S", ""}, "E-W": {"E-W", ""}, "U-D": {"U-D", ""},
	"1": {"N-S", "borehole"}, "2": {"E-W", "borehole"}, "3": {"U-D", "borehole"},
	"4": {"N-S", "surface"}, "5": {"E-W", "surface"}, "6": {"U-D", "surface"},
}

// Sniff looks for three labels of the header in the first lines, two of them
// those that no other format has.
func (knet) Sniff(c *Content) string {
	t := c.Text
	var seen [knetHeaderLines]bool
	count := 0
	for n := 1; n <= min(t.Len(), knetHeaderLines); n++ {
		for i := range knetLabels {
			if _, ok := knetValue(t.Bytes(n), i); ok && !seen[i] {
				seen[i] = true
				count++
			}
		}
	}
	if seen[knetOrigin] && count >= 3 || seen[knetStation] && seen[knetScale] && count >= 6 {
		return "header labels of K-NET ASCII"
	}
	return ""
}

// Parse reads the one channel of a file. Hints may repeat what the header says
// of the time step and of the scale (gal), not contradict it.
func (knet) Parse(content *Content, hints Hints) ([]Channel, error) {
	t := content.Text
	h, err := readKNETHeader(t)
	if err != nil {
		return nil, err
	}
	c := &Channel{Processing: ProcessingMeanRemoved, Unit: "counts", Line: knetHeaderLines + 1}
	count, err := h.describe(c, hints)
	if err != nil {
		return nil, err
	}
	counts, err := readCounts(t, c.Line, count)
	if err != nil {
		return nil, err
	}
	c.Acceleration = counts
	removeMean(c)
	if err := h.peak(c); err != nil {
		return nil, err
	}
	return []Channel{*c}, nil
}
