package signal

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"testing"
)

// reference is testdata/reference/conditioning.json, which conditioning.py beside it writes with
// SciPy.
type reference struct {
	N       int     `json:"n"`
	Seed    int     `json:"seed"`
	StepS   float64 `json:"step_s"`
	Filters []struct {
		Kind          string    `json:"kind"`
		CornerHz      float64   `json:"corner_hz"` // the lower one
		HighHz        float64   `json:"high_hz"`
		Order         int       `json:"order"`
		Filtered      []float64 `json:"filtered"`
		FrequenciesHz []float64 `json:"frequencies_hz"`
		Gain          []float64 `json:"gain"`
	} `json:"filters"`
	Trends []struct {
		Degree int       `json:"degree"`
		Rest   []float64 `json:"rest"`
	} `json:"trends"`
	Resampled []struct {
		N       int       `json:"n"`
		Factor  int       `json:"factor"`
		Samples []float64 `json:"samples"`
	} `json:"resampled"`
	Density []float64 `json:"density_of_247"`
}

func loadReference(t *testing.T) (r reference, samples []float64) {
	t.Helper()
	data, err := os.ReadFile(filepath.Join("..", "..", "testdata", "reference", "conditioning.json"))
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, &r); err != nil {
		t.Fatal(err)
	}
	return r, invented(r.N, r.Seed)
}

// invented makes the samples that conditioning.py makes.
func invented(n, seed int) []float64 {
	out, x := make([]float64, n), seed
	for i := range out {
		x = (1103515245*x + 12345) % (1 << 31)
		out[i] = float64(x>>16-1<<14) / 1024
	}
	return out
}

// expectNear fails where values differ by more than a share of the greatest.
func expectNear(t *testing.T, what string, got, want []float64, share float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("%s: %d values, want %d", what, len(got), len(want))
	}
	scale, off := 0.0, 0.0
	for i := range want {
		scale, off = max(scale, math.Abs(want[i])), max(off, math.Abs(got[i]-want[i]))
	}
	if !(off <= share*scale) {
		t.Errorf("%s: off by %.2g of the greatest", what, off/scale)
	}
}

// The tolerances are what is left of the digits of both: a high-pass filter at a
// thousandth of the sampling rate has poles within 0.003 of 1.
func TestFiltersAgainstSciPy(t *testing.T) {
	r, x := loadReference(t)
	for _, want := range r.Filters {
		var f Filter
		var err error
		switch want.Kind {
		case "lowpass":
			f, err = LowPass(want.Order, want.CornerHz, r.StepS)
		case "highpass":
			f, err = HighPass(want.Order, want.CornerHz, r.StepS)
		default:
			f, err = BandPass(want.Order, want.CornerHz, want.HighHz, r.StepS)
		}
		if err != nil {
			t.Fatal(err)
		}
		got := append([]float64(nil), x...)
		f.TwoWay(got)
		expectNear(t, want.Kind, got, want.Filtered, 2e-11)
		for i, frequency := range want.FrequenciesHz {
			gain := gainOf(f, frequency, r.StepS)
			if math.Abs(gain-want.Gain[i]) > 1e-9*want.Gain[i]+1e-13 {
				t.Errorf("%s of order %d at %g Hz: gain %g at %g Hz, want %g", want.Kind, want.Order, want.CornerHz, gain, frequency, want.Gain[i])
			}
		}
	}
}

func TestTrendsAgainstNumPy(t *testing.T) {
	r, x := loadReference(t)
	for _, want := range r.Trends {
		got := append([]float64(nil), x...)
		Detrend(got, want.Degree)
		expectNear(t, "trend", got, want.Rest, 1e-12)
	}
}

func TestResampleAgainstSciPy(t *testing.T) {
	r, x := loadReference(t)
	for _, want := range r.Resampled {
		expectNear(t, "resampled", Resample(x[:want.N], want.Factor), want.Samples, 1e-13)
	}
}

func TestPowerAgainstSciPy(t *testing.T) {
	r, x := loadReference(t)
	got := PowerOf(x[:247], r.StepS)
	expectNear(t, "power", got.Density[1:], r.Density[1:], 1e-12)
	if got.StepHz != 1/(250*r.StepS) {
		t.Errorf("step of %g Hz", got.StepHz)
	}
}

// gainOf is the amplitude that TwoWay leaves of a long harmonic motion of
// frequencyHz sampled every stepS seconds, from the sections themselves.
func gainOf(f Filter, frequencyHz, stepS float64) float64 {
	sin, cos := math.Sincos(2 * math.Pi * frequencyHz * stepS)
	sin2, cos2 := math.Sincos(4 * math.Pi * frequencyHz * stepS)
	power := 1.0
	for _, s := range f.sections {
		over := math.Hypot(s.b0+float64(s.b1*cos)+float64(s.b2*cos2), float64(s.b1*sin)+float64(s.b2*sin2))
		under := math.Hypot(1+float64(s.a1*cos)+float64(s.a2*cos2), float64(s.a1*sin)+float64(s.a2*sin2))
		power *= over / under
	}
	return power * power
}
