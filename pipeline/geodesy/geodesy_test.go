package geodesy

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
)

// quadrantM is the length of a meridian from equator to pole, a·E(e²), as SciPy's
// special.ellipe gives it: 6378137*ellipe(f*(2-f)), f = 1/298.257223563.
const quadrantM = 10001965.729312722

// places returns pairs of points: any, nearly antipodal, close, near the equator,
// near a pole, and combinations on the quarter turns; offsets down to 1e-14
// degrees.
func places(rng *rand.Rand) (lat1, lon1, lat2, lon2 float64) {
	small := func() float64 { return rng.NormFloat64() * math.Pow(10, -14*rng.Float64()) }
	lat1, lon1 = 180*rng.Float64()-90, 360*rng.Float64()-180
	lat2, lon2 = 180*rng.Float64()-90, 360*rng.Float64()-180
	switch rng.IntN(6) {
	case 0:
		lat2, lon2 = -lat1+small(), lon1+180+small()
	case 1:
		lat2, lon2 = lat1+small(), lon1+small()
	case 2:
		lat1, lat2 = small(), small()
	case 3:
		lat1 = math.Copysign(90-math.Abs(small()), lat1)
	case 4:
		lat1, lat2 = 45*float64(rng.IntN(5)-2), 45*float64(rng.IntN(5)-2)
		lon1, lon2 = 90*float64(rng.IntN(5)-2), 90*float64(rng.IntN(5)-2)
	}
	within := func(x, limit float64) float64 { return max(-limit, min(limit, x)) }
	return within(lat1, 90), within(lon1, 360), within(lat2, 90), within(lon2, 360)
}

