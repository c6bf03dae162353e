package chart

import (
	"errors"
	"io"
	"math"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgsvg"
)

// inventedExceedance has four values, two of them equal, of which the last weighs half.
func inventedExceedance() *Exceedance {
	return &Exceedance{Title: "Invented", Notes: []string{"a note"}, Foot: "a foot", Share: "motions above (%)", Panels: []ExceedancePanel{{
		Quantity: "displacement (m)", Values: []float64{1, 2, 2, 8}, Above: []float64{0.8, 0.5, 0.5, 0},
		Levels: []Level{{"median 2 m", Median, 2}, {"capacity 4 m", Capacity, 4}, {"design 20 m", Design, 20}, {"below 0.5 m", Capacity, 0.5}},
	}}}
}

// The curve, read back from where it is drawn, has the share above every value, on both kinds
// of axes.
func TestExceedanceCurve(t *testing.T) {
	for _, isLinear := range []bool{false, true} {
		p := inventedExceedance().Panels[0]
		f := frame{Canvas: draw.NewCanvas(vgsvg.New(300, 200), 300, 200), x: p.axis(isLinear), y: linearAxis("", 100)}
		line := p.curve(&f)
		shareAt := func(value float64) float64 {
			size := f.Size()
			for i := 1; i < len(line); i++ {
				from, to := float64((line[i-1].X-f.Min.X)/size.X), float64((line[i].X-f.Min.X)/size.X)
				read := func(share float64) float64 {
					if isLinear {
						return f.x.from + share*(f.x.to-f.x.from)
					}
					return f.x.from * math.Pow(f.x.to/f.x.from, share)
				}
				if read(from) < value && value < read(to) && line[i-1].Y == line[i].Y {
					return float64((line[i].Y - f.Min.Y) / size.Y)
				}
			}
			return math.NaN()
		}
		for value, want := range map[float64]float64{0.7: 1, 0.99: 1, 1.01: 0.8, 1.99: 0.8, 2.01: 0.5, 7.9: 0.5, 8.1: 0, 19: 0} {
			if got := shareAt(value); !(math.Abs(got-want) < 1e-9) || math.Abs(p.at(value)-want) > 1e-15 {
				t.Errorf("linear %v: %v of the motions are drawn above %v, and %v marked, want %v", isLinear, got, value, p.at(value), want)
			}
		}
		// A value itself is not above itself.
		if p.at(2) != 0.5 || p.at(8) != 0 {
			t.Errorf("above 2 are %v, above 8 %v", p.at(2), p.at(8))
		}
		for _, l := range p.Levels {
			if !f.x.has(l.Value) {
				t.Errorf("%s is not on the axis from %v to %v", l.Name, f.x.from, f.x.to)
			}
		}
	}
}

func TestExceedanceHasItsWords(t *testing.T) {
	words := string(writtenPage(t, inventedExceedance()))
	for _, want := range []string{"<title>Invented<", "\ndisplacement (m)\n", "\nmotions above (%)\n", "\nmedian 2 m\n", "\ncapacity 4 m\n", "\ndesign 20 m\n", "\nbelow 0.5 m\n", "\n100\n"} {
		if !strings.Contains(words, want) {
			t.Errorf("%q is not written", want)
		}
	}
	for _, e := range []*Exceedance{{}, {Panels: []ExceedancePanel{{Values: []float64{0}, Above: []float64{0}}}}} {
		if err := Write(io.Discard, SVG, Half, e); !errors.Is(err, ErrNothing) {
			t.Errorf("%+v: %v", e, err)
		}
	}
}

// Names of ticks that have no room beside each other leave the main ones.
func TestLongNamesOfTicks(t *testing.T) {
	e := inventedExceedance()
	p := &e.Panels[0]
	for i := range p.Values {
		p.Values[i] *= math.Pow(10, float64(i)-5)
	}
	words := string(written(t, SVG, e))
	if !strings.Contains(words, "\n0.0001\n") || strings.Contains(words, "\n0.0002\n") {
		t.Error("names of ticks run into each other")
	}
}

// TestStripsOfExceedances: each panel has its own, without gaps, of equal values the last, and
// of a panel that is not drawn none.
func TestStripsOfExceedances(t *testing.T) {
	c := inventedExceedance()
	c.Panels = append(c.Panels, ExceedancePanel{Quantity: "none", Values: []float64{0}, Above: []float64{0}}, ExceedancePanel{Quantity: "shear (kN)", Values: []float64{10, 1000}, Above: []float64{0.5, 0}})
	strips := c.Strips(Square)
	want := [][2]int{{0, 0}, {0, 2}, {0, 3}, {2, 0}, {2, 1}}
	if len(strips) != len(want) {
		t.Fatalf("%d strips, want %d: %+v", len(strips), len(want), strips)
	}
	for i, s := range strips {
		if [2]int{s.Panel, s.Position} != want[i] || s.At < s.X || s.At > s.X+s.Width || !(s.Height > 50) {
			t.Errorf("strip %d: %+v, want panel and position %v", i, s, want[i])
		}
		if before := strips[max(0, i-1)]; i > 0 && before.Panel == s.Panel && math.Abs(before.X+before.Width-s.X) > 1e-9 {
			t.Errorf("a gap before strip %d", i)
		}
	}
	if above, below := strips[2], strips[3]; above.Y+above.Height >= below.Y {
		t.Errorf("panels overlap: %+v, %+v", above, below)
	}
	if s := (&Exceedance{}).Strips(Square); s != nil {
		t.Errorf("of nothing: %+v", s)
	}
	for i := range 1000 {
		c.Panels[0].Values, c.Panels[0].Above = append(c.Panels[0].Values, 8+float64(i)/1000), append(c.Panels[0].Above, 0)
	}
	if n := len(c.Strips(Square)); n > 200 {
		t.Errorf("%d strips, most of no width", n)
	}
}
