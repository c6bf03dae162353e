package main

import (
	"context"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"github.com/chromedp/cdproto/input"
	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"

	"swaybook/query"
)

func readAnswer(t *testing.T, file string, into any) {
	t.Helper()
	text, err := os.ReadFile(file)
	if err == nil {
		err = json.Unmarshal(text, into)
	}
	if err != nil {
		t.Fatal(err)
	}
}

// checkValue looks for a number behind a name in words: that of JSON, in four digits.
func checkValue(t *testing.T, words, name string, value float64) {
	t.Helper()
	m := regexp.MustCompile(regexp.QuoteMeta(name) + ` ([0-9.e+-]+)`).FindStringSubmatch(words)
	if m == nil {
		t.Errorf("%q does not say %s", words, name)
		return
	}
	if got, err := strconv.ParseFloat(m[1], 64); err != nil || math.Abs(got/value-1) > 0.5e-3 {
		t.Errorf("%q: %s is %g in JSON", words, name, value)
	}
}

// pointed moves the pointer over a figure to one of its strips, and returns what it says.
func pointed(ctx context.Context, t *testing.T, figure string, strip int) string {
	t.Helper()
	where := evaluated[struct{ X, Y float64 }](ctx, t, `(() => { const f = document.querySelector(`+strconv.Quote(figure)+`), s = f.querySelectorAll(".strips rect")[`+strconv.Itoa(strip)+`];
		s.scrollIntoView({block: "center"}); const r = s.getBoundingClientRect(); return {X: r.x + r.width / 2, Y: r.y + r.height / 2}; })()`)
	do(ctx, t, chromedp.MouseEvent(input.DispatchMouseEventTypeMouseMoved, where.X, where.Y))
	return texts(ctx, t, figure+" .values")[0]
}

// pressed presses keys with a figure in focus, and returns what it says.
func pressed(ctx context.Context, t *testing.T, figure, keys string) string {
	t.Helper()
	do(ctx, t, chromedp.Focus(chromedp.CSS(figure)), chromedp.KeyEvent(keys))
	return texts(ctx, t, figure+" .values")[0]
}

// saysValues moves the pointer over the chart to a period, and goes to others by keys: the
// page says what JSON has, in four digits.
func saysValues(ctx context.Context, t *testing.T, dir string) {
	var want struct {
		Periods     []float64            `json:"periods_s"`
		Count       []int                `json:"count"`
		Mean, Max   []float64            `json:"-"`
		Percentiles map[string][]float64 `json:"percentiles"`
		MeanOf      []float64            `json:"mean"`
	}
	readAnswer(t, filepath.Join(dir, "out", "all.json"), &want)
	check := func(at int, words string) {
		t.Helper()
		for name, value := range map[string]float64{"T =": want.Periods[at], "median": want.Percentiles["50"][at], "p84": want.Percentiles["84"][at], "mean": want.MeanOf[at]} {
			checkValue(t, words, name, value)
		}
		if !strings.HasSuffix(words, strconv.Itoa(want.Count[at])+" motions") {
			t.Errorf("%q: %d motions in JSON", words, want.Count[at])
		}
	}
	check(4, pointed(ctx, t, "#spectrum-all figure", 4))
	check(6, pressed(ctx, t, "#spectrum-all figure", kb.ArrowRight+kb.ArrowRight))
	check(0, pressed(ctx, t, "#spectrum-all figure", kb.Home))
}

// saysPSV reads the four-way chart, of which JSON has PSA: PSV is that over ω.
func saysPSV(ctx context.Context, t *testing.T, dir string) {
	var want struct {
		Periods     []float64            `json:"periods_s"`
		Percentiles map[string][]float64 `json:"percentiles"`
		Mean        []float64            `json:"mean"`
	}
	readAnswer(t, filepath.Join(dir, "out", "all.json"), &want)
	const figure = "#spectrum-all figure:nth-of-type(2)"
	for at, words := range map[int]string{4: pointed(ctx, t, figure, 4), 5: pressed(ctx, t, figure, kb.ArrowRight)} {
		omega := 2 * math.Pi / want.Periods[at]
		median := want.Percentiles["50"][at] * query.StandardGravity / omega
		for name, value := range map[string]float64{"T =": want.Periods[at], "median PSV": median, "median SD": median / omega, "median PSA": want.Percentiles["50"][at], "mean PSV": want.Mean[at] * query.StandardGravity / omega} {
			checkValue(t, words, name, value)
		}
	}
}

// saysWhoExceeds reads the curve of exceedances from its first panel to the end of its second:
// none exceeds the greatest.
func saysWhoExceeds(ctx context.Context, t *testing.T, dir string) {
	var want struct {
		Quantities map[string]struct {
			Min, Max float64
			Count    int
		}
	}
	readAnswer(t, filepath.Join(dir, "out", "pier.json"), &want)
	const figure = "#demand-pier figure"
	sd, shear := want.Quantities["sd_m"], want.Quantities["base_shear_n"]
	first, last := pointed(ctx, t, figure, 0), pressed(ctx, t, figure, kb.End)
	checkValue(t, first, "displacement SD", sd.Min)
	checkValue(t, first, "of", float64(sd.Count))
	checkValue(t, first, "exceeded by", float64(sd.Count-1))
	checkValue(t, last, "base shear", shear.Max/1000)
	if !strings.Contains(last, "kN · exceeded by 0 of "+strconv.Itoa(shear.Count)+" motions, 0.0%") {
		t.Errorf("it says %q", last)
	}
}
