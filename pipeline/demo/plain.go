package demo

import (
	"fmt"
	"strconv"
	"time"
)

// encodePlain writes a record as CSV with a time column, one file for each
// component. What comments say is what such files often say; the site is left to
// the catalogue.
func encodePlain(r *record) []file {
	var files []file
	for _, c := range r.columns() {
		files = append(files, file{r.base() + "_" + c.compass + ".csv", plainFile(r, c, "cm/s2")})
	}
	return files
}

func plainFile(r *record, c column, unit string) []byte {
	b := make([]byte, 0, 20*len(c.motion))
	for _, line := range [][2]string{
		{"note", "invented data, a motion simulated by the stochastic method"},
		{"event", r.event.code()},
		{"event_name", r.event.name},
		{"network", r.station.network.code},
		{"station", r.station.code},
		{"station_name", r.station.name},
		{"component", c.compass},
		{"start", r.start.Format(time.RFC3339)},
	} {
		b = fmt.Appendf(b, "# %s: %s\n", line[0], line[1])
	}
	b = fmt.Appendf(b, "time [s],acceleration [%s]\n", unit)
	return block(b, len(c.motion), 1, "\n", func(b []byte, i int) []byte {
		// Two decimals hold the steps of these stations, 0.01 and 0.02 s, and four
		// the samples.
		b = strconv.AppendFloat(b, float64(i)*r.stepS(), 'f', 2, 64)
		b = append(b, ',')
		return strconv.AppendFloat(b, float64(c.motion[i])*cmps2, 'f', 4, 64)
	})
}
