package chart

import (
	"bytes"
	"errors"
	"io"
	"math"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgsvg"
)

// inventedChanges: the median is up by a quarter, and a percentile lost its first value.
func inventedChanges() *Changes {
	nan := math.NaN()
	return &Changes{
		Title: "Changes", Quantity: "PSA (g)", Before: "run 3", After: "run 7", PeriodsS: []float64{0.1, 0.5, 2},
		Pairs: []Pair{
			{"median", Median, []float64{0.4, 0.2, 0.1}, []float64{0.5, 0.25, 0.125}},
			{"p84", Percentile, []float64{0.8, 0.5, 0.2}, []float64{nan, 0.5, 0.19}},
		},
		CountsBefore: []int{9, 9, 4}, CountsAfter: []int{5, 7, 7},
	}
}

func TestChangesSayWhatTheyAre(t *testing.T) {
	s := inventedChanges()
	var file bytes.Buffer
	if err := Write(&file, Inline, Half, s); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{">median, run 3<", ">median, run 7<", ">p84, run 7<", ">change (%)<", ">PSA (g)<", ">-40<", ">40<", ">count<", ">9<", ">0.5<", ">0<"} {
		if !strings.Contains(file.String(), want) {
			t.Errorf("the figure does not say %s", want)
		}
	}
}

// TestChangesAreDrawnTrue reads the change of the median back from where it is drawn.
func TestChangesAreDrawnTrue(t *testing.T) {
	s := inventedChanges()
	f := frame{x: newAxis("", 0.1, 2, true), y: s.changeAxis(), Canvas: draw.NewCanvas(vgsvg.New(300, 100), 300, 100)}
	for i, r := range s.Pairs[0].ratios() {
		at := f.point(s.PeriodsS[i], r)
		share := float64((at.Y - f.Min.Y) / f.Size().Y)
		if got := f.y.from + share*(f.y.to-f.y.from); math.Abs(got-25) > 1e-9 {
			t.Errorf("at %g s the change is drawn at %g %%, want 25", s.PeriodsS[i], got)
		}
	}
	if lost := s.Pairs[1].ratios(); !math.IsNaN(lost[0]) || lost[1] != 0 || math.Abs(lost[2]+5) > 1e-12 {
		t.Errorf("changes of the percentile %v", lost)
	}
	if f.y.from != -50 || f.y.to != 50 {
		t.Errorf("the axis goes from %g to %g", f.y.from, f.y.to)
	}
}

func TestNoChangesToDraw(t *testing.T) {
	if err := Write(io.Discard, SVG, Half, &Changes{PeriodsS: []float64{1}}); !errors.Is(err, ErrNothing) {
		t.Errorf("error %v", err)
	}
}
