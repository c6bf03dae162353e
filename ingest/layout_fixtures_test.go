package ingest

import (
	"bytes"
	"fmt"
	"math"
	"path/filepath"
	"strings"
	"testing"
)

// layoutsDir is the folder of the example layouts and their files.
var layoutsDir = filepath.Join("..", "testdata", "layouts")

// quayLogger are the lines of a file of the layout quay-logger: counts that fill
// their fields, so that some touch.
func quayLogger(n int) []string {
	const scale = 0.00025
	x := ring(n, -249.75, 1.7, 0.97)
	counts := make([]int, n)
	for i := range x {
		counts[i] = int(math.Round(x[i] / scale))
	}
	lines := []string{
		"PORT OF NORTHWATER MOTION LOGGER      INVENTED FOR TESTS",
		"SITE         QUAY7  North mole, on the ground",
		"POSITION     30 30.0 N, 150 12.6 E",
		"EVENT        2041nwt",
		"FIRST SAMPLE  4-Mar-2041 09:12:16.5",
		"SENSOR AXIS  125 DEG",
		fmt.Sprintf("RATE         200 HZ, %d SAMPLES", n),
		fmt.Sprintf("SCALE        %g GAL/COUNT", scale),
		"LARGEST      249.75 GAL",
		"COUNTS",
	}
	return append(append(lines, integers(counts, 7, 10)...), "END")
}

// towerTable are the lines of a file of the layout tower-table.
func towerTable(n int) []string {
	ns, ew, ud := ring(n, 1.31, 1.7, 0.97), ring(n, -0.97, 1.75, 0.96), ring(n, 0.52, 1.5, 0.95)
	lines := []string{
		"Cedar Hill tower; channel group 2", "Invented for tests",
		"Datum;04.03.2041", "Uhrzeit;08:12:16,25 UTC", "Hochpass;0,05 Hz",
		"Zeit;Temp.;X;Y;Z", "ms;C;m/s2;m/s2;m/s2",
	}
	for i := range ns {
		row := fmt.Sprintf("%d;%.1f;%.5f;%.5f;%.5f", 5*i, 11.5, ns[i], ew[i], ud[i])
		lines = append(lines, strings.ReplaceAll(row, ".", ","))
	}
	return lines
}

// layoutFixtures are the files under testdata/layouts.
func layoutFixtures() []ringFixture {
	const format = "../layouts"
	quay, tower := quayLogger(197), towerTable(160)
	return []ringFixture{
		{format, "quay.txt", quay, "\r\n"},
		{format, "tower.csv", tower, "\n"},
		{format, "damaged-truncated.txt", quay[:20], "\r\n"},
		{format, "damaged-missing-sample.csv", without(tower, 60, 60), "\n"},
	}
}

// exampleLayouts reads the layouts under testdata/layouts.
func exampleLayouts(t testing.TB) Layouts {
	t.Helper()
	var ls Layouts
	for _, name := range []string{"quay-logger.toml", "tower-table.toml"} {
		if err := ls.Read(name, bytes.NewReader(readFile(t, filepath.Join(layoutsDir, name)))); err != nil {
			t.Fatal(err)
		}
	}
	return ls
}
