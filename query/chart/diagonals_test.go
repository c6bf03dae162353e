package chart

import (
	"math"
	"testing"
)

// turned is a point in coordinates along the diagonals.
func turned(p [2]float64) [2]float64 { return [2]float64{p[0] + p[1], p[0] - p[1]} }

// turnedBox is the least such rectangle around points.
func turnedBox(points [][2]float64) (b [4]float64) {
	var turn [][2]float64
	for _, p := range points {
		turn = append(turn, turned(p))
	}
	b[0], b[1], b[2], b[3] = box(turn)
	return b
}

// Names of diagonals lie neither on each other nor on curves and readings, as read back from a
// drawing; and most diagonals have one.
func TestNamesOfDiagonalsAreFree(t *testing.T) {
	for name, marked := range map[string][]Reading{
		"no reading": nil,
		"readings":   {{"a", 0.05, 0.003}, {"b", 1, 0.05}, {"c", 3, 0.02}, {"d", 0.3, 0.1}},
	} {
		s := inventedFourWay()
		s.Readings = marked
		for _, share := range []float64{0.05, 0.2, 5, 20} {
			values := make([]float64, len(s.PeriodsS))
			for i := range values {
				values[i] = share * s.Curves[0].Values[i] * (1 + 0.3*math.Sin(float64(i)/3))
			}
			s.Curves = append(s.Curves, Curve{"percentile", Percentile, values})
		}
		svg := string(written(t, SVG, s))
		var rooms [][4]float64
		for _, corners := range drawnIn(t, svg, "#FFFFFF;fill-opacity") {
			rooms = append(rooms, turnedBox(corners))
		}
		if len(rooms) < 6 {
			t.Errorf("%s: %d names", name, len(rooms))
		}
		for i, a := range rooms {
			for _, b := range rooms[:i] {
				if a[0] < b[2] && b[0] < a[2] && a[1] < b[3] && b[1] < a[3] {
					t.Errorf("%s: the names in %v and %v overlap", name, a, b)
				}
			}
		}
		for _, colour := range []string{hex(deep), hex(mark)} {
			for _, line := range drawnIn(t, svg, colour) {
				for i := 1; i < len(line); i++ {
					p, q := line[i-1], line[i]
					for share := 0.0; share <= 1; share += 0.02 {
						at := turned([2]float64{p[0] + share*(q[0]-p[0]), p[1] + share*(q[1]-p[1])})
						for _, r := range rooms {
							if at[0] > r[0] && at[0] < r[2] && at[1] > r[1] && at[1] < r[3] {
								t.Fatalf("%s: a line in %s crosses the name in %v", name, colour, r)
							}
						}
					}
				}
			}
		}
	}
}

// Where all of a diagonal is taken it has no name.
func TestNoPlaceForAName(t *testing.T) {
	s := inventedFourWay()
	_, f := s.layout(Square.canvas(), s.base())
	b := slanted{length: 20}
	b.along.X, b.along.Y = diagonalRun, -diagonalRun
	upper, lower := f.point(0.02, 0.01), f.point(0.2, 0.001)
	tried := 0
	if b.place(upper, lower, func() bool { tried++; return false }) || tried < 5 {
		t.Errorf("a place is found of %d that are taken", tried)
	}
	if !b.place(upper, lower, func() bool { return true }) || math.Hypot(float64(b.at.X-upper.X), float64(b.at.Y-upper.Y))-float64(nameEdge) > 1e-9 {
		t.Errorf("the first place is %v, below %v", b.at, upper)
	}
}
