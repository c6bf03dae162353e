package demo

import (
	"fmt"
	"math"
	"strconv"
)

// notStated is the null of the numeric headers.
const notStated = -999

// The recorder that the headers describe: natural frequency 100 Hz.
const (
	instrumentPeriodS = 0.01
	instrumentDamping = 0.7
)

// encodeV2 writes a record as California V2 text: three channels one after
// another, each with 25 lines of text, 100 integers, 100 reals, and blocks of
// acceleration, velocity and displacement. Velocity and displacement are the
// running trapezoidal integrals of the acceleration printed.
func encodeV2(r *record) []file {
	var b []byte
	for i, c := range r.columns() {
		b = newV2Channel(r, i+1, c).append(b)
	}
	return []file{{r.base() + ".V2", b}}
}

// v2Channel is a channel with what its headers repeat.
type v2Channel struct {
	*record
	column
	number                 int
	velocity, displacement []float64 // cm/s, cm
	peaks                  [3]extremum
}

// extremum is a peak value in the file's unit and its time in s after the first
// sample.
type extremum struct{ value, at float64 }

func newV2Channel(r *record, number int, c column) *v2Channel {
	ch := &v2Channel{record: r, column: c, number: number}
	if r.place == roof {
		ch.number += 3
	}
	ch.velocity, ch.displacement = integrate(c.motion, r.station.rateHz)
	at := [3]int{peak(c.motion), peak(ch.velocity), peak(ch.displacement)}
	values := [3]float64{float64(c.motion[at[0]]) * cmps2, ch.velocity[at[1]], ch.displacement[at[2]]}
	for i := range ch.peaks {
		ch.peaks[i] = extremum{values[i], float64(at[i]) / float64(r.station.rateHz)}
	}
	return ch
}

// integrate returns the running trapezoidal integrals of motion in µm/s²: the
// velocity in cm/s and its own integral, the displacement in cm. Sums are of
// integers, so that they are exact.
func integrate(motion []int32, rateHz int) (velocity, displacement []float64) {
	velocity, displacement = make([]float64, len(motion)), make([]float64, len(motion))
	rate := float64(rateHz)
	perV, perD := 2e4*rate, 4e4*rate*rate
	var v, d int64
	for i := 1; i < len(motion); i++ {
		next := v + int64(motion[i-1]) + int64(motion[i])
		d += v + next
		v = next
		velocity[i], displacement[i] = float64(v)/perV, float64(d)/perD
	}
	return velocity, displacement
}

// v2LineEnd is what these files end their lines with.
const v2LineEnd = "\r\n"

func (c *v2Channel) append(b []byte) []byte {
	for _, line := range c.text() {
		b = append(append(b, line[:]...), v2LineEnd...)
	}
	integers, reals := c.integers(), c.reals()
	b = block(b, len(integers), 16, v2LineEnd, func(b []byte, i int) []byte {
		return appendScaled(b, int64(integers[i]), 0, 5)
	})
	b = block(b, len(reals), 8, v2LineEnd, func(b []byte, i int) []byte {
		return appendFixed(b, reals[i], decimalsFor(reals[i]))
	})
	b = c.count(b, "accel", "cm/sec2.", 4)
	b = block(b, len(c.motion), 8, v2LineEnd, func(b []byte, i int) []byte {
		return appendScaled(b, int64(c.motion[i]), 4, 10)
	})
	b = c.series(b, "veloc", "cm/sec.", c.velocity, c.peaks[1])
	b = c.series(b, "displ", "cm.", c.displacement, c.peaks[2])
	end := newCard().put(1, fmt.Sprintf("/&  ----------  End of data for channel %2d  ----------", c.number))
	return append(append(b, end[:]...), v2LineEnd...)
}

// appendFixed appends v in a field of ten characters with so many decimals.
func appendFixed(b []byte, v float64, decimals int) []byte {
	return appendScaled(b, int64(math.Round(v*math.Pow10(decimals))), decimals, 10)
}

