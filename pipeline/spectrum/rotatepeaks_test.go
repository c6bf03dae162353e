package spectrum

import (
	"math"
	"slices"
	"testing"
)

// brutePeaks is RotDPeaks by its definition: Peaks of the component in every
// direction.
func brutePeaks(stepS float64, first, second []float64) (d50, d100 GroundPeaks) {
	var all [3][]float64
	for k := range Directions {
		sin, cos := math.Sincos(float64(k) * math.Pi / Directions)
		a := make([]float64, len(first))
		for i := range a {
			a[i] = first[i]*cos + second[i]*sin
		}
		pga, pgv, pgd := Peaks(stepS, a)
		all[0], all[1], all[2] = append(all[0], pga), append(all[1], pgv), append(all[2], pgd)
	}
	var middle, most [3]float64
	for i, d := range all {
		slices.Sort(d)
		middle[i], most[i] = (d[Directions/2-1]+d[Directions/2])/2, d[Directions-1]
	}
	return GroundPeaks{middle[0], middle[1], middle[2]}, GroundPeaks{most[0], most[1], most[2]}
}

// peakNumbers lists what RotDPeaks returns, medians first.
func peakNumbers(d50, d100 GroundPeaks) [6]float64 {
	return [6]float64{d50.PGA, d50.PGV, d50.PGD, d100.PGA, d100.PGV, d100.PGD}
}

// nearPeaks compares such numbers times a factor, within shares of the maximum.
func nearPeaks(t *testing.T, what string, got, want [6]float64, factor, by50, by100 float64) {
	t.Helper()
	for i, x := range got {
		by := by50
		if i >= 3 {
			by = by100
		}
		if most := factor * want[3+i%3]; !(math.Abs(x-factor*want[i]) <= by*most) {
			t.Errorf("%s: number %d is %v, want %v (off by %.2g)", what, i, x, factor*want[i], math.Abs(x-factor*want[i])/most)
		}
	}
}

func peakPairs() map[string][2][]float64 {
	x, y := settled(shaken(91, 900)), settled(shaken(92, 900))
	along, across := polarised(x, 63)
	round, quarter := circular(300, 21, 0.004)
	return map[string][2][]float64{
		"settled":    {x, y},
		"drifting":   {shaken(93, 700), seededMotion(94, 700)},
		"noise":      {seededMotion(95, 400), seededMotion(96, 400)},
		"polarised":  {along, across},
		"round":      {round, quarter},
		"no second":  {x, make([]float64, len(x))},
		"alternate":  {{1, -1, 1, -1, 0.5, -0.9}, {0.2, 1, -1, 1, -1, 0.3}},
		"two":        {{1, 0.5}, {-0.3, 1}},
		"one":        {{1}, {2}},
		"none":       {nil, nil},
		"turns once": {{1, -3, 0.2}, {0.5, -1.5, 3}},
		"zero":       {make([]float64, 9), make([]float64, 9)},
	}
}

// TestRotDPeaksAreTheirDefinition compares peaks of all directions.
func TestRotDPeaksAreTheirDefinition(t *testing.T) {
	for name, pair := range peakPairs() {
		got := peakNumbers(RotDPeaks(0.02, pair[0], pair[1]))
		nearPeaks(t, name, got, peakNumbers(brutePeaks(0.02, pair[0], pair[1])), 1, 1e-12, 1e-12)
	}
}

// TestRotDPeaksKeepOrderAndAngle: the same properties as those of RotD.
func TestRotDPeaksKeepOrderAndAngle(t *testing.T) {
	half := math.Pi / 360
	for name, pair := range peakPairs() {
		got := peakNumbers(RotDPeaks(0.02, pair[0], pair[1]))
		for _, a := range pair {
			pga, pgv, pgd := Peaks(0.02, a)
			for i, one := range []float64{pga, pgv, pgd} {
				if !(got[3+i] >= one*(1-1e-12) && got[3+i] >= got[i] && got[i] >= got[3+i]*math.Sqrt(0.5)*(1-1e-12)) {
					t.Errorf("%s: number %d: median %v, maximum %v, a component %v", name, i, got[i], got[3+i], one)
				}
			}
		}
		turned := func(degrees float64) [6]float64 {
			x, y := turnedBy(pair[0], pair[1], degrees)
			return peakNumbers(RotDPeaks(0.02, x, y))
		}
		nearPeaks(t, name+" turned by whole degrees", turned(37), got, 1, 1e-11, 1e-11)
		nearPeaks(t, name+" turned", turned(12.4), got, 1, half/math.Cos(half)+1e-11, (1-math.Cos(half))/math.Cos(half)+1e-11)
		times := func(f float64) [6]float64 {
			return peakNumbers(RotDPeaks(0.02, scaledBy(slices.Clone(pair[0]), f), scaledBy(slices.Clone(pair[1]), f)))
		}
		nearPeaks(t, name+" times -4", times(-4), got, 4, 0, 0)
		for _, f := range []float64{1e-290, 1e290} {
			nearPeaks(t, name+" times a power of ten", times(f), got, f, 1e-12, 1e-12)
		}
		nearPeaks(t, name+" times 0.3", times(0.3), got, 0.3, 1e-12, 1e-12)
	}
}

// TestRotDPeaksAcrossKernels: every kernel gives the same bits.
func TestRotDPeaksAcrossKernels(t *testing.T) {
	for name, pair := range peakPairs() {
		useKernel(t, "portable")
		want := peakNumbers(RotDPeaks(0.02, pair[0], pair[1]))
		for _, k := range Kernels() {
			useKernel(t, k)
			if got := peakNumbers(RotDPeaks(0.02, pair[0], pair[1])); got != want {
				t.Errorf("%s with %s: %v, want %v", name, k, got, want)
			}
		}
	}
}

// TestRotDPeaksOfNoNumbers: NaN and infinite samples make all of them NaN.
func TestRotDPeaksOfNoNumbers(t *testing.T) {
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		for _, pair := range [][2][]float64{{{0, bad, 1}, {0, 1, 0}}, {{0, 1, 1}, {0, 0, bad}}} {
			for i, x := range peakNumbers(RotDPeaks(0.01, pair[0], pair[1])) {
				if !math.IsNaN(x) {
					t.Errorf("%v: number %d is %v, want NaN", bad, i, x)
				}
			}
		}
	}
}
