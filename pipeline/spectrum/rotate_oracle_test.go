package spectrum

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// bruteRotD is RotD by its definition: SD of the component in every direction.
func bruteRotD(s *Solver, first, second []float64) (rotd50, rotd100 []float64) {
	var all [Directions][]float64
	for k := range all {
		sin, cos := math.Sincos(float64(k) * math.Pi / Directions)
		a := make([]float64, len(first))
		for i := range a {
			a[i] = first[i]*cos + second[i]*sin
		}
		all[k] = s.SD(nil, a)
	}
	for i := range s.Len() {
		var d [Directions]float64
		for k := range d {
			d[k] = all[k][i]
		}
		slices.Sort(d[:])
		rotd50 = append(rotd50, (d[Directions/2-1]+d[Directions/2])/2)
		rotd100 = append(rotd100, d[Directions-1])
	}
	return rotd50, rotd100
}

// checkRotD compares RotD with its definition, within 1e-9 of RotD100.
func checkRotD(t *testing.T, list []Oscillator, first, second []float64) {
	t.Helper()
	s, err := NewSolver(NigamJennings, 1, list)
	if err != nil {
		t.Fatal(err)
	}
	got50, got100 := rotd(t, s, first, second)
	want50, want100 := bruteRotD(s, first, second)
	for i := range list {
		if by := 1e-9 * want100[i]; !(math.Abs(got50[i]-want50[i]) <= by && math.Abs(got100[i]-want100[i]) <= by) {
			t.Errorf("%+v, motions %v and %v: RotD50 %v RotD100 %v, want %v and %v", list[i], first, second, got50[i], got100[i], want50[i], want100[i])
		}
	}
}

// circular returns a pair of components of a motion that goes round, once in a
// number of steps, dying away or not.
func circular(n int, period, decay float64) (first, second []float64) {
	for i := range n {
		sin, cos := math.Sincos(2 * math.Pi * float64(i) / period)
		size := math.Exp(-decay * float64(i))
		first, second = append(first, size*cos), append(second, size*sin)
	}
	return first, second
}

// TestRotDIsItsDefinition compares pairs of all kinds: noise, one like an
// earthquake's long enough for strides, polarised, nearly so, going round, with
// nothing in one component, of pulses of one sample.
func TestRotDIsItsDefinition(t *testing.T) {
	list := Grid{[]float64{0.05, 0.7, 3, 5.5, 12, 40, 180, 700, 5000}, []float64{0, 0.05, 0.7}}.Oscillators()
	noise, other := seededMotion(1, 400), seededMotion(2, 400)
	along, across := polarised(noise, 30)
	near := slices.Clone(across)
	for i := range near {
		near[i] += 1e-7 * other[i]
	}
	round, quarter := circular(400, 12, 0)
	dying, falling := circular(400, 40, 0.01)
	pulse, later := make([]float64, 130), make([]float64, 130)
	pulse[5], later[70] = 1, -1
	for name, pair := range map[string][2][]float64{
		"noise":       {noise, other},
		"long":        {shaken(3, 1500), shaken(4, 1500)},
		"polarised":   {along, across},
		"nearly so":   {along, near},
		"round":       {round, quarter},
		"dying round": {dying, falling},
		"no second":   {noise, make([]float64, 400)},
		"no first":    {make([]float64, 400), noise},
		"pulses":      {pulse, later},
		"unequal":     {noise, scaledBy(slices.Clone(other), 1e-12)},
		"nothing":     {make([]float64, 70), make([]float64, 70)},
		"two samples": {{1, 0}, {0, 1}},
		"one sample":  {{1}, {2}},
	} {
		t.Run(name, func(t *testing.T) { checkRotD(t, list, pair[0], pair[1]) })
	}
}

// FuzzRotD compares RotD of short pairs with its definition.
func FuzzRotD(f *testing.F) {
	bytesOf := func(a []float64) (b []byte) {
		for _, x := range a {
			b = append(b, byte(int8(math.Round(100*x))))
		}
		return b
	}
	zeros := make([]byte, 60)
	r := rand.New(rand.NewPCG(91, 0))
	noise := make([]float64, 250)
	for i := range noise {
		noise[i] = 0.3 * r.NormFloat64()
	}
	along, across := polarised(noise, 45)
	round, quarter := circular(80, 12, 0)
	f.Add(byte(0), bytesOf(along), bytesOf(across), 12.0, 0.05)
	f.Add(byte(0), bytesOf(round), bytesOf(quarter), 12.0, 0.0)
	f.Add(byte(0), bytesOf(round), bytesOf(quarter), 3.0, 0.99)
	f.Add(byte(0), bytesOf(noise), zeros, 200.0, 0.02)
	f.Add(byte(0), zeros, bytesOf(noise), 0.3, 0.0)
	f.Add(byte(0), append([]byte{0, 100}, zeros...), append(zeros, 100, 0), 700.0, 0.05)
	f.Add(byte(0), []byte{100, 0}, []byte{0, 156}, 0.05, 0.0)
	f.Add(byte(1), bytesOf(noise), bytesOf(noise[100:]), 4.9, 0.2)
	f.Add(byte(3), bytesOf(noise), bytesOf(along), 30.0, 0.7)
	f.Fuzz(func(t *testing.T, kind byte, x, y []byte, ratio, damping float64) {
		first, second := fuzzedMotion(append([]byte{kind}, x...)), fuzzedMotion(append([]byte{kind}, y...))
		n := min(len(first), len(second))
		first, second = first[:n], second[:n]
		// The definition rounds what is subnormal; its size is FuzzSD's.
		top := max(peakOf(first), peakOf(second))
		if _, exponent := math.Frexp(top); top > 0 {
			for i := range n {
				first[i], second[i] = timesPower(first[i], -exponent), timesPower(second[i], -exponent)
			}
		}
		if !(ratio >= 0.05 && ratio <= 5000) {
			ratio = math.Exp(folded(ratio, math.Log(0.05), math.Log(5000)))
		}
		checkRotD(t, []Oscillator{{ratio, folded(damping, 0, 0.99)}, {min(2*ratio, 5000), 0.05}}, first, second)
	})
}
