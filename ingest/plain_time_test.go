package ingest

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
)

// A missing sample is found although the times are printed so coarsely that a
// step is one unit of the last digit.
func TestTimeStepFindsMissingSamplesInCoarseTimes(t *testing.T) {
	for _, n := range []int{11, 100, 1000} {
		for _, missing := range [][]int{{n / 3}, {n / 3, n / 2}} {
			var times []float64
			var line []int
			for i := range n {
				if !slices.Contains(missing, i) {
					times, line = append(times, float64(i)/100), append(line, i+1)
				}
			}
			_, err := timeStep(times, 0.01, line)
			pe, ok := errors.AsType[*ParseError](err)
			if !ok || pe.Line != missing[0]+2 || !strings.Contains(pe.Error(), "missing sample") {
				t.Errorf("%d times without %v: %v", n, missing, err)
			}
		}
	}
}

// TestTimeStepRounding prints even times of many rates with few digits: they
// must pass, and the step must come back.
func TestTimeStepRounding(t *testing.T) {
	for _, rate := range []float64{40, 50, 80, 100, 120, 125, 128, 150, 180, 200, 240, 250, 256, 300, 333, 400, 500, 512} {
		for _, digits := range []int{2, 3, 4, 5} {
			digit := math.Pow10(-digits)
			if 1/rate < digit {
				continue // two samples at one printed time
			}
			times := make([]float64, 4000)
			line := make([]int, len(times))
			for i := range times {
				text := fmt.Sprintf("%.*f", digits, float64(i)/rate)
				times[i], _ = parseNumber([]byte(text))
				line[i] = i + 1
			}
			step, err := timeStep(times, digit, line)
			if err != nil {
				t.Errorf("%g Hz with %d digits: %v", rate, digits, err)
				continue
			}
			if nice := nearlyNice(step); math.Abs(nice*rate-1) > 1e-4 {
				t.Errorf("%g Hz with %d digits: step %g s", rate, digits, nice)
			}
			gap := append(append([]float64(nil), times[:1000]...), times[1001:]...)
			if _, err := timeStep(gap, digit, line); err == nil {
				t.Errorf("%g Hz with %d digits: a missing sample passed", rate, digits)
			}
		}
	}
}

func TestNearlyNice(t *testing.T) {
	for step, want := range map[float64]float64{
		0.0099999904: 0.01, 0.00500003: 0.005, 0.00333333: 1.0 / 300, 0.003: 0.003, 0.01237: 0.01237, 0.000512: 0.000512,
		0.0039062: 1.0 / 256, 0.02000001: 0.02, 0.0100011: 0.0100011,
	} {
		if got := nearlyNice(step); got != want {
			t.Errorf("nearlyNice(%g) = %g, want %g", step, got, want)
		}
	}
}
