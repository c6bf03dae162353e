package spectrum

import (
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"sync"
	"testing"
)

// sameRotD compares the bits of RotD.
func sameRotD(t *testing.T, what string, list []Oscillator, got, want [2][]float64) {
	t.Helper()
	for k, name := range []string{"RotD50", "RotD100"} {
		for i, d := range got[k] {
			if math.Float64bits(d) != math.Float64bits(want[k][i]) {
				t.Fatalf("%s: %+v: %s %v (%#x), want %v (%#x)", what, list[i], name, d, math.Float64bits(d), want[k][i], math.Float64bits(want[k][i]))
			}
		}
	}
}

// solvePair is RotD by a Solver made for it.
func solvePair(t *testing.T, stepS float64, list []Oscillator, first, second []float64) (d [2][]float64) {
	t.Helper()
	s, err := NewSolver(NigamJennings, stepS, list)
	if err != nil {
		t.Fatal(err)
	}
	d[0], d[1] = rotd(t, s, first, second)
	return d
}

// bitPairs are pairs with many peaks nearly as great as the greatest, or with
// none, long and short, small and great.
func bitPairs() map[string][2][]float64 {
	round, quarter := circular(400, 12, 0)
	dying, falling := circular(700, 55, 0.002)
	along, across := polarised(seededMotion(51, 700), 30)
	coda := make([]float64, 6000)
	return map[string][2][]float64{
		"noise":       {seededMotion(41, 900), seededMotion(42, 900)},
		"shaken":      {shaken(43, 5000), shaken(44, 5000)},
		"coda":        {slices.Concat(shaken(45, 1000), coda), slices.Concat(shaken(46, 1000), coda)},
		"round":       {round, quarter},
		"dying round": {dying, falling},
		"polarised":   {along, across},
		"no second":   {along, make([]float64, len(along))},
		"subnormal":   {scaledBy(seededMotion(47, 200), 0x1p-1060), scaledBy(seededMotion(48, 200), 0x1p-1062)},
		"tiny":        {scaledBy(seededMotion(49, 200), 1e-300), scaledBy(seededMotion(50, 200), 1e-300)},
		"huge":        {scaledBy(seededMotion(49, 200), 0x1p+1018), scaledBy(seededMotion(50, 200), 0x1p+1018)},
		"zero":        {make([]float64, 300), make([]float64, 300)},
	}
}

// bitList holds oscillators of all forms: parts of steps, free ones, steps,
// strides of both lengths, and those beyond.
func bitList() []Oscillator {
	return Grid{
		[]float64{0.05, 0.4, 1, 2.5, 4.9, 5.1, 6, 6.9, 9, 13, 20, 50, 120, 168, 250, 400, 672, 1000, 2000, 5000, 1e6},
		[]float64{0, 0.001, 0.05, 0.2, 0.99},
	}.Oscillators()
}

// TestRotDKernelsAgree holds every kernel to the bits of the portable one.
func TestRotDKernelsAgree(t *testing.T) {
	if raceDetector {
		t.Skip("nothing here runs beside anything, and the portable kernel takes minutes")
	}
	for name, pair := range bitPairs() {
		rotdKernelsAgree(t, name, 1, bitList(), pair[0], pair[1])
	}
	for n := range 2*blockSteps + 3 { // lanes filled or not
		list := bitList()[7*n%40:]
		list = list[:1+(5*n)%min(70, len(list))]
		rotdKernelsAgree(t, fmt.Sprintf("%d samples", n), 1, list, seededMotion(uint64(n), n), seededMotion(uint64(n+500), n))
	}
	least := []Oscillator{{MinPeriodStep, 0}, {MinPeriodStep, 0.05}}
	rotdKernelsAgree(t, "shortest periods", 1, least, seededMotion(63, 30), seededMotion(64, 30))
	for _, step := range []float64{0.005, 0.02} {
		rotdKernelsAgree(t, "default grid", step, DefaultGrid().Oscillators(), shaken(61, 2500), shaken(62, 2500))
	}
}

