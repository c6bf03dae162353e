package demo

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"time"
)

// japan is the zone of the stamps in K-NET files, of any region.
var japan = time.FixedZone("JST", 9*60*60)

// The recorder behind the counts: scaleGal gal are scaleCounts counts.
const (
	scaleGal    = 4000
	scaleCounts = 1 << 23
	// recordTimeDelay is what the stamp "Record Time" is late by.
	recordTimeDelay = 15 * time.Second
)

// encodeKNET writes a record as K-NET ASCII, one file for each component. At a
// station with a borehole the directions are the numbers of its two sensors.
func encodeKNET(r *record) []file {
	stem := r.station.code + r.event.origin.In(japan).Format("0601021504")
	var files []file
	for i, c := range r.columns() {
		direction, suffix := c.dashed, ""
		switch {
		case r.place == borehole:
			direction, suffix = strconv.Itoa(i+1), "1"
		case r.station.second == borehole:
			direction, suffix = strconv.Itoa(i+4), "2"
		}
		files = append(files, file{stem + "." + c.compass + suffix, knetFile(r, c, i, direction)})
	}
	return files
}

func knetFile(r *record, c column, i int, direction string) []byte {
	const stamp = "2006/01/02 15:04:05"
	e, s := r.event, r.station
	counts, peakGal := knetCounts(r, c, i)
	var b []byte
	for _, line := range [17][2]string{
		{"Origin Time", e.origin.In(japan).Format(stamp)},
		{"Lat.", number(e.latitude)},
		{"Long.", number(e.longitude)},
		{"Depth. (km)", number(e.depthKM)},
		{"Mag.", fmt.Sprintf("%.1f", e.magnitude)},
		{"Station Code", s.code},
		{"Station Lat.", fmt.Sprintf("%.4f", s.latitude)},
		{"Station Long.", fmt.Sprintf("%.4f", s.longitude)},
		{"Station Height(m)", number(s.elevationM)},
		{"Record Time", r.start.Add(recordTimeDelay).In(japan).Format(stamp)},
		{"Sampling Freq(Hz)", fmt.Sprintf("%dHz", s.rateHz)},
		{"Duration Time(s)", strconv.Itoa(r.durationS())},
		{"Dir.", direction},
		{"Scale Factor", fmt.Sprintf("%d(gal)/%d", scaleGal, scaleCounts)},
		{"Max. Acc. (gal)", fmt.Sprintf("%.3f", peakGal)},
		{"Last Correction", r.start.In(japan).Format(stamp)},
		{"Memo.", "Invented data"},
	} {
		b = fmt.Appendf(b, "%-18s%s\n", line[0], line[1])
	}
	return block(b, len(counts), 8, "\n", func(b []byte, i int) []byte {
		return append(appendScaled(b, counts[i], 0, 8), ' ')
	})
}

// What a sensor adds to the motion before anybody corrects it, in gal: the standard
// deviation of its noise, and how far its zero wanders over a record at most.
const (
	noiseGal = 0.02
	driftGal = 0.3
)

// knetCounts returns the samples as raw counts with the sensor's offset, noise and
// drift, and the peak in gal that is left when the mean of all counts is removed.
func knetCounts(r *record, c column, i int) (counts []int64, peakGal float64) {
	offset := int64(3000 + 7*r.serial()%9000 - 2500*i)
	random := rand.New(rand.NewPCG(uint64(r.event.origin.Unix()), uint64(8*r.serial()+3*int(r.place)+i)))
	drift := driftGal * (2*random.Float64() - 1)
	counts = make([]int64, len(c.motion))
	var sum int64
	for j, v := range c.motion {
		along := float64(j) / float64(len(counts))
		gal := float64(float64(v)*cmps2) + float64(noiseGal*random.NormFloat64()) + float64(drift*along*along)
		counts[j] = offset + int64(math.Round(gal*scaleCounts/scaleGal))
		sum += counts[j]
	}
	mean := float64(sum) / float64(len(counts))
	for _, v := range counts {
		peakGal = max(peakGal, math.Abs(float64(v)-mean))
	}
	return counts, peakGal * scaleGal / scaleCounts
}

// number prints v with as many digits as it has.
func number(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }
