package ingest

import (
	"slices"
	"testing"
	"time"
)

// Each flag that reading raises is raised by what is wrong, once, with the warning's words,
// and not by what is nearly so.
func TestFindings(t *testing.T) {
	const dt = 0.005
	motion := rounded(swell(4000, dt), 1e-6)
	peak, top := peakOf(motion)
	lost := slices.Clone(motion)
	for i := top + 20; i < top+80; i++ {
		lost[i] = lost[top+20]
	}
	for _, test := range []struct {
		name   string
		x      []float64
		header float64
		want   string
	}{
		{"nothing", motion, peak, ""},
		{"clipped", clipped(motion, 0.7), 0, FlagClipped},
		{"two samples at the top", put(motion, top+1, motion[top]), 0, ""},
		{"a spike", put(motion, 700, motion[700]+0.5), 0, FlagSpikes},
		{"lost data", lost, 0, FlagLostData},
		{"a peak 3 % off", motion, 1.03 * peak, FlagPeakMismatch},
		{"a peak 1.5 % off", motion, 1.015 * peak, ""},
	} {
		c := Channel{Acceleration: slices.Clone(test.x), StepS: dt, Unit: "m/s2", UnitMPS2: 1}
		if test.header != 0 {
			c.HeaderPeak = Known(test.header)
		}
		if err := check(&c); err != nil {
			t.Errorf("%s: %v", test.name, err)
			continue
		}
		switch {
		case test.want == "" && len(c.Findings) > 0, test.want != "" && (len(c.Findings) != 1 || c.Findings[0].Flag != test.want):
			t.Errorf("%s: %+v, want %q", test.name, c.Findings, test.want)
		case test.want != "" && (!slices.Contains(c.Warnings, c.Findings[0].Words) || !(c.Findings[0].Value > c.Findings[0].Bound)):
			t.Errorf("%s: %+v, warnings %q", test.name, c.Findings, c.Warnings)
		}
	}
}

// Records of miniSEED whose times depart from the rate by more than half a step are
// irregular; by less, they are rounded.
func TestIrregularSampling(t *testing.T) {
	for _, test := range []struct {
		late time.Duration // of each record against the one before
		want bool
	}{{time.Millisecond, false}, {3 * time.Millisecond, true}} {
		var data []byte
		for k := range 3 {
			part := later(mseedRecord("HNE", 0, 9000), 200*k)
			part.Samples = part.Samples[:200]
			part.Start = part.Start.Add(time.Duration(k) * test.late)
			data = append(data, part.Series(1+k)...)
		}
		c := parseMiniSEED(t, data, mseedHints(t))[0]
		isFound := slices.ContainsFunc(c.Findings, func(f Finding) bool { return f.Flag == FlagIrregular && f.Value > f.Bound })
		if isFound != test.want || len(c.Acceleration) != 600 {
			t.Errorf("%v late: %d samples, %+v", test.late, len(c.Acceleration), c.Findings)
		}
	}
}