// count appends the count line of a block.
func (c *v2Channel) count(b []byte, quantity, unit string, decimals int) []byte {
	line := newCard().putInt(6, len(c.motion)).
		put(7, " points of "+quantity+" data equally spaced at").putFixed(51, c.stepS(), 3).
		put(52, " sec, in "+unit).put(70, fmt.Sprintf("(8f10.%d)", decimals))
	return append(append(b, line[:]...), v2LineEnd...)
}

// stepS returns the time step in s.
func (r *record) stepS() float64 { return 1 / float64(r.station.rateHz) }

func (c *v2Channel) series(b []byte, quantity, unit string, x []float64, p extremum) []byte {
	decimals := decimalsFor(p.value)
	b = c.count(b, quantity, unit, decimals)
	scale := math.Pow10(decimals)
	return block(b, len(x), 8, v2LineEnd, func(b []byte, i int) []byte {
		return appendScaled(b, int64(math.Round(x[i]*scale)), decimals, 10)
	})
}

// text returns the 25 lines of text.
func (c *v2Channel) text() [25]*card {
	const stamp = "01/02/06, 15:04:05.0 UTC"
	e, s := c.event, c.station
	id := fmt.Sprintf("%s-D%04d-%s.01", s.code, c.serial(), c.start.Format("06002"))
	direction := fmt.Sprintf("Chan %2d: %s", c.number, c.words)
	day := e.origin.Format("January 02, 2006  15:04 UTC")
	a, v, d := c.peaks[0], c.peaks[1], c.peaks[2]
	return [25]*card{
		newCard().put(1, "Corrected accelerogram").put(26, id).put(53, direction).put(74, "from"),
		newCard().put(1, "Uncorrected Accelerogram Data").put(43, "Processed: "+c.start.AddDate(0, 0, 1).Format("01/02/06")+", "+s.network.code),
		newCard().put(1, e.name),
		newCard().put(1, day).put(41, "(Origin("+s.network.code+"): "+e.origin.Format(stamp)+")"),
		newCard().put(1, id).put(38, "Start time:  "+c.start.Format(stamp)+" (GPS)"),
		newCard().put(1, "Station No. "+s.code).put(21, letters(s.latitude, s.longitude)).
			put(43, fmt.Sprintf("DR-24  s/n %4d  (%d Chns of %2d at Sta)", c.serial(), 3, c.channelsAtStation())),
		newCard().put(1, s.name).put(43, "INVENTED DATA"),
		newCard().put(1, direction).put(19, fmt.Sprintf("(Sta Chn: %2d)", c.number)).put(37, "Location: "+c.location()),
		newCard().put(1, e.name+"   "+day),
		newCard().put(1, fmt.Sprintf("Hypocenter(%s): %s, H=%.0fkm.", s.network.code, letters(e.latitude, e.longitude), e.depthKM)).
			put(50, fmt.Sprintf("Mw=%.1f(%s).", e.magnitude, s.network.code)),
		newCard().put(1, "Instr Period =").putFixed(21, instrumentPeriodS, 4).put(22, " sec,  Damping =").putFixed(43, instrumentDamping, 3).
			put(44, ",  Sensitivity = 1.25  v/g"),
		newCard().put(25, "Record length =").putFixed(46, float64(c.durationS()), 3).put(47, " sec."),
		newCard().put(38, "Uncor Max  =").putFixed(56, a.value/980.665, 3).put(57, " g , at").putFixed(71, a.at, 3).put(72, " sec."),
		newCard().put(1, "RMS accel of (uncor) record  =").putFixed(37, c.rmsG(), 4).put(38, " g."),
		newCard().put(1, "Accelerogram bandpass filtered with 3 dB pts at").putFixed(53, lowCutHz, 2).
			put(54, " and").putFixed(63, highCutHz(s.rateHz), 2).put(64, " cyc/sec"),
		newCard().putInt(6, len(c.motion)).put(7, " points of instrument- and baseline-corrected accel, veloc and displ data"),
		newCard().put(1, "At equally-spaced intervals of").putFixed(38, c.stepS(), 3).put(39, "  sec."),
		newCard().put(1, "Peak acceleration =").putFixed(30, a.value, 3).put(31, "    cm/sec/sec  at").putFixed(57, a.at, 3).put(58, "   sec."),
		newCard().put(1, "Peak   velocity   =").putFixed(30, v.value, 3).put(31, "      cm/sec    at").putFixed(57, v.at, 3).put(58, "   sec."),
		newCard().put(1, "Peak displacement =").putFixed(30, d.value, 3).put(31, "        cm      at").putFixed(57, d.at, 3).put(58, "   sec."),
		newCard().put(1, "Initial velocity  =").putFixed(30, 0, 3).put(31, "   cm/sec;   Initial displacement =").putFixed(75, 0, 3).put(76, "   cm"),
		newCard().put(1, e.name+"   "+day),
		newCard(),
		newCard().put(1, id).put(27, s.name).put(60, direction),
		newCard(),
	}
}