func rotdKernelsAgree(t *testing.T, name string, stepS float64, list []Oscillator, first, second []float64) {
	t.Helper()
	useKernel(t, "portable")
	want := solvePair(t, stepS, list, first, second)
	for _, k := range Kernels() {
		useKernel(t, k)
		sameRotD(t, name+" with "+k, list, solvePair(t, stepS, list, first, second), want)
	}
}

// TestRotDGrouping solves a list whole, shuffled and in parts. What an oscillator
// has beside it decides in which order blocks are looked at, and may not decide
// its bits.
func TestRotDGrouping(t *testing.T) {
	r := rand.New(rand.NewPCG(71, 0))
	for name, pair := range bitPairs() {
		rotdGrouping(t, r, name, 1, bitList(), pair[0], pair[1])
	}
	rotdGrouping(t, r, "default grid", 0.01, DefaultGrid().Oscillators(), shaken(72, 1500), shaken(73, 1500))
}

func rotdGrouping(t *testing.T, r *rand.Rand, name string, stepS float64, list []Oscillator, first, second []float64) {
	t.Helper()
	base := solvePair(t, stepS, list, first, second)
	order := r.Perm(len(list))
	for len(order) > 0 {
		n := min(len(order), 1+r.IntN(25))
		part, want := make([]Oscillator, n), [2][]float64{make([]float64, n), make([]float64, n)}
		for i, j := range order[:n] {
			part[i], want[0][i], want[1][i] = list[j], base[0][j], base[1][j]
		}
		sameRotD(t, fmt.Sprintf("%s, %d of the list", name, n), part, solvePair(t, stepS, part, first, second), want)
		order = order[n:]
	}
}

// TestRotDWorkSpace solves pairs of all lengths and kinds one after the other with
// one Solver, on one processor and on several at a time, and wants the bits of a
// Solver that has seen no other pair. The race detector watches.
func TestRotDWorkSpace(t *testing.T) {
	list := bitList()
	s, err := NewSolver(NigamJennings, 1, list)
	if err != nil {
		t.Fatal(err)
	}
	pairs := bitPairs()
	want := map[string][2][]float64{}
	for name, pair := range pairs {
		want[name] = solvePair(t, 1, list, pair[0], pair[1])
	}
	for _, processors := range []int{1, 4} {
		before := runtime.GOMAXPROCS(processors)
		var group sync.WaitGroup
		for range processors {
			group.Go(func() {
				for name, pair := range pairs {
					kept := [2][]float64{slices.Clone(pair[0]), slices.Clone(pair[1])}
					sd := [2][]float64{s.SD(nil, pair[0]), s.SD(nil, pair[1])}
					d50, d100 := s.RotD(pair[0], pair[1], sd[0], sd[1])
					for i := range list {
						if d50[i] != want[name][0][i] || d100[i] != want[name][1][i] {
							t.Errorf("%s: %+v: RotD50 %v RotD100 %v, want %v and %v", name, list[i], d50[i], d100[i], want[name][0][i], want[name][1][i])
						}
					}
					if !slices.Equal(pair[0], kept[0]) || !slices.Equal(pair[1], kept[1]) {
						t.Errorf("%s: samples were changed", name)
					}
				}
			})
		}
		group.Wait()
		runtime.GOMAXPROCS(before)
	}
}

// TestRotDAllocatesItsResults and nothing else, once its work space is there.
func TestRotDAllocatesItsResults(t *testing.T) {
	if raceDetector {
		t.Skip("the race detector has pools forget what they are given, one time in four")
	}
	for _, step := range []float64{0.005, 0.02} {
		s, err := NewSolver(NigamJennings, step, DefaultGrid().Oscillators()[:300])
		if err != nil {
			t.Fatal(err)
		}
		first, second := shaken(1, 2000), shaken(2, 2000)
		sdFirst, sdSecond := s.SD(nil, first), s.SD(nil, second)
		s.RotD(first, second, sdFirst, sdSecond)
		// A collection may empty the pool once in a while, never per call.
		if n := testing.AllocsPerRun(20, func() { s.RotD(first, second, sdFirst, sdSecond) }); n > 2 {
			t.Errorf("dt %g: RotD allocates %v times a call, want 2", step, n)
		}
	}
}
