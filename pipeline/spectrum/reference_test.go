package spectrum

import (
	"encoding/json"
	"os"
	"path/filepath"
	"testing"
)

// reference is the file that testdata/reference/spectra.py writes with SciPy.
type reference struct {
	Provenance string
	Versions   map[string]string
	Dampings   []float64
	PeriodsS   []float64 `json:"periods_s"`
	Motions    []referenceMotion
}

type referenceMotion struct {
	Name         string
	StepS        float64 `json:"step_s"`
	N            int
	Seed         int64
	Tail         int64
	Sum          int64       `json:"sum_of_1024ths"`
	SumOfSquares int64       `json:"sum_of_squares"`
	ExpmSD       [][]float64 `json:"expm_sd_m"`
	IVP          []struct {
		PeriodS float64 `json:"period_s"`
		Damping float64
		SD      float64 `json:"sd_m"`
	}
}

// samples makes the motion as the head of spectra.py defines it, and checks
// that they are the very same.
func (m *referenceMotion) samples(t *testing.T) []float64 {
	t.Helper()
	x, walk, sum, squares := m.Seed, int64(0), int64(0), int64(0)
	a := make([]float64, m.N)
	for i := range a {
		k := int64(i + 1)
		x = (1103515245*x + 12345) % (1 << 31)
		walk += (x>>16 - 1<<14 - walk) >> 2
		n := int64(m.N)
		s := floorDivide(walk*min(8*k, n-k+m.Tail), n)
		sum, squares = sum+s, squares+s*s
		a[i] = float64(s) / 1024
	}
	if sum != m.Sum || squares != m.SumOfSquares {
		t.Fatalf("%s: samples add up to %d and %d, the file has %d and %d", m.Name, sum, squares, m.Sum, m.SumOfSquares)
	}
	return a
}

func floorDivide(x, y int64) int64 {
	q := x / y
	if x%y < 0 {
		q--
	}
	return q
}

// TestSciPyReference compares D with two computations by SciPy, whose own error
// is about 4e-10 (piecewise cubics) and some 1e-12 (integration of the
// differential equation).
func TestSciPyReference(t *testing.T) {
	var ref reference
	readReference(t, "spectra.json", &ref)
	if len(ref.Motions) != 3 || len(ref.PeriodsS)*len(ref.Dampings) != 185 {
		t.Fatalf("%d motions, %d periods, %d dampings in the file", len(ref.Motions), len(ref.PeriodsS), len(ref.Dampings))
	}
	for _, m := range ref.Motions {
		t.Run(m.Name, func(t *testing.T) {
			a := m.samples(t)
			worst := 0.0
			list := Grid{ref.PeriodsS, ref.Dampings}.Oscillators()
			for i, d := range mustSolve(t, NigamJennings, m.StepS, list, a) {
				want := m.ExpmSD[i/len(ref.PeriodsS)][i%len(ref.PeriodsS)]
				if !(off(d, want) <= 1e-9) {
					t.Errorf("%+v: D = %v m, matrix exponential gives %v (off by %.2g)", list[i], d, want, off(d, want))
				}
				worst = max(worst, off(d, want))
			}
			t.Logf("greatest difference from the matrix exponential %.2g", worst)
			worst = 0
			for _, w := range m.IVP {
				d := solveOne(t, m.StepS, w.PeriodS, w.Damping, a)
				if !(off(d, w.SD) <= 1e-10) {
					t.Errorf("T %g s damping %g: D = %v m, integration gives %v (off by %.2g)", w.PeriodS, w.Damping, d, w.SD, off(d, w.SD))
				}
				worst = max(worst, off(d, w.SD))
			}
			t.Logf("greatest difference from the integration %.2g", worst)
		})
	}
}

// readReference reads a file of testdata/reference.
func readReference(t *testing.T, name string, into any) {
	t.Helper()
	data, err := os.ReadFile(filepath.Join("..", "..", "testdata", "reference", name))
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, into); err != nil {
		t.Fatalf("%s: %v", name, err)
	}
}

// referencePair is a pair of motions of rotd.json, which rotd.py writes.
type referencePair struct {
	Name       string
	StepS      float64 `json:"step_s"`
	N          int
	Tail       int64
	Components [2]referenceMotion // seeds and sums
	RotD       []struct {
		PeriodS float64 `json:"period_s"`
		Damping float64
		RotD50  float64 `json:"rotd50_m"`
		RotD100 float64 `json:"rotd100_m"`
	}
}

// TestSciPyRotD compares RotD with a rotation by brute force of two histories by
// SciPy, whose own error is about 3e-11 (piecewise cubics).
func TestSciPyRotD(t *testing.T) {
	var ref struct{ Pairs []referencePair }
	readReference(t, "rotd.json", &ref)
	if len(ref.Pairs) != 2 {
		t.Fatalf("%d pairs in the file", len(ref.Pairs))
	}
	for _, p := range ref.Pairs {
		t.Run(p.Name, func(t *testing.T) {
			var list []Oscillator
			for _, w := range p.RotD {
				list = append(list, Oscillator{w.PeriodS, w.Damping})
			}
			if len(list) != 12 {
				t.Fatalf("%d oscillators in the file", len(list))
			}
			s, err := NewSolver(NigamJennings, p.StepS, list)
			if err != nil {
				t.Fatal(err)
			}
			var components [2][]float64
			for i, m := range p.Components {
				m.Name, m.N, m.Tail = p.Name, p.N, p.Tail
				components[i] = m.samples(t)
			}
			worst := 0.0
			d50, d100 := rotd(t, s, components[0], components[1])
			for i, w := range p.RotD {
				e := max(off(d50[i], w.RotD50), off(d100[i], w.RotD100))
				if !(e <= 2e-10) {
					t.Errorf("%+v: RotD50 %v RotD100 %v m, SciPy gives %v and %v", list[i], d50[i], d100[i], w.RotD50, w.RotD100)
				}
				worst = max(worst, e)
			}
			t.Logf("greatest difference %.2g", worst)
		})
	}
}
