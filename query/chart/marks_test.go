package chart

import (
	"fmt"
	"math/rand/v2"
	"regexp"
	"strconv"
	"testing"

	"gonum.org/v1/plot/vg"
)

// Names of marks stand above the frame, each at a place that neither another name nor a line
// that goes up to one takes, between the heading and the frame.
func TestNamesOfMarksAreFree(t *testing.T) {
	const seed = 11
	r := rand.New(rand.NewPCG(seed, 1))
	style := writing(labelSize, mark)
	named := 0
	for n := range 30 {
		s := invented(2)
		s.IsLinear, s.Marks = n%2 == 1, nil
		for i := range n % 9 {
			from := 0.01 + 9.9*r.Float64()
			s.Marks = append(s.Marks, Mark{fmt.Sprintf("mark %d", i), from, from * (1 + float64(i%2))})
		}
		h, f, _ := s.layout(Half.canvas())
		flags := f.flags(s.Marks)
		if ceiling := Half.Height - h.room(); f.Max.Y+f.flagRoom(s.Marks) > ceiling+1e-9 {
			t.Errorf("seed %d, %d: names reach beyond %v", seed, n, ceiling)
		}
		for i, a := range flags {
			if a.row < 0 {
				continue
			}
			named++
			left, right := a.from+flagGap, a.from+flagGap+style.Width(a.name)
			for k, b := range flags {
				if i == k || b.row < 0 {
					continue
				}
				if isCrossed := b.row > a.row && left < b.from && b.from < right; isCrossed {
					t.Errorf("seed %d, %d: the line to %s crosses %s", seed, n, b.name, a.name)
				}
				if b.row == a.row && left < b.from+flagGap+style.Width(b.name) && b.from+flagGap < right {
					t.Errorf("seed %d, %d: %s lies on %s", seed, n, b.name, a.name)
				}
			}
		}
	}
	if named < 80 {
		t.Errorf("%d names", named)
	}
}

// What is drawn is at these places: no name of a mark is within the frame.
func TestNamesOfMarksAreAboveTheFrame(t *testing.T) {
	s := invented(5)
	s.Marks = []Mark{{"T = 0.8 s", 0.8, 0.8}, {"T = 1 to 9 s", 1, 9}}
	_, f, _ := s.layout(Half.canvas())
	text := string(written(t, Inline, s))
	for _, m := range s.Marks {
		at := regexp.MustCompile(`<text x="[^"]*" y="-([^"]*)"[^>]*>` + m.Name + "<").FindStringSubmatch(text)
		if at == nil {
			t.Fatalf("%s is not written as expected", m.Name)
		}
		if y, err := strconv.ParseFloat(at[1], 64); err != nil || vg.Length(y) < f.Max.Y {
			t.Errorf("%s is at %v, the frame ends at %v: %v", m.Name, y, f.Max.Y, err)
		}
	}
}
