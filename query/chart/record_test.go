package chart

import (
	"errors"
	"io"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgsvg"
)

// inventedRecord is of two directions of n samples.
func inventedRecord(n int) *Record {
	r := rand.New(rand.NewPCG(7, 9))
	s := &Record{Title: "Record <X>", Notes: []string{"a note"}, Foot: "a foot", Clock: "from then", FromS: -1, ToS: float64(n)/100 - 1,
		Sections: []Section{{"Quality", []string{strings.Repeat("many words ", 40), "the last"}}}}
	for _, quantity := range []string{"acceleration", "velocity"} {
		p := Panel{Quantity: quantity, Unit: "m/s"}
		for _, name := range []string{"h1, 10°", "v"} {
			t := Trace{Name: name, FromS: -1, StepS: 0.01, Values: make([]float64, n)}
			for i := range t.Values {
				t.Values[i] = r.NormFloat64()
				if math.Abs(t.Values[i]) > math.Abs(t.Peak) {
					t.Peak, t.PeakS = t.Values[i], t.FromS+t.StepS*float64(i)
				}
			}
			p.Traces = append(p.Traces, t)
		}
		s.Panels = append(s.Panels, p)
	}
	shares := make([]float64, n)
	for i := range shares {
		shares[i] = float64(i) / float64(n-1)
	}
	s.BuildUps = []BuildUp{{"h1", FirstHorizontal, -1, 0.01, shares, []BuildUpMark{{0.05, 0}, {0.75, 1}, {0.95, 2}}, []string{"0.12 m/s", "5–75 1 s"}}}
	spectra := invented(1)
	s.Spectra = RecordSpectra{"Damping 5%", "PSA (g)", spectra.PeriodsS, spectra.Each, []Curve{{"h1", FirstHorizontal, spectra.Each[0]}}, []Mark{{"T = 1 s", 1, 1}}}
	return s
}

// A page has its words: the title first, names, values of peaks, and as much of the sections
// as there is room for.
func TestRecordHasItsWords(t *testing.T) {
	s := inventedRecord(4000)
	words := string(writtenPage(t, s))
	peak := s.Panels[0].Traces[0]
	for _, want := range []string{"<title>Record &lt;X&gt;</title>", "<desc>a note\n", "\nh1, 10°\n", "\nacceleration (m/s)\n", "\ntime (s) from then\n", "\nArias (%)\n", "\n75\n",
		"\nh1  0.12 m/s\n", "\n5–75 1 s\n", "\nDamping 5%\n", "\nPSA (g)\n", "\nT = 1 s\n", "\nQuality\n", "\nthe last\n", "\n" + three(peak.Peak) + " m/s at "} {
		if !strings.Contains(words, want) {
			t.Errorf("%q is not written", want)
		}
	}
	s.Panels[0].Traces[0].Peak, s.Panels[0].Traces[0].PeakS = -0.00856, 119.86 // wide
	if words := string(writtenPage(t, s)); !strings.Contains(words, "\n-0.00856 m/s at 119.86 s\n") {
		t.Error("the value of a peak is cut")
	}
	s.Sections[0].Lines[0] = strings.Repeat("far too many words ", 400)
	if words := string(writtenPage(t, s)); strings.Contains(words, "the last") || !strings.Contains(words, "\n… and 2 more\n") {
		t.Error("what has no room is not left out and counted")
	}
}

func writtenPage(t *testing.T, c Chart) []byte {
	t.Helper()
	var out strings.Builder
	if err := Write(&out, SVG, Page, c); err != nil {
		t.Fatal(err)
	}
	return []byte(out.String())
}

