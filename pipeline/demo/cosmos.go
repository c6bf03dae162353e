package demo

import (
	"fmt"
	"math"
	"slices"
	"strconv"
)

// The codes of the COSMOS numeric headers.
const (
	cosmosCorrected    = 2
	cosmosAcceleration = 1
	cosmosCMPerS2      = 4
	cosmosUp           = 400
)

// cosmosBits is the word length of the recorder's digitiser.
const cosmosBits = 24

// encodeCOSMOS writes a record as COSMOS V2c text, version 1.20: one section for
// each component.
func encodeCOSMOS(r *record) []file {
	var b []byte
	for i, c := range r.columns() {
		b = appendSection(b, r, i+1, c)
	}
	return []file{{r.base() + ".V2c", b}}
}

// appendSection appends text header, integer header, real header, comments and
// samples of one component.
func appendSection(b []byte, r *record, channel int, c column) []byte {
	at := peak(c.motion)
	p := extremum{float64(c.motion[at]) * cmps2, float64(at) * r.stepS()}
	for _, line := range cosmosText(r, channel, c, p) {
		b = appendLine(b, line)
	}
	integers, reals := cosmosIntegers(r, channel, c), cosmosReals(r, c, p)
	b = appendLine(b, newCard().putInt(4, len(integers)).put(5, " Integer-header values follow on").
		putInt(40, 10).put(41, " lines, Format=").put(57, "(10I8)"))
	b = block(b, len(integers), 10, "\n", func(b []byte, i int) []byte {
		return appendScaled(b, int64(integers[i]), 0, 8)
	})
	b = appendLine(b, newCard().putInt(4, len(reals)).put(5, " Real-header values follow on").
		putInt(37, 20).put(38, " lines, Format=").put(54, "(5F15.6)"))
	b = block(b, len(reals), 5, "\n", func(b []byte, i int) []byte {
		return appendScaled(b, int64(math.Round(reals[i]*1e6)), 6, 15)
	})
	comments := []string{"Invented data: a motion simulated by the stochastic method.", "No instrument recorded it."}
	b = appendLine(b, newCard().putInt(4, len(comments)).put(5, ` Comment line(s) follow, each starting with a "|":`))
	for _, s := range comments {
		b = appendLine(b, newCard().put(1, "| "+s))
	}
	b = appendLine(b, newCard().putInt(8, len(c.motion)).put(10, "acceleration pts").put(26, ", approx").
		putInt(38, r.durationS()).put(39, " secs, units=cm/sec2(").putFixed(61, cosmosCMPerS2, 0).
		put(60, fmt.Sprintf("%02d", cosmosCMPerS2)).put(62, "),Format=").put(71, "(8F10.4)"))
	b = block(b, len(c.motion), 8, "\n", func(b []byte, i int) []byte {
		return appendScaled(b, int64(c.motion[i]), 4, 10)
	})
	return appendLine(b, newCard().put(1, "End-of-data for Chan").putInt(24, channel).put(26, "acceleration"))
}

// appendLine appends a card and a line feed.
func appendLine(b []byte, c *card) []byte { return append(append(b, c[:]...), '\n') }

