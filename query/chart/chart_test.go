package chart

import (
	"bytes"
	"encoding/xml"
	"errors"
	"image/color"
	"image/png"
	"io"
	"math"
	"math/rand/v2"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg"
)

// invented are n spectra of a smooth shape under noise, with their median.
func invented(n int) *Spectra {
	r := rand.New(rand.NewPCG(1, 2))
	s := &Spectra{Title: "Invented", Notes: []string{"a <note> & more"}, Foot: "a foot", Quantity: "PSA (g)", Marks: []Mark{{"T = 0.8 s", 0.8, 0.8}}}
	for t := 0.01; t <= 10; t *= 1.0282 {
		s.PeriodsS = append(s.PeriodsS, t)
	}
	byPeriod := make([][]float64, len(s.PeriodsS))
	for range n {
		a, corner, noise := 0.1*math.Exp(0.8*r.NormFloat64()), 0.5*math.Exp(0.3*r.NormFloat64()), 0.0
		row := make([]float64, len(s.PeriodsS))
		for i, t := range s.PeriodsS {
			noise = 0.9*noise + 0.05*r.NormFloat64()
			row[i] = a * math.Exp(noise) / math.Sqrt(1+math.Pow(t/corner, 3))
			byPeriod[i] = append(byPeriod[i], row[i])
		}
		s.Each = append(s.Each, row)
	}
	median := make([]float64, len(byPeriod))
	for i, values := range byPeriod {
		slices.Sort(values)
		median[i] = values[n/2]
		s.Counts = append(s.Counts, n)
	}
	s.Curves = []Curve{{"median", Median, median}}
	s.Band = Region{median, median}
	return s
}

func written(t testing.TB, format Format, c Chart) []byte {
	t.Helper()
	var out bytes.Buffer
	if err := Write(&out, format, Half, c); err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}

// The target for 3000 spectra is an SVG of less than 1 MB.
func TestManySpectraStaySmall(t *testing.T) {
	few, many := len(written(t, SVG, invented(300))), len(written(t, SVG, invented(3000)))
	if many > 1e6 || many > 4*few {
		t.Errorf("3000 spectra take %d bytes, 300 take %d", many, few)
	}
}

func BenchmarkSVG(b *testing.B) {
	s := invented(3000)
	for b.Loop() {
		if err := Write(io.Discard, SVG, Half, s); err != nil {
			b.Fatal(err)
		}
	}
}

// An SVG is well-formed and has its words, those of its title first.
func TestSVGHasItsWords(t *testing.T) {
	decoder := xml.NewDecoder(bytes.NewReader(written(t, SVG, invented(5))))
	texts, paths, within := map[string]string{}, 0, ""
	for {
		token, err := decoder.Token()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		switch e := token.(type) {
		case xml.StartElement:
			if within = e.Name.Local; within == "path" {
				paths++
			}
		case xml.CharData:
			texts[within] += string(e)
		case xml.EndElement:
			within = ""
		}
	}
	lines := strings.Split(texts["desc"], "\n")
	for _, want := range []string{"a <note> & more", "a foot", "PSA (g)", "period (s)", "median", "count", "5", "T = 0.8 s", "0.01", "10"} {
		if !slices.Contains(lines, want) {
			t.Errorf("the words %q are not among %q", want, lines)
		}
	}
	if texts["title"] != "Invented" {
		t.Errorf("the title is %q", texts["title"])
	}
	if paths < 40 {
		t.Errorf("%d paths", paths)
	}
}

// PNG has the size of the chart at 200 dots an inch, and ink on it.
func TestPNG(t *testing.T) {
	img, err := png.Decode(bytes.NewReader(written(t, PNG, invented(5))))
	if err != nil {
		t.Fatal(err)
	}
	if size := img.Bounds().Size(); math.Abs(float64(size.X)-17/2.54*200) > 1 || math.Abs(float64(size.Y)-12/2.54*200) > 1 {
		t.Errorf("%v dots", size)
	}
	seen := map[color.NRGBA]bool{}
	for y := range img.Bounds().Dy() {
		for x := range img.Bounds().Dx() {
			seen[color.NRGBAModel.Convert(img.At(x, y)).(color.NRGBA)] = true
		}
	}
	for _, c := range []color.NRGBA{{0xff, 0xff, 0xff, 0xff}, ink, deep, dim, shade} {
		if !seen[c] {
			t.Errorf("no dot is %v", c)
		}
	}
}

