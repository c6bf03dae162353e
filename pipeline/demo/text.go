package demo

import (
	"math"
	"strconv"
)

// file is a file to write: its name in the network's folder and its content.
type file struct {
	name string
	data []byte
}

// column is one component of a record under the names that formats give it.
type column struct {
	motion  []int32 // µm/s²
	compass string  // NS, EW, UD
	dashed  string  // N-S, E-W, U-D
	words   string  // 360 Deg, 90 Deg, Up
	azimuth int     // 360, 90; 0 for the vertical
}

// columns returns the three components.
func (r *record) columns() [3]column {
	return [3]column{
		{r.north, "NS", "N-S", "360 Deg", 360},
		{r.east, "EW", "E-W", "90 Deg", 90},
		{r.up, "UD", "U-D", "Up", 0},
	}
}

// base is the stem of the record's files in the formats that are free to choose
// it: event, station and, at a second place, that place.
func (r *record) base() string {
	s := r.event.code() + "_" + r.station.code
	if r.place == roof {
		s += "_roof"
	}
	return s
}

// location says in words where the instruments stand.
func (r *record) location() string {
	switch r.place {
	case roof:
		return "Roof: Centre"
	case borehole:
		return "Borehole"
	}
	return "Free field"
}

// cmps2 is what a step of the samples is worth in cm/s², the unit in which most
// of the formats print four decimals, which are exact.
const cmps2 = 1e-4

// peak returns the index of the largest absolute value; the first of equals.
func peak[T int32 | float64](x []T) int {
	at, largest := 0, T(0)
	for i, v := range x {
		if v < 0 {
			v = -v
		}
		if v > largest {
			at, largest = i, v
		}
	}
	return at
}

// card is a line of 80 columns, counted from 1, filled in place by place.
type card [80]byte

func newCard() *card {
	var c card
	for i := range c {
		c[i] = ' '
	}
	return &c
}

// put writes s from a column on, up to the end of the card at most, and returns
// the card.
func (c *card) put(col int, s string) *card {
	copy(c[col-1:], s)
	return c
}

// putInt writes an integer that ends in column last.
func (c *card) putInt(last, v int) *card {
	s := strconv.Itoa(v)
	return c.put(last-len(s)+1, s)
}

// putFixed writes a number of so many decimals that ends in column last.
func (c *card) putFixed(last int, v float64, decimals int) *card {
	s := fixed(v, decimals)
	return c.put(last-len(s)+1, s)
}

// fixed prints v with so many decimals and without a zero before the point, as
// Fortran's F does in narrow fields.
func fixed(v float64, decimals int) string {
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	switch {
	case len(s) > 1 && s[0] == '0':
		return s[1:]
	case len(s) > 2 && s[0] == '-' && s[1] == '0':
		return "-" + s[2:]
	}
	return s
}

// appendScaled appends v·10^−decimals right-aligned in a field of the width,
// without a zero before the point. A number too wide for it takes the room it
// needs; the writers choose widths that hold all values.
func appendScaled(b []byte, v int64, decimals, width int) []byte {
	var field [24]byte
	at := len(field)
	negative := v < 0
	if negative {
		v = -v
	}
	for i := range decimals {
		at--
		field[at] = byte('0' + v%10)
		v /= 10
		if i == decimals-1 {
			at--
			field[at] = '.'
		}
	}
	for first := decimals == 0; v > 0 || first; first = false {
		at--
		field[at] = byte('0' + v%10)
		v /= 10
	}
	if negative {
		at--
		field[at] = '-'
	}
	for range width - (len(field) - at) {
		b = append(b, ' ')
	}
	return append(b, field[at:]...)
}

// block appends n numbers in rows of perRow, each by number, and ends each row.
func block(b []byte, n, perRow int, lineEnd string, number func(b []byte, i int) []byte) []byte {
	for i := range n {
		b = number(b, i)
		if (i+1)%perRow == 0 || i == n-1 {
			b = append(b, lineEnd...)
		}
	}
	return b
}

// decimalsFor returns how many decimals a field of ten characters has room for,
// at most seven, if no value is larger than peak: a sign and a blank stay free.
func decimalsFor(peak float64) int {
	digits := 0
	for v := math.Abs(peak); v >= 1; v /= 10 {
		digits++
	}
	return max(0, min(7, 8-digits))
}
