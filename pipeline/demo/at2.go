package demo

import (
	"fmt"
	"strconv"
)

// microG is what a step of the samples is worth in g.
const microG = 1 / (stepsPerMPS2 * 9.80665)

// encodeAT2 writes a record as AT2 text in g, one file for each component.
func encodeAT2(r *record) []file {
	var files []file
	for _, c := range r.columns() {
		token := "UP"
		if c.azimuth > 0 {
			token = fmt.Sprintf("%03d", c.azimuth%360)
		}
		files = append(files, file{r.base() + "_" + token + ".AT2", at2File(r, c, token)})
	}
	return files
}

func at2File(r *record, c column, token string) []byte {
	b := make([]byte, 0, 16*len(c.motion))
	b = fmt.Appendf(b, "INVENTED STRONG MOTION RECORD, SIMULATED\n%s, %s, %s, %s\n",
		r.event.name, r.event.origin.Format("1/2/2006"), r.station.name, token)
	b = fmt.Appendf(b, "ACCELERATION TIME SERIES IN UNITS OF G. FILTER POINTS: HP=%.2f Hz LP=%.1f Hz\n",
		lowCutHz, highCutHz(r.station.rateHz))
	b = fmt.Appendf(b, "NPTS= %6d, DT= %s SEC\n", len(c.motion), fixed(r.stepS(), 4))
	return block(b, len(c.motion), 5, "\n", func(b []byte, i int) []byte {
		return appendFortranE(b, float64(c.motion[i])*microG)
	})
}

// appendFortranE appends v as Fortran's E15.7 does: a mantissa below one, without
// the zero before its point, of seven digits, and an exponent of two.
func appendFortranE(b []byte, v float64) []byte {
	if v == 0 {
		return append(b, "   .0000000E+00"...)
	}
	var buf [32]byte
	s := strconv.AppendFloat(buf[:0], v, 'e', 6, 64) // -d.dddddde±dd
	sign := byte(' ')
	if s[0] == '-' {
		sign, s = '-', s[1:]
	}
	exponent, _ := strconv.Atoi(string(s[9:]))
	b = append(b, ' ', ' ', sign, '.', s[0])
	b = append(b, s[2:8]...)
	b = append(b, 'E', '+')
	if exponent++; exponent < 0 {
		b[len(b)-1] = '-'
		exponent = -exponent
	}
	return append(b, byte('0'+exponent/10), byte('0'+exponent%10))
}
