package spectrum

import (
	"math"
	"testing"
)

// rotd solves a pair of components.
func rotd(t testing.TB, s *Solver, first, second []float64) (rotd50, rotd100 []float64) {
	t.Helper()
	return s.RotD(first, second, s.SD(nil, first), s.SD(nil, second))
}

// polarised returns a pair of components of one motion along an azimuth from the
// first.
func polarised(a []float64, degrees float64) (first, second []float64) {
	sin, cos := math.Sincos(degrees * math.Pi / 180)
	for _, x := range a {
		first, second = append(first, x*cos), append(second, x*sin)
	}
	return first, second
}

// TestRotDOfPolarisedMotion: D(θ) is D·|cos(θ − α)|. Where α is whole the values
// are those of |cos| at whole degrees, once at 0° and 90° and twice between, so
// that the middle two of 180 are cos 45°.
func TestRotDOfPolarisedMotion(t *testing.T) {
	a := shaken(3, 500)
	list := []Oscillator{{0.013, 0.05}, {0.1, 0}, {0.4, 0.05}, {1, 0.2}, {7, 0.05}}
	s, err := NewSolver(NigamJennings, 0.01, list)
	if err != nil {
		t.Fatal(err)
	}
	want := s.SD(nil, a)
	for _, azimuth := range []float64{0, 17, 45, 90, 133} {
		first, second := polarised(a, azimuth)
		d50, d100 := rotd(t, s, first, second)
		for i := range list {
			middle := want[i] * math.Cos(math.Pi/4)
			if off(d100[i], want[i]) > 1e-12 || off(d50[i], middle) > 1e-12 {
				t.Errorf("%v at %g°: RotD50 %v RotD100 %v, want %v and %v", list[i], azimuth, d50[i], d100[i], middle, want[i])
			}
		}
	}
}

// TestRightAngle turns a component 60° from the first back to a right angle.
func TestRightAngle(t *testing.T) {
	x, y := shaken(1, 100), shaken(2, 100)
	oblique := make([]float64, len(x))
	for i := range x {
		oblique[i] = x[i]*0.5 + y[i]*math.Sqrt(0.75)
	}
	got := NewPair(x, oblique, 0, 60).B
	for i := range y {
		if math.Abs(got[i]-y[i]) > 1e-15 {
			t.Fatalf("sample %d: %v, want %v", i, got[i], y[i])
		}
	}
}
