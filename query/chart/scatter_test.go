package chart

import (
	"errors"
	"io"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgsvg"
)

// inventedScatter has n points, magnitudes in steps of a tenth.
func inventedScatter(n int) *Scatter {
	r := rand.New(rand.NewPCG(3, 5))
	s := &Scatter{Title: "Invented", Notes: []string{"a note"}, Foot: "a foot", X: "distance (km)", Y: "magnitude Mw", Groups: []PointGroup{{Name: "ground A"}, {Name: "ground B"}, {Name: "nowhere"}}}
	for i := range n {
		g := &s.Groups[i%2]
		g.X, g.Y = append(g.X, math.Exp(5.5*r.Float64())), append(g.Y, 4+0.1*float64(r.IntN(35)))
	}
	return s
}

// Every point is drawn, read back from where it is, or lies in one cell with one that is.
func TestScatterHasItsPoints(t *testing.T) {
	s := inventedScatter(3000)
	f := s.frame(draw.NewCanvas(vgsvg.New(Half.Width, Half.Height), Half.Width, Half.Height), &heading{})
	size := f.Size()
	for k := range 2 {
		drawn := f.distinct(&s.Groups[k])
		if len(drawn) > len(s.Groups[k].X) || len(drawn) < 1000 {
			t.Errorf("%d of %d points", len(drawn), len(s.Groups[k].X))
		}
		for i, x := range s.Groups[k].X {
			nearest := math.Inf(1)
			for _, p := range drawn {
				readX := f.x.from * math.Pow(f.x.to/f.x.from, float64((p.X-f.Min.X)/size.X))
				readY := f.y.from + float64((p.Y-f.Min.Y)/size.Y)*(f.y.to-f.y.from)
				across := math.Abs(math.Log(readX/x)) / math.Log(f.x.to/f.x.from) * float64(size.X)
				up := math.Abs(readY-s.Groups[k].Y[i]) / (f.y.to - f.y.from) * float64(size.Y)
				nearest = min(nearest, max(across, up))
			}
			if nearest > float64(pointCell) {
				t.Fatalf("%v km, %v: the nearest point is %v off", x, s.Groups[k].Y[i], nearest)
			}
		}
	}
}

// Thousands of points stay below half a megabyte, and any number costs no more than the area
// that it covers: here 35 lines, of which each has room for 350 points of a shape.
func TestManyPointsStaySmall(t *testing.T) {
	few, many, more := len(written(t, SVG, inventedScatter(3000))), len(written(t, SVG, inventedScatter(200000))), len(written(t, SVG, inventedScatter(400000)))
	if few > 5e5 || float64(more) > 1.02*float64(many) {
		t.Errorf("3000 points take %d bytes, 200,000 take %d, 400,000 take %d", few, many, more)
	}
}

func TestScatterHasItsWords(t *testing.T) {
	words := string(written(t, SVG, inventedScatter(11)))
	for _, want := range []string{"<title>Invented<", "\nground A: 6\n", "\nground B: 5\n", "\ndistance (km)\n", "\nmagnitude Mw\n"} {
		if !strings.Contains(words, want) {
			t.Errorf("%q is not written", want)
		}
	}
	if strings.Contains(words, "nowhere") {
		t.Error("a group without points is named")
	}
	if err := Write(io.Discard, SVG, Half, inventedScatter(0)); !errors.Is(err, ErrNothing) {
		t.Errorf("nothing: %v", err)
	}
	if err := Write(io.Discard, PNG, Half, inventedScatter(1)); err != nil {
		t.Errorf("one point: %v", err)
	}
}