// integers returns the integer header; the places not listed are not stated.
// Places 17 to 24 hold the time of the first sample: hour, minute, second,
// millisecond, day of the year, month, day and year.
func (c *v2Channel) integers() [100]int {
	var h [100]int
	for i := range h {
		h[i] = notStated
	}
	number, _ := strconv.Atoi(c.station.code) // this network's codes are numbers
	direction := c.azimuth
	if direction == 0 {
		direction = 500 // up
	}
	t, n := c.start, len(c.motion)
	for at, v := range map[int]int{
		1: c.number, 14: number,
		17: t.Hour(), 18: t.Minute(), 19: t.Second(), 20: 0, 21: t.YearDay(), 22: int(t.Month()), 23: t.Day(), 24: t.Year(),
		27: direction, 53: n, 64: n,
	} {
		h[at-1] = v
	}
	return h
}

// reals returns the real header; the places not listed are not stated.
func (c *v2Channel) reals() [100]float64 {
	var h [100]float64
	for i := range h {
		h[i] = notStated
	}
	for at, v := range map[int]float64{
		1: instrumentPeriodS, 2: instrumentDamping, 3: float64(c.durationS()),
		29: c.station.latitude, 30: c.station.longitude,
		52: 980.665, 61: c.stepS(),
		65: c.peaks[0].at, 66: c.peaks[0].value,
		67: c.peaks[1].at, 68: c.peaks[1].value,
		69: c.peaks[2].at, 70: c.peaks[2].value,
		72: lowCutHz, 73: highCutHz(c.station.rateHz),
	} {
		h[at-1] = v
	}
	return h
}

// rmsG returns the root mean square of the acceleration in g.
func (c *v2Channel) rmsG() float64 {
	var sum int64
	for _, v := range c.motion {
		sum += int64(v) * int64(v) / 1000
	}
	return math.Sqrt(float64(sum)*1000/float64(len(c.motion))) * cmps2 / 980.665
}

// serial is an invented serial number of the recorder.
func (r *record) serial() int {
	n := 0
	for _, b := range []byte(r.station.code) {
		n = (n*31 + int(b)) % 9000
	}
	return 1000 + n
}

// channelsAtStation counts the channels of all places of the station.
func (r *record) channelsAtStation() int {
	if r.station.second != nowhere {
		return 6
	}
	return 3
}

// letters prints a position as "37.812N, 169.948E".
func letters(latitude, longitude float64) string {
	ns, ew := "N", "E"
	if latitude < 0 {
		ns = "S"
	}
	if longitude < 0 {
		ew = "W"
	}
	return fmt.Sprintf("%.3f%s, %.3f%s", math.Abs(latitude), ns, math.Abs(longitude), ew)
}
