package stats

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"slices"
	"testing"
)

// TestAgainstReference compares with the figures that NumPy gives for samples
// of many sizes; testdata/reference/percentiles.py made them and names the
// definition.
func TestAgainstReference(t *testing.T) {
	data, err := os.ReadFile(filepath.Join("..", "..", "testdata", "reference", "percentiles.json"))
	if err != nil {
		t.Fatal(err)
	}
	var reference struct {
		Percents []float64
		Cases    []struct {
			X           []float64
			Percentiles []float64
			Mean        float64
			LogMean     float64  `json:"log_mean"`
			LogStd      *float64 `json:"log_std"`
		}
	}
	if err := json.Unmarshal(data, &reference); err != nil {
		t.Fatal(err)
	}
	if len(reference.Cases) < 10 {
		t.Fatalf("only %d cases", len(reference.Cases))
	}
	for _, c := range reference.Cases {
		n := len(c.X)
		sorted := slices.Sorted(slices.Values(c.X))
		for i, got := range Percentiles(nil, sorted, reference.Percents) {
			if !near(got, c.Percentiles[i], 4e-15) { // ranks are rounded at other places
				t.Errorf("n = %d: Percentiles(%v) = %v, want %v", n, reference.Percents[i], got, c.Percentiles[i])
			}
		}
		logMean, logStd := LogMoments(nil, c.X)
		if !near(Mean(c.X), c.Mean, 1e-15) || !near(logMean, c.LogMean, 2e-15) {
			t.Errorf("n = %d: means %v, %v, want %v, %v", n, Mean(c.X), logMean, c.Mean, c.LogMean)
		}
		want := math.NaN()
		if c.LogStd != nil {
			want = *c.LogStd
		}
		if !near(logStd, want, 1e-14) {
			t.Errorf("n = %d: deviation of ln %v, want %v", n, logStd, want)
		}
	}
}
