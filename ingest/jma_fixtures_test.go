package ingest

import (
	"fmt"
	"slices"
	"testing"
)

// jmaLines is an invented file of three ringing series in gal.
func jmaLines() []string {
	lines := []string{
		"SITE CODE=91017,Aranai-mura", " LAT.= 30.5000", " LON.=149.7500", " SAMPLING RATE=100Hz", " UNIT  = gal(cm/s/s)",
		" INITIAL TIME = 2041 03 04 08 12 16", "NS,EW,UD",
	}
	ns, ew, ud := jmaSeries()
	for i := range ns {
		lines = append(lines, fmt.Sprintf("%.3f,%.3f,%.3f", ns[i], ew[i], ud[i]))
	}
	return lines
}

// jmaLong is an invented file of n rows.
func jmaLong(n int) []string {
	lines := jmaLines()[:7]
	for _, v := range ring(n, 61.125, 1.99, 0.999) {
		lines = append(lines, fmt.Sprintf("%.3f,%.3f,%.3f", v, -v, v/2))
	}
	return lines
}

func jmaSeries() (ns, ew, ud []float64) {
	return ring(150, 61.125, 1.7, 0.97), ring(150, -48.75, 1.75, 0.96), ring(150, 21.5, 1.5, 0.95)
}

// jmaFixtures are the files under testdata/records/jma-csv.
func jmaFixtures(t testing.TB) []ringFixture {
	const format = "jma-csv"
	lines := jmaLines()
	shiftJIS := edit(t, lines, 1, "Aranai-mura", "\x8d\x72\x93\x96\x91\xba")
	return []ringFixture{
		{format, "91017.csv", lines, "\n"},
		{format, "91017-shift-jis.csv", shiftJIS, "\r\n"},
		{format, "damaged-truncated.csv", append(slices.Clone(lines[:100]), lines[100][:9]), "\n"},
		{format, "damaged-unit.csv", edit(t, lines, 5, "gal(cm/s/s)", "gal(m/s/s)"), "\n"},
		{format, "damaged-columns.csv", edit(t, lines, 7, "NS,EW,UD", "NS,EW"), "\n"},
		{format, "damaged-page-appended.csv", append(slices.Clone(lines), "<html>", "</html>"), "\n"},
	}
}