// A line by columns has all that can be seen: read back from where it is drawn, each of its
// points is a sample, no sample of a column is beyond its points there, and no column has more
// than two.
func TestColumnsKeepTheExtremes(t *testing.T) {
	for _, n := range []int{2, 300, 50000} {
		trace := inventedRecord(n).Panels[0].Traces[0]
		f := frame{Canvas: draw.NewCanvas(vgsvg.New(300, 100), 300, 100), x: spanAxis("", -1, float64(n)/100-1), y: aroundZero(5, 100)}
		lines := f.columns(trace.FromS, trace.StepS, trace.Values)
		if len(lines) != 1 {
			t.Fatalf("%d samples give %d lines", n, len(lines))
		}
		type span struct{ low, high, points float64 }
		drawn := map[int]*span{}
		for _, p := range lines[0] {
			size := f.Size()
			at := f.x.from + float64((p.X-f.Min.X)/size.X)*(f.x.to-f.x.from)
			value := f.y.from + float64((p.Y-f.Min.Y)/size.Y)*(f.y.to-f.y.from)
			i := int(math.Round((at - trace.FromS) / trace.StepS))
			if i < 0 || i >= n || math.Abs(trace.Values[i]-value) > 1e-9 {
				t.Fatalf("%d samples: the point at %v s is no sample", n, at)
			}
			s := drawn[int((p.X-f.Min.X)/hair)]
			if s == nil {
				s = &span{math.Inf(1), math.Inf(-1), 0}
				drawn[int((p.X-f.Min.X)/hair)] = s
			}
			s.low, s.high, s.points = min(s.low, value), max(s.high, value), s.points+1
		}
		for i, v := range trace.Values {
			p := f.point(trace.FromS+float64(trace.StepS*float64(i)), v)
			s := drawn[int((p.X-f.Min.X)/hair)]
			if f.x.has(trace.FromS+float64(trace.StepS*float64(i))) && (s == nil || v < s.low-1e-9 || v > s.high+1e-9 || s.points > 2) {
				t.Fatalf("%d samples: sample %d, %v, is beyond what is drawn, %+v", n, i, v, s)
			}
		}
		if n > 10000 && len(lines[0]) > 1210 {
			t.Errorf("%d samples give %d points", n, len(lines[0]))
		}
	}
}

func TestAxesOfTraces(t *testing.T) {
	names := func(a axis) string {
		var out []string
		for _, tick := range a.ticks {
			out = append(out, tick.name)
		}
		return strings.Join(out, " ")
	}
	for _, c := range []struct{ got, want string }{
		{names(spanAxis("", -3.2, 46)), "0 10 20 30 40"},
		{names(spanAxis("", -12, 3)), "-12 -10 -8 -6 -4 -2 0 2"},
		{names(spanAxis("", 0, 0.16)), "0 0.02 0.04 0.06 0.08 0.1 0.12 0.14 0.16"},
		{names(aroundZero(0.21, 30)), "-0.1 0 0.1"},
		{names(aroundZero(0.3, 30)), "-0.2 0 0.2"},
		{names(aroundZero(0.45, 100)), "-0.4 -0.2 0 0.2 0.4"},
		{names(aroundZero(0, 30)), "-0.5 0 0.5"},
	} {
		if c.got != c.want {
			t.Errorf("%s, want %s", c.got, c.want)
		}
	}
}

// Lines are within the width and lose no word.
func TestWrap(t *testing.T) {
	style := writing(10, ink)
	text := strings.Repeat("one two three ", 20)
	lines := wrap(style, text, 100, 99)
	if strings.Join(lines, " ") != strings.TrimSpace(text) || len(lines) < 5 {
		t.Errorf("%q", lines)
	}
	if i := slices.IndexFunc(lines, func(l string) bool { return style.Width(l) > 100 }); i >= 0 {
		t.Errorf("%q is wider than 100", lines[i])
	}
	if lines := wrap(style, "a "+strings.Repeat("x", 100), 50, 2); len(lines) != 2 || !strings.HasSuffix(lines[1], "…") || style.Width(lines[1]) > 50 {
		t.Errorf("a long word: %q", lines)
	}
	if cut := wrap(style, text, 100, 3); len(cut) != 3 || !slices.Equal(cut[:2], lines[:2]) || !strings.HasPrefix(lines[2]+" "+lines[3], strings.TrimSuffix(cut[2], "…")) || !strings.HasSuffix(cut[2], "…") || style.Width(cut[2]) > 100 {
		t.Errorf("cut to three lines: %q", cut)
	}
}

func TestEmptyRecord(t *testing.T) {
	for _, s := range []*Record{{}, {FromS: 1, ToS: 1, Panels: []Panel{{}}}} {
		if err := Write(io.Discard, SVG, Page, s); !errors.Is(err, ErrNothing) {
			t.Errorf("%+v: %v", s, err)
		}
	}
	s := inventedRecord(50)
	s.Spectra, s.Sections, s.BuildUps = RecordSpectra{}, nil, nil
	if err := Write(io.Discard, PNG, Page, s); err != nil {
		t.Error(err)
	}
}