func TestNothingToDraw(t *testing.T) {
	nan := math.NaN()
	for _, s := range []*Spectra{{}, {PeriodsS: []float64{1}, Each: [][]float64{{0}}, Counts: []int{1}}, {PeriodsS: []float64{1}, Curves: []Curve{{"a", Mean, []float64{nan}}}, Counts: []int{0}}} {
		if err := Write(io.Discard, SVG, Half, s); !errors.Is(err, ErrNothing) {
			t.Errorf("%+v: %v", s, err)
		}
	}
	for name, s := range map[string]*Spectra{
		"one period": {PeriodsS: []float64{1}, Each: [][]float64{{0.2}}, Curves: []Curve{{"a", Mean, []float64{0.2}}}, Counts: []int{1}},
		"gaps":       {PeriodsS: []float64{1, 2, 3, 4, 5}, Each: [][]float64{{nan, 1, 1, nan, 2}}, Band: Region{[]float64{nan, 1, 1, nan, 2}, []float64{nan, 2, 2, nan, 3}}, Counts: []int{0, 1, 1, 0, 1}},
	} {
		for _, s.IsLinear = range []bool{false, true} {
			if err := Write(io.Discard, SVG, Half, s); err != nil {
				t.Errorf("%s: %v", name, err)
			}
		}
	}
	if err := Write(io.Discard, "gif", Half, invented(2)); err == nil || !strings.Contains(err.Error(), "svg, png") {
		t.Errorf("another format: %v", err)
	}
}

// Axes end at round numbers around the values, by hand.
func TestAxes(t *testing.T) {
	for _, c := range []struct {
		lowest, highest float64
		isLog           bool
		from, to        float64
		names           string
	}{
		{0.013, 4.2, true, 0.01, 5, "0.01 0.02 0.05 0.1 0.2 0.5 1 2 5"},
		{0.01, 10, true, 0.01, 10, "0.01 0.02 0.05 0.1 0.2 0.5 1 2 5 10"},
		{1, 1, true, 1, 2, "1 2"},
		{0.1, 3.3, false, 0, 3.5, "0 0.5 1 1.5 2 2.5 3 3.5"},
		{0.1, 8, false, 0, 8, "0 1 2 3 4 5 6 7 8"},
		{0, 0.00021, false, 0, 0.00025, "0 5e-05 0.0001 0.00015 0.0002 0.00025"},
	} {
		a := newAxis("", c.lowest, c.highest, c.isLog)
		var names []string
		for _, tick := range a.ticks {
			names = append(names, tick.name)
		}
		if math.Abs(a.from-c.from) > 1e-12 || math.Abs(a.to-c.to) > 1e-12 || strings.Join(names, " ") != c.names {
			t.Errorf("%v to %v: %v to %v, %v", c.lowest, c.highest, a.from, a.to, names)
		}
	}
	log := newAxis("", 0.01, 10, true)
	if math.Abs(log.at(0.1)-1./3) > 1e-15 || math.Abs(log.at(1)-2./3) > 1e-15 {
		t.Errorf("a third and two thirds are at %v and %v", log.at(0.1), log.at(1))
	}
}

// Labels move apart as little as can be, and stay within bounds, by hand.
func TestSpread(t *testing.T) {
	for _, c := range []struct{ wanted, want []vg.Length }{
		{[]vg.Length{20, 50}, []vg.Length{20, 50}},
		{[]vg.Length{50, 50}, []vg.Length{45, 55}},
		{[]vg.Length{50, 52, 54}, []vg.Length{42, 52, 62}},
		{[]vg.Length{0, 1}, []vg.Length{0, 10}},
		{[]vg.Length{99, 100}, []vg.Length{90, 100}},
		{[]vg.Length{40, 48, 60}, []vg.Length{39, 49, 60}},
	} {
		if got := spread(c.wanted, 10, 0, 100); !slices.EqualFunc(got, c.want, func(a, b vg.Length) bool { return math.Abs(float64(a-b)) < 1e-9 }) {
			t.Errorf("%v: %v, want %v", c.wanted, got, c.want)
		}
	}
}