func line(t testing.TB, lat1, lon1, lat2, lon2 float64) Line {
	t.Helper()
	l, err := Inverse(lat1, lon1, lat2, lon2)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// checkSymmetry asks for a line there and back, and in both mirrors: the way back
// has the azimuths at the ends exchanged and turned.
func checkSymmetry(t testing.TB, lat1, lon1, lat2, lon2 float64) {
	t.Helper()
	const by = 1e-8
	there := line(t, lat1, lon1, lat2, lon2)
	if !(there.LengthM >= 0 && there.LengthM <= 2*quadrantM+by) {
		t.Errorf("from (%v, %v) to (%v, %v): length %v m", lat1, lon1, lat2, lon2, there.LengthM)
	}
	for _, azimuth := range []float64{there.StartAzimuthDeg, there.EndAzimuthDeg} {
		if !(azimuth >= 0 && azimuth < 360) {
			t.Errorf("from (%v, %v) to (%v, %v): azimuth %v", lat1, lon1, lat2, lon2, azimuth)
		}
	}
	for _, other := range []Line{line(t, lat2, lon2, lat1, lon1), line(t, -lat1, lon1, -lat2, lon2), line(t, lat1, -lon1, lat2, -lon2)} {
		if !(math.Abs(other.LengthM-there.LengthM) <= by) {
			t.Errorf("from (%v, %v) to (%v, %v): length %v m, mirrored or back %v", lat1, lon1, lat2, lon2, there.LengthM, other.LengthM)
		}
	}
}

func TestInverseIsSymmetric(t *testing.T) {
	rng := rand.New(rand.NewPCG(1855, 0))
	for range 20000 {
		lat1, lon1, lat2, lon2 := places(rng)
		checkSymmetry(t, lat1, lon1, lat2, lon2)
	}
}

// TestAzimuthsThereAndBack: the back azimuth is the azimuth of the way back. Not
// between antipodes, whose two lines are equally short.
func TestAzimuthsThereAndBack(t *testing.T) {
	rng := rand.New(rand.NewPCG(1855, 1))
	for range 2000 {
		lat1, lat2 := 160*rng.Float64()-80, 160*rng.Float64()-80
		lon := 170*rng.Float64() + 1
		there, back := line(t, lat1, 0, lat2, lon), line(t, lat2, lon, lat1, 0)
		if !(apart(there.EndAzimuthDeg+180, back.StartAzimuthDeg) < 1e-11 && apart(there.StartAzimuthDeg+180, back.EndAzimuthDeg) < 1e-11) {
			t.Errorf("(%v, 0) and (%v, %v): %+v and back %+v", lat1, lat2, lon, there, back)
		}
	}
}

func TestTriangles(t *testing.T) {
	rng := rand.New(rand.NewPCG(1855, 2))
	for range 20000 {
		lat1, lon1, lat2, lon2 := places(rng)
		lat3, lon3, _, _ := places(rng)
		direct := line(t, lat1, lon1, lat2, lon2).LengthM
		by := line(t, lat1, lon1, lat3, lon3).LengthM + line(t, lat3, lon3, lat2, lon2).LengthM
		if direct > by+2e-8 {
			t.Errorf("(%v, %v) to (%v, %v): %v m, but %v by (%v, %v)", lat1, lon1, lat2, lon2, direct, by, lat3, lon3)
		}
	}
}

// TestSolveMeetsTheSecondPoint puts the azimuth that was found back: the line must
// meet the parallel of the second point within 20 nm, across the line, of it.
func TestSolveMeetsTheSecondPoint(t *testing.T) {
	rng := rand.New(rand.NewPCG(1855, 3))
	for range 50000 {
		lat1, lon1, lat2, lon2 := places(rng)
		if math.Abs(lat1) < math.Abs(lat2) {
			lat1, lat2 = lat2, lat1
		}
		if lat1 > 0 {
			lat1, lat2 = -lat1, -lat2
		}
		lambda := math.Abs(math.Remainder(lon2-lon1, 360)) * (math.Pi / 180)
		if lambda == 0 || lambda == math.Pi || lat1 == -90 || lat1 == 0 {
			continue // by closed form
		}
		beta1, beta2 := wgs84.reduced(lat1), wgs84.reduced(lat2)
		alpha1, arc := wgs84.start(beta1, beta2, lambda)
		if arc < 1e-8 {
			continue // by the sphere
		}
		l := wgs84.solve(beta1, beta2, lambda, alpha1)
		missed := (l.longitude(wgs84) - lambda) * wgs84.equatorialM * beta2.cos * l.alpha2.cos
		if !(math.Abs(missed) <= 2e-8) {
			t.Errorf("(%v, 0) to (%v, %v rad): missed by %v m", lat1, lat2, lambda, missed)
		}
	}
}

// TestSpecialLines has closed forms: a degree of the equator is a·π/180, a
// quarter meridian a·E(e²).
func TestSpecialLines(t *testing.T) {
	const degreeM = 6378137 * math.Pi / 180
	cases := []struct {
		name                   string
		lat1, lon1, lat2, lon2 float64
		want                   Line
	}{
		{"same point", 41.5, 13, 41.5, 13, Line{0, 0, 0}},
		{"same point, a turn apart", 41.5, -180, 41.5, 180, Line{0, 0, 0}},
		{"eastward along the equator", 0, 10, 0, 11, Line{degreeM, 90, 90}},
		{"westward along the equator", 0, 10, 0, -11, Line{21 * degreeM, 270, 270}},
		{"across the date line", 0, 179, 0, -179, Line{2 * degreeM, 90, 90}},
		{"longitudes a turn apart", 0, 359, 0, -358, Line{3 * degreeM, 90, 90}},
		{"equator to north pole", 0, 20, 90, 20, Line{quadrantM, 0, 0}},
		{"equator to north pole, of another meridian", 0, 20, 90, -50, Line{quadrantM, 0, 290}},
		{"north pole to equator", 90, 20, 0, 50, Line{quadrantM, 150, 180}},
		{"equator to south pole", 0, 20, -90, 20, Line{quadrantM, 180, 180}},
		{"south pole to equator", -90, 20, 0, 50, Line{quadrantM, 30, 0}},
		{"pole to pole", -90, 0, 90, 0, Line{2 * quadrantM, 0, 0}},
		{"antipodes on the equator", 0, 0, 0, 180, Line{2 * quadrantM, 0, 180}},
		{"antipodes", 30, 0, -30, 180, Line{2 * quadrantM, 0, 180}},
		{"over the north pole", 60, 15, 60, -165, Line{2 * (quadrantM - line(t, 0, 0, 60, 0).LengthM), 0, 180}},
	}
	for _, c := range cases {
		got := line(t, c.lat1, c.lon1, c.lat2, c.lon2)
		if !(math.Abs(got.LengthM-c.want.LengthM) <= 2e-8 && apart(got.StartAzimuthDeg, c.want.StartAzimuthDeg) < 1e-13 &&
			apart(got.EndAzimuthDeg, c.want.EndAzimuthDeg) < 1e-13) {
			t.Errorf("%s: %+v, want %+v", c.name, got, c.want)
		}
	}
}

// TestEquatorEndsBeforeTheAntipode: the equator is the shortest line up to
// (1 − f)·180°, about 179.3965°; then lines that leave it are shorter, and the
// azimuth falls from 90° to 0.
func TestEquatorEndsBeforeTheAntipode(t *testing.T) {
	limit := 180 * (1 - wgs84.flattening)
	before, after := line(t, 0, 0, 0, limit), line(t, 0, 0, 0, limit+1e-6)
	if before.StartAzimuthDeg != 90 || math.Abs(before.LengthM-wgs84.polarM*math.Pi) > 1e-8 {
		t.Errorf("at the limit %+v, want azimuth 90 and π·b", before)
	}
	if !(after.StartAzimuthDeg < 90 && after.StartAzimuthDeg > 89.8) {
		t.Errorf("just beyond the limit %+v", after)
	}
	last := 90.0
	for lon := limit + 0.01; lon < 180; lon += 0.01 {
		l := line(t, 0, 0, 0, lon)
		if !(l.StartAzimuthDeg < last && apart(l.StartAzimuthDeg+l.EndAzimuthDeg, 180) < 1e-10 &&
			l.LengthM < wgs84.equatorialM*lon*math.Pi/180) {
			t.Errorf("%v degrees along the equator: %+v", lon, l)
		}
		last = l.StartAzimuthDeg
	}
}

func TestBadCoordinates(t *testing.T) {
	cases := []struct {
		lat1, lon1, lat2, lon2 float64
		want                   string
	}{
		{91, 0, 0, 0, "latitude 91 is not within ±90 degrees"},
		{0, 0, -90.001, 0, "latitude -90.001 is not within ±90 degrees"},
		{math.NaN(), 0, 0, 0, "latitude NaN is not within ±90 degrees"},
		{0, 361, 0, 0, "longitude 361 is not within ±360 degrees"},
		{0, 0, 0, math.Inf(-1), "longitude -Inf is not within ±360 degrees"},
		{0, 0, 0, math.NaN(), "longitude NaN is not within ±360 degrees"},
	}
	for _, c := range cases {
		if got, err := Inverse(c.lat1, c.lon1, c.lat2, c.lon2); err == nil || !strings.Contains(err.Error(), c.want) || got != (Line{}) {
			t.Errorf("Inverse(%v, %v, %v, %v) = %v, %v, want %q", c.lat1, c.lon1, c.lat2, c.lon2, got, err, c.want)
		}
	}
}

// TestSeriesAgainstQuadrature compares the three integrals with Gauss–Legendre
// quadrature of their integrands, which 60 points do to rounding.
func TestSeriesAgainstQuadrature(t *testing.T) {
	f := wgs84.flattening
	for _, part := range []float64{0, 0.1, 0.5, 0.9, 1} { // cos² α0
		k2 := wgs84.second2 * part
		epsilon := smallParameter(k2)
		root := func(s float64) float64 { return math.Sqrt(1 + k2*math.Sin(s)*math.Sin(s)) }
		integrals := []struct {
			name      string
			series    func() (float64, sines)
			integrand func(float64) float64
		}{
			{"I1", func() (float64, sines) { return lengthSeries(epsilon) }, root},
			{"I2", func() (float64, sines) { return inverseSeries(epsilon) }, func(s float64) float64 { return 1 / root(s) }},
			{"f·I3", func() (float64, sines) {
				a, c := wgs84.longitude.at(epsilon)
				return f * a, c
			}, func(s float64) float64 { return f * (2 - f) / (1 + (1-f)*root(s)) }},
		}
		for _, i := range integrals {
			a, c := i.series()
			for _, sigma := range []float64{-3, -1.2, 0.01, 0.4, 1, 1.7, 2.5, math.Pi} {
				sin, cos := math.Sincos(sigma)
				got := a * (sigma + c.at(direction{sin, cos}))
				want := quad.Fixed(i.integrand, 0, math.Abs(sigma), 60, quad.Legendre{}, 0)
				if !(math.Abs(got-math.Copysign(want, sigma)) <= 2e-15) {
					t.Errorf("%s at σ = %v, cos² α0 = %v: %v, want ±%v", i.name, sigma, part, got, want)
				}
			}
		}
	}
}

// TestSlope compares the derivative that Newton's method uses with a central
// difference.
func TestSlope(t *testing.T) {
	const h = 1e-5
	for _, c := range []struct{ lat1, lat2, azimuth float64 }{
		{-40, 20, 50}, {-40, -39, 100}, {-70, 69.9, 170}, {-10, 10, 90}, {-0.5, 0.4, 120},
	} {
		beta1, beta2 := wgs84.reduced(c.lat1), wgs84.reduced(c.lat2)
		at := func(radians float64) arc {
			alpha1 := direction{0, 1}.turned(radians)
			return wgs84.along(beta1, alpha1, beta2, wgs84.arrival(beta1, alpha1, beta2))
		}
		alpha := c.azimuth * math.Pi / 180
		if c.azimuth == 90 { // where the line touches both parallels the slope jumps
			alpha -= 2 * h
		}
		got := at(alpha).slope(wgs84)
		want := (at(alpha+h).longitude(wgs84) - at(alpha-h).longitude(wgs84)) / (2 * h)
		if !(math.Abs(got-want) <= 1e-6*math.Abs(want)) {
			t.Errorf("%+v: slope %v, want %v", c, got, want)
		}
	}
}

func TestHypocentral(t *testing.T) {
	for _, c := range []struct{ epicentral, depth, want float64 }{
		{0, 12e3, 12e3}, {30e3, 40e3, 50e3}, {5e3, -12e3, 13e3}, {7e3, 0, 7e3},
	} {
		if got := Hypocentral(c.epicentral, c.depth); math.Abs(got-c.want) > 1e-11*c.want {
			t.Errorf("Hypocentral(%v, %v) = %v, want %v", c.epicentral, c.depth, got, c.want)
		}
	}
	// What its comment says of the flat Earth: the chord is 2·R·sin(s/2R).
	const r, s = 6371e3, 1e6
	if excess := Hypocentral(s, 0)/(2*r*math.Sin(s/(2*r))) - 1; math.Abs(excess-s*s/(24*r*r)) > 1e-6 || excess > 1.1e-3 {
		t.Errorf("along the surface is longer than the chord by %v", excess)
	}
}

func FuzzInverse(f *testing.F) {
	f.Add(-30.0, 0.0, 29.9, 179.8)
	f.Add(0.0, 0.0, 0.0, 179.7)
	f.Add(-90.0, 12.0, 90.0, -168.0)
	f.Add(5e-324, 0.0, -5e-324, 180.0)
	f.Fuzz(func(t *testing.T, lat1, lon1, lat2, lon2 float64) {
		if _, err := Inverse(lat1, lon1, lat2, lon2); err == nil {
			checkSymmetry(t, lat1, lon1, lat2, lon2)
		}
	})
}

func BenchmarkInverse(b *testing.B) {
	cases := []struct {
		name                   string
		lat1, lon1, lat2, lon2 float64
	}{
		{"30 km", 38.1, 22.7, 38.3, 22.9},
		{"8000 km", 38.1, 22.7, -10, 100},
		{"nearly antipodal", -30, 0, 29.9, 179.8},
	}
	for _, c := range cases {
		b.Run(c.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Inverse(c.lat1, c.lon1, c.lat2, c.lon2); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
