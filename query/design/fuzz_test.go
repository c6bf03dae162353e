package design

import (
	"errors"
	"math"
	"os"
	"path/filepath"
	"testing"
	"unicode/utf8"
)

// FuzzParse reads any description with any table: the error is a *FileError,
// and what is accepted has a name, values within its band, and none outside.
func FuzzParse(f *testing.F) {
	files, err := filepath.Glob(filepath.Join("testdata", "*.toml"))
	if err != nil || len(files) == 0 {
		f.Fatalf("no fixtures: %v", err)
	}
	for _, file := range files {
		text, err := os.ReadFile(file)
		if err != nil {
			f.Fatal(err)
		}
		rows, _ := os.ReadFile(file[:len(file)-len(".toml")] + ".csv")
		f.Add(text, rows)
	}
	f.Add([]byte(head), []byte("T [ms];value;unit\n100;0.5;g\n200;0.25;g\n"))
	f.Fuzz(func(t *testing.T, text, rows []byte) {
		s, err := parse("d.toml", text, func(string, int64) ([]byte, error) { return rows, nil })
		if err != nil {
			if _, ok := errors.AsType[*FileError](err); !ok {
				t.Fatalf("%T: %v", err, err)
			}
			return
		}
		checkSpectrum(t, s)
	})
}

func checkSpectrum(t *testing.T, s Spectrum) {
	t.Helper()
	if s.Name() == "" || utf8.RuneCountInString(s.Name()) > maxName || printable(s.Name()) != s.Name() || s.Words() == "" {
		t.Fatalf("name %q, words %q", s.Name(), s.Words())
	}
	own, fixed := s.Damping()
	from, to := s.Band()
	if !(own >= 0 && own <= maxDamping && from >= 0 && to > from) {
		t.Fatalf("damping %v, band %v to %v s", own, from, to)
	}
	last := math.Min(to, 1000)
	for i := range 101 {
		period := math.Min(from+(last-from)*float64(i)/100, last)
		if psa := s.PSAg(period, own); !(psa > 0 && psa < 1e4) {
			t.Fatalf("%v g at %v s", psa, period)
		}
		if other := s.PSAg(period, 0.123); own != 0.123 && math.IsNaN(other) != fixed {
			t.Fatalf("%v g at 12.3 %% and %v s, fixed %v", other, period, fixed)
		}
	}
	for _, period := range []float64{from - 1e-3, to + 1, math.NaN()} {
		if psa := s.PSAg(period, own); !math.IsNaN(psa) {
			t.Fatalf("%v g at %v s, outside %v to %v", psa, period, from, to)
		}
	}
}
