package spectrum

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// TestContinuousMaximum compares D with the oracle, the whole motion in
// continuous time, and prints the greatest relative error for every ratio of
// period to step and every damping: go test -run TestContinuousMaximum -v.
//
// Ratios and dampings lie on both sides of each change of form: 5 steps, 10.13 with
// damping below 0.005, 167.6 and 670.2,
// from which 16 and 64 are advanced at once. Motions have up to 24 blocks.
func TestContinuousMaximum(t *testing.T) {
	ratios := []float64{0.05, 0.1, 0.2, 0.35, 0.5, 0.7, 1, 1.5, 2, 3, 4, 4.9, 5.1, 6, 8, 10.1, 10.2, 20, 50, 100, 167, 168, 300, 670, 671, 1000, 2000, 5000}
	dampings := []float64{0, 0.004, 0.006, 0.02, 0.05, 0.1, 0.2, 0.7, 0.99}
	table := []string{"| T/dt |", "| --- |"}
	for _, damping := range dampings {
		table[0] += fmt.Sprintf(" ζ = %g |", damping)
		table[1] += " --- |"
	}
	worst := 0.0
	for _, ratio := range ratios {
		row := fmt.Sprintf("| %g |", ratio)
		for _, damping := range dampings {
			e := greatestError(t, ratio, damping)
			row += fmt.Sprintf(" %.1e |", e)
			worst = max(worst, e)
		}
		table = append(table, row)
	}
	t.Logf("greatest error %.2g\n%s", worst, strings.Join(table, "\n"))
}

// greatestError returns the greatest relative error of D over several motions,
// and reports those above 1e-12, well within the 1e-9 that is promised.
func greatestError(t *testing.T, ratio, damping float64) (worst float64) {
	t.Helper()
	for i, a := range errorMotions(ratio) {
		e := off(solveOne(t, 1, ratio, damping, a), oracleSD(Omega(ratio), damping, a))
		if !(e <= 1e-12) {
			t.Errorf("motion %d T/dt %g damping %g: D is off by %.2g", i, ratio, damping, e)
		}
		worst = max(worst, e)
	}
	return worst
}

// errorMotions are noise with and without jumps at its ends, a motion like an
// earthquake's, and one in tune with the period, whose peaks are nearly equal.
func errorMotions(ratio float64) [][]float64 {
	jumps := seededMotion(1, 700)
	jumps[0], jumps[len(jumps)-1] = 0.7, -1.1
	r := rand.New(rand.NewPCG(71, 0))
	tuned := make([]float64, 650)
	for i := range tuned {
		tuned[i] = math.Copysign(1, math.Sin(2*math.Pi*(float64(i)+0.25)/ratio)) + 0.001*r.NormFloat64()
	}
	motions := [][]float64{seededMotion(0, 150), jumps, shaken(2, 1500), tuned}
	if testing.Short() {
		return motions[:2]
	}
	return append(motions, seededMotion(3, 150), seededMotion(4, 1000), shaken(5, 640))
}
