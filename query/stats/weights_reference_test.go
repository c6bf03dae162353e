package stats

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"testing"
)

// readReference reads a file of testdata/reference.
func readReference(t *testing.T, name string, into any) {
	t.Helper()
	data, err := os.ReadFile(filepath.Join("..", "..", "testdata", "reference", name))
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, into); err != nil {
		t.Fatal(err)
	}
}

// TestWeightsAgainstReference compares with figures in rational numbers;
// testdata/reference/weights.py made them and names the definition.
func TestWeightsAgainstReference(t *testing.T) {
	var reference struct {
		Percents []float64
		Cases    []struct {
			X, Weights, Percentiles []float64
			Effective, Mean         float64
			LogMean                 float64  `json:"log_mean"`
			LogStd                  *float64 `json:"log_std"`
		}
	}
	readReference(t, "weights.json", &reference)
	if len(reference.Cases) < 30 {
		t.Fatalf("only %d cases", len(reference.Cases))
	}
	for k, c := range reference.Cases {
		for i, got := range WeightedPercentiles(nil, nil, c.X, c.Weights, reference.Percents) {
			if !near(got, c.Percentiles[i], 2e-14) { // positions up to 120 are rounded
				t.Errorf("case %d: percentile %v = %v, want %v", k, reference.Percents[i], got, c.Percentiles[i])
			}
		}
		want := math.NaN()
		if c.LogStd != nil {
			want = *c.LogStd
		}
		logMean, logStd := WeightedLogMoments(nil, c.X, c.Weights)
		for name, pair := range map[string][2]float64{
			"effective number": {EffectiveNumber(c.Weights), c.Effective},
			"mean":             {WeightedMean(c.X, c.Weights), c.Mean},
			"log-mean":         {logMean, c.LogMean},
			"deviation":        {logStd, want},
		} {
			if !near(pair[0], pair[1], 4e-15) {
				t.Errorf("case %d: %s = %v, want %v", k, name, pair[0], pair[1])
			}
		}
	}
}
