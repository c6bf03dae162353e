package intensity

import (
	"math"
	"testing"
)

// sine is an invented motion of whole cycles: amplitude in m/s², frequency in Hz.
func sine(amplitude, hz, stepS float64, n int) []float64 {
	a := make([]float64, n)
	for i := range a {
		a[i] = amplitude * math.Sin(2*math.Pi*hz*float64(i)*stepS)
	}
	return a
}

func expect(t *testing.T, what string, got, want, share float64) {
	t.Helper()
	if !(math.Abs(got-want) <= share*math.Abs(want)) {
		t.Errorf("%s: %.9g, want %.9g", what, got, want)
	}
}

// Closed forms of a sine over whole cycles of length d: the integral of the square is
// amplitude²·d/2, that of the magnitude 2·amplitude·d/π. The chords of the samples lose
// less than (2π·hz·step)²/6 of it.
func TestSine(t *testing.T) {
	const amplitude, hz, stepS, n = 2.0, 1.5, 1e-3, 8001 // 12 cycles
	a := sine(amplitude, hz, stepS, n)
	d, chord := float64(n-1)*stepS, math.Pow(2*math.Pi*hz*stepS, 2)/6
	e := EnergyOf(a, stepS)
	expect(t, "Arias intensity", e.Arias(), math.Pi/(2*StandardGravity)*amplitude*amplitude*d/2, chord)
	expect(t, "absolute velocity", AbsoluteVelocity(a, stepS), 2*amplitude*d/math.Pi, chord)
	expect(t, "all seconds count", StandardisedAbsoluteVelocity(a, stepS), AbsoluteVelocity(a, stepS), 1e-12)
	expect(t, "duration 5-95", e.SignificantDuration(0.05, 0.95), 0.9*d, 0.02)
	expect(t, "root mean square", e.RootMeanSquare(), amplitude/math.Sqrt2, 0.02)
	expect(t, "mean period", MeanPeriod(sine(amplitude, 1.5, 0.005, 20000), 0.005), 1/1.5, 1e-3)
}

// Of a constant the build-up is a straight line: 90 % of the length (Trifunac and Brady
// 1975), 70 % from 5 to 75.
func TestConstant(t *testing.T) {
	a := make([]float64, 1001)
	for i := range a {
		a[i] = -3
	}
	e := EnergyOf(a, 0.01)
	expect(t, "duration 5-95", e.SignificantDuration(0.05, 0.95), 9, 1e-12)
	expect(t, "duration 5-75", e.SignificantDuration(0.05, 0.75), 7, 1e-12)
	expect(t, "root mean square", e.RootMeanSquare(), 3, 1e-12)
	expect(t, "Arias intensity", e.Arias(), math.Pi/(2*StandardGravity)*90, 1e-12)
	expect(t, "absolute velocity", AbsoluteVelocity(a, 0.01), 30, 1e-12)
	expect(t, "bracketed duration", BracketedDuration(a, 0.01, 3), 10, 1e-12)
	shares := e.Shares()
	expect(t, "share by 2.5 s", shares[250], 0.25, 1e-12)
	expect(t, "share in all", shares[1000], 1, 0)
}

// A triangle from 1 through 0 to -1: |a| is two triangles, a² a parabola.
func TestWithinStep(t *testing.T) {
	a := []float64{1, -1}
	expect(t, "absolute velocity", AbsoluteVelocity(a, 2), 1, 1e-15)
	expect(t, "energy", EnergyOf(a, 2).total(), 2.0/3, 1e-15)
	expect(t, "unequal sides", AbsoluteVelocity([]float64{-3, 1}, 1), (9+1)/8.0, 1e-15)
	expect(t, "one side", AbsoluteVelocity([]float64{-3, -1}, 1), 2, 1e-15)
}

// Only the seconds that reach 0.025 g count: of three, the middle one.
func TestStandardised(t *testing.T) {
	a := make([]float64, 301)
	for i := range a {
		a[i] = 0.02 * StandardGravity
	}
	for i := 120; i < 180; i++ {
		a[i] = 0.03 * StandardGravity
	}
	middle := StandardGravity * (0.02 + 0.01*0.6) // the slopes to and fro make up a whole step
	expect(t, "one second of three", StandardisedAbsoluteVelocity(a, 0.01), middle, 1e-12)
	if got := StandardisedAbsoluteVelocity(a[:100], 0.01); got != 0 {
		t.Errorf("below the floor: %g, want 0", got)
	}
}

func TestBracketedDuration(t *testing.T) {
	a := []float64{0, 0.4, 0.6, 0.1, -0.5, 0.2, 0}
	expect(t, "negative peaks too", BracketedDuration(a, 0.02, 0.5), 0.04, 1e-12)
	if got := BracketedDuration(a, 0.02, 0.7); got != 0 {
		t.Errorf("never reached: %g, want 0", got)
	}
}

// PSV linear in T, on periods that meet neither end of the range: the integral of
// T from 0.1 to 2.5 is (2.5² - 0.1²)/2.
func TestSpectrumIntensity(t *testing.T) {
	periods := []float64{0.05, 0.13, 0.7, 2.4, 3}
	expect(t, "of T", SpectrumIntensity(periods, periods), (2.5*2.5-0.01)/2, 1e-12)
	if got := SpectrumIntensity(periods[1:], periods[1:]); !math.IsNaN(got) {
		t.Errorf("from 0.13 s: %g, want NaN", got)
	}
}

func TestNothing(t *testing.T) {
	e := EnergyOf(make([]float64, 50), 0.01)
	for what, got := range map[string]float64{
		"Arias": e.Arias(), "duration": e.SignificantDuration(0.05, 0.95), "rms": e.RootMeanSquare(),
		"empty": EnergyOf(nil, 0.01).Arias(), "cav": AbsoluteVelocity(nil, 0.01),
	} {
		if got != 0 {
			t.Errorf("%s of nothing: %g", what, got)
		}
	}
	if got := MeanPeriod(make([]float64, 50), 0.01); !math.IsNaN(got) {
		t.Errorf("mean period of nothing: %g", got)
	}
}