// What lies on a line that was drawn is not drawn again; what crosses it is.
func TestCover(t *testing.T) {
	c := newCover(vg.Rectangle{Max: vg.Point{X: 100, Y: 100}}, 0.5)
	line := []vg.Point{{X: 0, Y: 10}, {X: 50, Y: 20}, {X: 100, Y: 10}}
	if seen := c.add(line); len(seen) != 1 || len(seen[0]) != 3 {
		t.Errorf("the first line: %v", seen)
	}
	if seen := c.add(line); seen != nil {
		t.Errorf("the same line again: %v", seen)
	}
	half := []vg.Point{{X: 0, Y: 90}, {X: 40, Y: 18}, {X: 50, Y: 20}, {X: 100, Y: 10}}
	if seen := c.add(half); len(seen) != 1 || len(seen[0]) != 2 {
		t.Errorf("a line that joins it: %v", seen)
	}
}

// A simplified line is within the tolerance of every point, and keeps its ends.
func TestSimplify(t *testing.T) {
	var line []vg.Point
	for i := range 1000 {
		line = append(line, vg.Point{X: vg.Length(i), Y: vg.Length(20 * math.Sin(float64(i)/40))})
	}
	thin := simplify(line, 0.1)
	if len(thin) > 300 || thin[0] != line[0] || thin[len(thin)-1] != line[999] {
		t.Errorf("%d of 1000 points are left", len(thin))
	}
	at := 0
	for _, p := range line {
		if p.X > thin[at+1].X {
			at++
		}
		if d := distanceTo(p, thin[at], thin[at+1]); d > 0.1+1e-9 {
			t.Errorf("%v is %v off", p, d)
		}
	}
}

// Outlines are as wide as the font says, and stand on the baseline.
func TestOutline(t *testing.T) {
	style := writing(10, ink)
	face := fonts.Lookup(style.Font, style.Font.Size)
	var g glyphs
	element := g.element(face, vg.Point{X: 5, Y: 7}, "HA VEH")
	if n := strings.Count(g.definitions.String(), "<path "); n != 4 { // H, A, V, E
		t.Errorf("%d definitions of four letters", n)
	}
	ids := regexp.MustCompile(`#(g\d+)" x="(\d+)"`).FindAllStringSubmatch(element, -1)
	if len(ids) != 5 || ids[0][1] != ids[4][1] || ids[0][2] != "0" {
		t.Fatalf("glyphs %v", ids)
	}
	// An H has as much room on its left as on its right, and stands on the line.
	numbers := regexp.MustCompile(`-?\d+`).FindAllString(regexp.MustCompile(`id="` + ids[0][1] + `" d="([^"]*)"`).FindStringSubmatch(g.definitions.String())[1], -1)
	left, right, lowest := math.Inf(1), math.Inf(-1), math.Inf(1)
	for i := 0; i < len(numbers); i += 2 {
		x, _ := strconv.Atoi(numbers[i])
		y, _ := strconv.Atoi(numbers[i+1])
		left, right, lowest = min(left, float64(x)), max(right, float64(x)), min(lowest, float64(y))
	}
	last, err := strconv.ParseFloat(ids[4][2], 64)
	if err != nil {
		t.Fatal(err)
	}
	perEm := float64(face.Face.UnitsPerEm())
	if width := float64(face.Width("HA VEH")) / 10 * perEm; math.Abs(last+right+left-width) > perEm/100 || lowest != 0 {
		t.Errorf("outlines from %g to %g above %g, the width is %g", left, last+right, lowest, width)
	}
	if !strings.HasPrefix(element, `<g transform="translate(5.00 7.00) scale(0.0048828)">`) {
		t.Errorf("the element is %s", element[:60])
	}
}
