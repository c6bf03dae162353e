package chart

import (
	"math"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgsvg"
)

// inventedFourWay is of the invented spectra, in cm.
func inventedFourWay() *FourWay {
	s := invented(40)
	psv := func(psa []float64) []float64 {
		out := make([]float64, len(psa))
		for i, a := range psa {
			out[i] = a * standardGravity * s.PeriodsS[i] / (2 * math.Pi)
		}
		return out
	}
	c := &FourWay{Title: "Invented", PeriodsS: s.PeriodsS, Units: FourWayUnits{"cm", "cm/s", 0.01, 0.01}, Curves: []Curve{{"median", Median, psv(s.Curves[0].Values)}}}
	for _, psa := range s.Each {
		c.Each = append(c.Each, psv(psa))
	}
	return c
}

// readBack is the period in s and the PSV in m/s of a point on the chart, by the definition
// of logarithmic axes and nothing of the chart's own drawing.
func readBack(f *frame, p vg.Point) (periodS, psv float64) {
	size := f.Size()
	across, up := float64((p.X-f.Min.X)/size.X), float64((p.Y-f.Min.Y)/size.Y)
	return f.x.from * math.Pow(f.x.to/f.x.from, across), f.y.from * math.Pow(f.y.to/f.y.from, up)
}

// At any point of the chart SD·ω = PSV and PSV·ω = PSA as read from the diagonals, which
// lie at 45°.
func TestDiagonalsAreTrue(t *testing.T) {
	s := inventedFourWay()
	canvas := draw.NewCanvas(vgsvg.New(500, 500), 500, 500)
	_, f := s.layout(canvas, s.base())
	sd, psa := 0, 0
	for _, d := range s.diagonals(&f) {
		upper, lower, ok := d.within(&f)
		if !ok {
			continue
		}
		if slope := float64((upper.Y - lower.Y) / (upper.X - lower.X)); math.Abs(math.Abs(slope)-1) > 1e-9 || slope > 0 != d.rises {
			t.Errorf("%s %s has slope %v", d.name, d.unit, slope)
		}
		for _, share := range []vg.Length{0, 0.31, 1} {
			periodS, psv := readBack(&f, lower.Add(upper.Sub(lower).Scale(share)))
			omega := 2 * math.Pi / periodS
			want, got := d.at*s.Units.SDInM, psv/omega // SD in m
			if d.rises {
				want, got = d.at*9.80665, psv*omega // PSA in m/s²
				psa++
			} else {
				sd++
			}
			if math.Abs(got/want-1) > 1e-9 {
				t.Errorf("%s %s: at T = %v s the chart says %v, want %v", d.name, d.unit, periodS, got, want)
			}
		}
	}
	if sd < 20 || psa < 20 {
		t.Errorf("%d points of SD and %d of PSA compared", sd, psa)
	}
}

// What is written at a reading is what is read, by hand: 0.5 m/s at 2π/5 s, ω = 5 rad/s, are
// 0.1 m and 2.5 m/s².
func TestReadings(t *testing.T) {
	sd, psv, psa := Reading{PeriodS: 2 * math.Pi / 5, PSV: 0.5}.Values()
	if math.Abs(sd-0.1) > 1e-15 || psv != 0.5 || math.Abs(psa*9.80665-2.5) > 1e-14 {
		t.Errorf("SD %v m, PSV %v m/s, PSA %v g", sd, psv, psa)
	}
	s := inventedFourWay()
	s.Readings = []Reading{{"T = 1 s", 1, 0.02}, {"outside", 99, 0.02}, {"below", 1, 1e-9}, {"unknown", 2, math.NaN()}}
	words := string(written(t, SVG, s))
	for _, want := range []string{"\nSD 0.318 cm\n", "\nPSV 2 cm/s\n", "\nPSA 0.0128 g\n", "\n0.1 g\n", "\n1 cm\n"} {
		if !strings.Contains(words, want) {
			t.Errorf("%q is not written", want)
		}
	}
	if !strings.Contains(words, "<desc>not marked, as nothing is drawn there: outside, below, unknown\n") || strings.Count(words, "\nPSV ") != 2 { // with the axis
		t.Error("readings that cannot be drawn are not told apart")
	}
}

// TestFourWayCounts: statistics have the strip of counts below them, one record's spectra none.
func TestFourWayCounts(t *testing.T) {
	for _, counts := range [][]int{nil, {3, 41, 7}} {
		s := inventedFourWay()
		if counts != nil {
			s.Counts = append(counts, make([]int, len(s.PeriodsS)-len(counts))...)
		}
		text := string(written(t, Inline, s))
		if got := strings.Contains(text, ">count<") && strings.Contains(text, ">41<"); got != (counts != nil) {
			t.Errorf("counts %v: a strip is there: %v", counts, got)
		}
		if !strings.Contains(text, ">period (s)<") {
			t.Errorf("counts %v: the axis of periods has no name", counts)
		}
	}
}