// cosmosText returns the 13 lines of text.
func cosmosText(r *record, channel int, c column, p extremum) [13]*card {
	const stamp = "01/02/2006, 15:04:05"
	e, s := r.event, r.station
	agency := "(" + s.network.code + ")"
	return [13]*card{
		newCard().put(1, "Corrected acceleration").put(27, "(Format v01.20 with 13 text lines)").put(62, "Invented data"),
		newCard().put(1, e.name).put(41, e.origin.Format("January 02, 2006 15:04:05 UTC")),
		newCard().put(1, "Hypocenter:").putFixed(20, e.latitude, 3).putFixed(31, e.longitude, 3).put(33, "H=").
			putInt(37, int(e.depthKM)).put(38, "km").put(41, agency).put(47, fmt.Sprintf("Mw=%.1f", e.magnitude)),
		newCard().put(1, "Origin:").put(9, e.origin.Format(stamp)+".0 UTC "+agency),
		newCard().put(1, "Statn No:").putInt(12, cosmosNetworkNumber).put(13, "-").put(14, strconv.Itoa(r.serial())).put(21, "Code:").
			put(26, s.network.code).put(28, "-").put(29, s.code).put(36, s.network.code).put(41, s.name),
		newCard().put(1, "Coords:").putFixed(15, s.latitude, 3).putFixed(25, s.longitude, 3).put(28, "Site geology:").
			put(42, fmt.Sprintf("Vs30 %.0f m/s", s.vs30)),
		newCard().put(1, "Recorder:").put(11, "DR-24").put(18, "s/n").putInt(25, r.serial()).put(27, "(").putInt(29, 3).
			put(31, "Chns of").putInt(41, 3).put(43, "at Sta)").put(51, "Sensor:").put(59, "FB-2g").put(66, "s/n").putInt(75, r.serial()),
		newCard().put(1, "Rcrd start time:").put(18, r.start.Format(stamp)+".00 UTC (Q=5)").put(52, "RcrdId:").
			put(60, s.network.code+"."+s.code+"."+r.start.Format("060102150405")),
		newCard().put(1, "Sta Chn:").putInt(11, channel).put(13, c.words).put(23, "Rcrdr Chn:").putInt(35, channel).
			put(37, "Location:").put(47, r.location()),
		newCard().put(1, "Raw record length=").putFixed(27, float64(r.durationS()), 3).put(29, "sec, Uncor max=").
			putFixed(54, p.value, 3).put(56, "at").putFixed(67, p.at, 3).put(69, "sec"),
		newCard().put(1, "Processed:").put(12, r.start.AddDate(0, 0, 1).Format("01/02/2006")+", "+s.network.code).put(42, "Max=").
			putFixed(56, p.value, 4).put(58, "cm/sec2").put(67, "at").putFixed(76, p.at, 3).put(78, "sec"),
		newCard().put(1, "Rcrd filtered below").putFixed(26, lowCutHz, 2).put(28, "Hz (periods over").putFixed(50, 1/lowCutHz, 2).
			put(52, "sec), and above").putFixed(72, highCutHz(s.rateHz), 2).put(74, "Hz"),
		newCard().put(1, "Values used when a parameter or data value is not known:").put(65, "  -999, -999.0"),
	}
}

// cosmosNetworkNumber is the invented number of the network; the format's own
// numbers end below it.
const cosmosNetworkNumber = 990

// cosmosIntegers returns the integer header; the places not listed are null.
func cosmosIntegers(r *record, channel int, c column) []int {
	direction := c.azimuth
	if direction == 0 {
		direction = cosmosUp
	}
	t := r.start
	h := slices.Repeat([]int{notStated}, 100)
	for at, v := range map[int]int{
		1: cosmosCorrected, 2: cosmosAcceleration, 3: cosmosCMPerS2, 4: 120, 5: 1,
		8: r.serial(), 11: cosmosNetworkNumber, 23: 3, 32: r.serial(), 33: 3, 35: cosmosBits, 36: cosmosBits,
		40: t.Year(), 41: t.YearDay(), 42: int(t.Month()), 43: t.Day(), 44: t.Hour(), 45: t.Minute(), 46: 5,
		50: channel, 51: channel, 53: r.serial(), 54: direction, 75: 1, 76: 0,
	} {
		h[at-1] = v
	}
	return h
}

// cosmosReals returns the real header; the places not listed are null.
func cosmosReals(r *record, c column, p extremum) []float64 {
	e, s := r.event, r.station
	sum := 0.0
	for _, v := range c.motion {
		sum += float64(v)
	}
	h := slices.Repeat([]float64{notStated}, 100)
	for at, v := range map[int]float64{
		1: s.latitude, 2: s.longitude, 3: s.elevationM, 4: s.vs30,
		10: e.latitude, 11: e.longitude, 12: e.depthKM, 13: e.magnitude,
		17: r.distanceKM, 18: r.azimuthDeg,
		24: quietS, 25: quietS, 30: float64(r.start.Second()), 32: 0,
		34: r.stepS(), 35: float64(r.durationS()),
		40: 1 / instrumentPeriodS, 41: instrumentDamping, 47: 1,
		54: lowCutHz, 57: highCutHz(s.rateHz),
		62: 1000 * r.stepS(), 63: float64(r.durationS()),
		64: p.value, 65: p.at, 66: sum * cmps2 / float64(len(c.motion)),
	} {
		h[at-1] = v
	}
	return h
}
