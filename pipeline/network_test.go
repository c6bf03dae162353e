package pipeline

import (
	"bufio"
	"bytes"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"swaybook/ingest"
	"swaybook/pipeline/spectrum"
)

// The network that recorded these motions publishes response spectra beside
// the accelerograms: an independent computation from the same samples. Its
// maxima are taken at steps of about a tenth of the period and printed with
// three digits, so that an exact maximum lies at most 0.7 % below them, and
// above them by up to 5 % for T < 20·dt, 2 % for T < 100·dt, 0.7 % beyond.
//
// Ordinates beyond these limits must be explained, and few. Either the network
// took the maximum at the samples, and our motion has that value there: 0.7 %
// for its print. Or the period is so long against the step that single
// precision loses it: a coefficient that differs from 1 by (ω·dt)² is rounded by
// 2⁻²⁴, and the network's own values then jump from period to period.
//
// Source: California Strong Motion Instrumentation Program (California
// Geological Survey), corrected accelerograms (V2) and response spectra (V3) as
// distributed to the public.
func TestSpectraOfTheNetworkItself(t *testing.T) {
	const root = "../../shared/records/csmip"
	files, err := filepath.Glob(filepath.Join(filepath.FromSlash(root), "*", "*.V3"))
	if err != nil {
		t.Fatal(err)
	}
	if len(files) == 0 {
		t.Skipf("no recordings at %s", root)
	}
	for _, file := range files {
		t.Run(filepath.Base(filepath.Dir(file))+"/"+filepath.Base(file), func(t *testing.T) { compareWithNetwork(t, file) })
	}
}

func compareWithNetwork(t *testing.T, file string) {
	t.Helper()
	published := readNetworkSpectra(t, file)
	name := strings.TrimSuffix(file, ".V3") + ".V2"
	data, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	_, channels, err := ingest.Parse(t.Context(), name, data, ingest.Hints{})
	if err != nil || len(channels) != 1 {
		t.Fatalf("%d channels, %v", len(channels), err)
	}
	c := channels[0]
	grid := spectrum.Grid{PeriodsS: published.periods, Dampings: published.dampings}
	solver, err := spectrum.NewSolver(spectrum.NigamJennings, c.StepS, grid.Oscillators())
	if err != nil {
		t.Fatal(err)
	}
	sd := solver.SD(nil, c.Acceleration)
	low, high, compared, beyond := 0.0, 0.0, 0, 0
	for i, o := range grid.Oscillators() {
		want := published.sd[i]
		if want == 0 { // not computed
			continue
		}
		limit := 0.007
		switch steps := o.PeriodS / c.StepS; {
		case steps < 20:
			limit = 0.05
		case steps < 100:
			limit = 0.02
		}
		off := sd[i]/want - 1
		low, high, compared = min(low, off), max(high, off), compared+1
		if -0.007 <= off && off <= limit {
			continue
		}
		beyond++
		atSamples := sampledMaximum(o, c.StepS, c.Acceleration)/want - 1
		phase := 2 * math.Pi * c.StepS / o.PeriodS
		single := 4 * math.Exp2(-24) / (phase * phase)
		t.Logf("T %g s = %.0f·dt, damping %g: SD %.4g m, the network's %.4g m: %+.2f %%, at the samples %+.2f %%, single precision %.2f %%",
			o.PeriodS, o.PeriodS/c.StepS, o.Damping, sd[i], want, 100*off, 100*atSamples, 100*single)
		if math.Abs(atSamples) > 0.007 && math.Abs(off) > single {
			t.Errorf("T %g s, damping %g: unexplained", o.PeriodS, o.Damping)
		}
	}
	if compared < 100 || beyond > 8 {
		t.Errorf("%d ordinates compared, %d beyond the limits", compared, beyond)
	}
	t.Logf("%d ordinates, %+.2f to %+.2f %%", compared, 100*low, 100*high)
}

// sampledMaximum is the greatest |u| at the samples, marched with the closed
// form of the response to a straight-line segment as Nigam and Jennings (1969)
// give it, independent of the solver.
func sampledMaximum(o spectrum.Oscillator, dt float64, a []float64) float64 {
	w, z := 2*math.Pi/o.PeriodS, o.Damping
	wd := w * math.Sqrt(1-z*z)
	e, s, c := math.Exp(-z*w*dt), math.Sin(wd*dt), math.Cos(wd*dt)
	u, v, top := 0.0, 0.0, 0.0
	for i := range len(a) - 1 {
		slope := (a[i+1] - a[i]) / dt
		// The particular solution is p0 + p1·t, the rest rings free.
		p1 := -slope / (w * w)
		p0 := -a[i]/(w*w) + 2*z*slope/(w*w*w)
		x, y := u-p0, v-p1
		g := (y + z*w*x) / wd
		u = p0 + p1*dt + e*(x*c+g*s)
		v = p1 + e*((g*wd-z*w*x)*c-(x*wd+z*w*g)*s)
		top = max(top, math.Abs(u))
	}
	return top
}

// networkSpectra are the periods in s, the dampings as ratios, and SD in m,
// dampings outside and periods inside.
type networkSpectra struct {
	periods, dampings, sd []float64
}

// readNetworkSpectra reads the parts of a V3 file that the comparison needs:
// five dampings, up to 100 periods, and of each damping the first of seven
// arrays, SD in inches.
func readNetworkSpectra(t *testing.T, file string) networkSpectra {
	t.Helper()
	data, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	var lines []string
	for s := bufio.NewScanner(bytes.NewReader(data)); s.Scan(); {
		lines = append(lines, strings.TrimRight(s.Text(), "\r"))
	}
	units := index(t, lines, 0, "Units for spectra are inches")
	var out networkSpectra
	at := units + 2 + 7 + 13 // one blank line, integers, reals
	out.dampings = fields(t, lines[at:at+1], 5)
	for _, p := range fields(t, lines[at+1:at+14], 100) {
		if p > 0 {
			out.periods = append(out.periods, p)
		}
	}
	for _, damping := range out.dampings {
		title := strings.TrimPrefix(fmt.Sprintf("Damping = %.2f.", damping), "Damping = 0")
		at = index(t, lines, at, strings.TrimPrefix(title, "Damping = "))
		for _, inches := range fields(t, lines[at+1:at+14], 100)[:len(out.periods)] {
			out.sd = append(out.sd, inches*0.0254)
		}
		at++
	}
	return out
}

func index(t *testing.T, lines []string, from int, text string) int {
	t.Helper()
	for i := from; i < len(lines); i++ {
		if strings.Contains(strings.ToLower(lines[i]), strings.ToLower(text)) {
			return i
		}
	}
	t.Fatalf("no line with %q after line %d", text, from+1)
	return 0
}

// fields reads n numbers of ten characters, eight a line. A blank may stand for
// the sign of an exponent.
func fields(t *testing.T, lines []string, n int) []float64 {
	t.Helper()
	var out []float64
	for _, line := range lines {
		for len(line) > 0 && len(out) < n {
			width := min(10, len(line))
			text := strings.ReplaceAll(strings.TrimSpace(line[:width]), "E ", "E+")
			line = line[width:]
			if text == "" {
				continue
			}
			x, err := strconv.ParseFloat(text, 64)
			if err != nil {
				t.Fatal(err)
			}
			out = append(out, x)
		}
	}
	if len(out) != n {
		t.Fatalf("%d numbers, want %d", len(out), n)
	}
	if math.IsNaN(out[0]) {
		t.Fatal("not a number")
	}
	return out
}
