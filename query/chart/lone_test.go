package chart

import (
	"fmt"
	"image/color"
	"math"
	"regexp"
	"strings"
	"testing"
)

// drawnIn are the lines that an SVG has in a colour and, where they are filled, the areas, each
// as its points.
func drawnIn(t *testing.T, svg, colour string) (out [][][2]float64) {
	t.Helper()
	for _, path := range regexp.MustCompile(`<path d="([^"]*)" style="(?:fill:none;stroke|fill):`+colour).FindAllStringSubmatch(svg, -1) {
		for _, line := range strings.Split(path[1], "M")[1:] {
			var points [][2]float64
			for _, word := range strings.Split(strings.TrimSuffix(line, "Z"), "L") {
				var x, y float64
				if _, err := fmt.Sscanf(word, "%g,%g", &x, &y); err != nil {
					t.Fatalf("%q: %v", word, err)
				}
				points = append(points, [2]float64{x, y})
			}
			out = append(out, points)
		}
	}
	return out
}

func hex(c color.NRGBA) string { return fmt.Sprintf("#%02X%02X%02X", c.R, c.G, c.B) }

// box is the least rectangle around points.
func box(points [][2]float64) (left, bottom, right, top float64) {
	left, bottom, right, top = math.Inf(1), math.Inf(1), math.Inf(-1), math.Inf(-1)
	for _, p := range points {
		left, bottom, right, top = min(left, p[0]), min(bottom, p[1]), max(right, p[0]), max(top, p[1])
	}
	return left, bottom, right, top
}

// A point of a curve that has no neighbour is drawn as a short line through it, as part of
// single spectra and of statistics, and as a bar of the band; it keeps away from other periods.
func TestLonePointsAreDrawn(t *testing.T) {
	nan := math.NaN()
	for name, s := range map[string]*Spectra{
		"one period": {PeriodsS: []float64{1}, Each: [][]float64{{2}}, Counts: []int{1}, Curves: []Curve{{"mean", Mean, []float64{2}}}, Band: Region{[]float64{2.5}, []float64{4}}},
		"gaps": {PeriodsS: []float64{1, 1.01, 2, 3, 4}, Counts: []int{1, 0, 1, 0, 1}, Each: [][]float64{{2, nan, 2, nan, 2}},
			Curves: []Curve{{"mean", Mean, []float64{2, nan, 2, nan, 2}}}, Band: Region{[]float64{2.5, nan, 2.5, nan, 2.5}, []float64{4, nan, 4, nan, 4}}},
	} {
		_, f, _ := s.layout(Half.canvas())
		svg := string(written(t, SVG, s))
		for what, in := range map[string]struct {
			colour    string
			low, high float64
		}{"the single spectrum": {hex(dim), 2, 2}, "the mean": {hex(warm), 2, 2}, "the band": {"#09467D", 2.5, 4}} { // veil, as SVG has it
			for i, period := range s.PeriodsS {
				low, high := f.point(period, in.low), f.point(period, in.high)
				found := 0
				for _, line := range drawnIn(t, svg, in.colour) {
					left, bottom, right, top := box(line)
					if left <= float64(low.X)+0.01 && float64(low.X) < right && right-left > 0.9*float64(hair) && right-left < 13 && math.Abs(bottom-float64(low.Y)) < 0.01 && math.Abs(top-float64(high.Y)) < 0.01 {
						found++
					}
				}
				if found != s.Counts[i] {
					t.Errorf("%s: %s is drawn %d times at %v s", name, what, found, period)
				}
			}
		}
	}
}
