package geodesy

import (
	"encoding/json"
	"math"
	"os"
	"testing"
)

// referenceLine is a line of testdata/reference/geodesy.json, integrated with 34
// digits from the equation of a free point on the surface; longitude1 is 0.
type referenceLine struct {
	Name              string
	EquatorialM       float64 `json:"equatorial_m"`
	InverseFlattening float64 `json:"inverse_flattening"`
	Latitude1         float64
	Azimuth1          float64
	LengthM           float64 `json:"length_m"`
	Latitude2         float64
	Longitude2        float64
	Azimuth2          float64
}

func referenceLines(t testing.TB) (published, lines []referenceLine) {
	t.Helper()
	text, err := os.ReadFile("../../testdata/reference/geodesy.json")
	if err != nil {
		t.Fatal(err)
	}
	var file struct{ Published, Lines []referenceLine }
	if err := json.Unmarshal(text, &file); err != nil {
		t.Fatal(err)
	}
	if len(file.Published) != 8 || len(file.Lines) != 200 {
		t.Fatalf("%d and %d reference lines, want 8 and 200", len(file.Published), len(file.Lines))
	}
	return file.Published, file.Lines
}

// apart is the difference of two azimuths in degrees.
func apart(a, b float64) float64 { return math.Abs(math.Remainder(a-b, 360)) }

// TestInverseAgainstIntegration finds the lines again from their ends. Rounding
// the ends to doubles alone moves them by up to 2 nm; at the ends of lines far
// from half a turn an azimuth may be off by what 20 nm across the line amount to,
// and a nearly antipodal one, whose end hardly depends on it, by 1e-8 degrees.
func TestInverseAgainstIntegration(t *testing.T) {
	const lengthM, antipodalDeg = 2e-8, 1e-8
	published, lines := referenceLines(t)
	worst := 0.0
	for _, r := range append(published, lines...) {
		got := newEllipsoid(r.EquatorialM, 1/r.InverseFlattening).inverse(r.Latitude1, 0, r.Latitude2, r.Longitude2)
		worst = max(worst, math.Abs(got.LengthM-r.LengthM))
		if !(math.Abs(got.LengthM-r.LengthM) <= lengthM) {
			t.Errorf("%+v: length %.9f m", r, got.LengthM)
		}
		azimuthDeg := antipodalDeg
		if r.LengthM < 1.9e7 {
			azimuthDeg = lengthM / (6.37e6 * math.Sin(r.LengthM/6.37e6)) * (180 / math.Pi)
		}
		if !(apart(got.StartAzimuthDeg, r.Azimuth1) <= azimuthDeg && apart(got.EndAzimuthDeg, r.Azimuth2) <= azimuthDeg) {
			t.Errorf("%+v: azimuths %v and %v, off by more than %.1e degrees", r, got.StartAzimuthDeg, got.EndAzimuthDeg, azimuthDeg)
		}
	}
	t.Logf("greatest difference of length %.1e m", worst)
}

func dms(degrees, minutes, seconds float64) float64 { return degrees + minutes/60 + seconds/3600 }

// TestPublishedLines compares lines in print with their printed digits. All values
// are from memory; TestInverseAgainstIntegration checks the same lines, integrated
// from their first point.
//
// Sources: T. Vincenty, Direct and inverse solutions of geodesics on the ellipsoid
// with application of nested equations, Survey Review 23(176), 1975, table 2, on
// the ellipsoids of Bessel (a) and of 1924 (b to e); Karney (2013), tables 2 to 4.
// Vincenty prints lengths to 1 mm and angles to 0.00001″, which are 0.3 mm of
// place and thereby 0.001″ and more of azimuth near the antipode (d, e). Of a line
// of 5 m (Karney's table 3) the rounding of a latitude, 0.4 nm, is 5e-9 degrees.
func TestPublishedLines(t *testing.T) {
	bessel := newEllipsoid(6377397.155, 1/299.1528128)
	international := newEllipsoid(6378388, 1.0/297)
	const second = 1.0 / 3600
	cases := []struct {
		name                            string
		on                              *ellipsoid
		latitude1, latitude2, longitude float64
		lengthM, azimuth1, azimuth2     float64
		byM, byDeg                      float64
	}{
		{"Vincenty a", bessel, 55.75, -dms(33, 26, 0), dms(108, 13, 0),
			14110526.170, dms(96, 36, 8.79960), dms(137, 52, 22.01454), 1e-3, 1.2e-5 * second},
		{"Vincenty b", international, dms(37, 19, 54.95367), dms(26, 7, 42.83946), dms(41, 28, 35.50729),
			4085966.703, dms(95, 27, 59.63089), dms(118, 5, 58.96161), 1e-3, 1.2e-5 * second},
		{"Vincenty c", international, dms(35, 16, 11.24862), dms(67, 22, 14.77638), dms(137, 47, 28.31435),
			8084823.839, dms(15, 44, 23.74850), dms(144, 55, 39.92147), 1e-3, 1.2e-5 * second},
		{"Vincenty d", international, 1, -dms(0, 59, 53.83076), dms(179, 17, 48.02997),
			19960000.000, 89, dms(91, 0, 6.11733), 1e-3, 2e-3 * second},
		{"Vincenty e", international, 1, dms(1, 1, 15.18952), dms(179, 46, 17.84244),
			19780006.5584, dms(4, 59, 59.99995), dms(174, 59, 59.88481), 1e-3, 2e-3 * second},
		{"Karney table 2", wgs84, 40, 41.79331020506, 137.84490004377, 1e7, 30, 149.09016931807, 1e-6, 1e-11},
		{"Karney table 3", wgs84, -30.12345, -30.12344, 0.00005, 4.944208, 77.04353354237, 77.04350844913, 6e-7, 5e-9},
		{"Karney table 4", wgs84, -30, 29.9, 179.8, 19989832.827610, 161.890524736, 18.090737246, 6e-7, 6e-10},
	}
	for _, c := range cases {
		got := c.on.inverse(c.latitude1, 0, c.latitude2, c.longitude)
		if !(math.Abs(got.LengthM-c.lengthM) <= c.byM) {
			t.Errorf("%s: length %.6f m, want %.6f", c.name, got.LengthM, c.lengthM)
		}
		if !(apart(got.StartAzimuthDeg, c.azimuth1) <= c.byDeg && apart(got.EndAzimuthDeg, c.azimuth2) <= c.byDeg) {
			t.Errorf("%s: azimuths %.11f and %.11f, want %.11f and %.11f",
				c.name, got.StartAzimuthDeg, got.EndAzimuthDeg, c.azimuth1, c.azimuth2)
		}
	}
}
