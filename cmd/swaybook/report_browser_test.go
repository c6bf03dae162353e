package main

import (
	"bytes"
	"cmp"
	"context"
	"encoding/csv"
	"net/url"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/cdproto/cdp"
	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/cdproto/network"
	"github.com/chromedp/cdproto/page"
	"github.com/chromedp/cdproto/runtime"
	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"
)

// browserStudy is of an invented region; what is in the names is there to do harm.
const browserStudy = `name = 'Quays of <script>alert(1)</script> "Ardmoor"'
purpose = "What ⟨the⟩ motions ask of \u05d2\u05e9\u05e8 & tanks"
store = "s.db"
sources = ["region"]
catalogue = "catalogue.csv"
recipe = "as-delivered"
periods = [0.1, 0.2, 0.3, 0.5, 0.7, 1, 1.5, 2, 3]
dampings = ["5%"]
report = "out/report.html"

[spectrum.all]
component = "each"
mark = "0.7s"
files = "out/all.json"

[demand.stock]
component = "each"
structures = "stock.csv"

[demand.pier]
component = "each"
period = "0.6s"
weight = "10000kN"
files = "out/pier.json"

[records.held]
`

var browserStock = `id,name,period_s,damping,weight_kn,height_m,max_displacement_m
P10,North pier,0.6,5%,10000,4,0.02
P9,"<img src=x onerror=alert(2)>",0.9,5%,10000,4,0.03
T1,"Tank ""Old One""",0.25,3%,3000,5,0.01
"B7 גשר",` + longName + `,1.4,5%,8000,12,0.2
`

var longName = strings.Repeat("verylongname", 40) // without a place to break

// browserReport writes the report of a small region, and starts a browser on it.
func browserReport(t *testing.T) (ctx context.Context, dir string) {
	t.Helper()
	if testing.Short() {
		t.Skip("starts a browser")
	}
	browser := ""
	for _, name := range []string{"chromium", "chromium-browser", "google-chrome"} {
		if path, err := exec.LookPath(name); err == nil {
			browser = path
			break
		}
	}
	if browser == "" {
		t.Skip("no browser: install chromium to test the report in one")
	}
	dir = t.TempDir()
	command := func(args ...string) {
		var stdout, stderr bytes.Buffer
		if code := run(t.Context(), append([]string{"swaybook", "--quiet"}, args...), &stdout, &stderr); code != exitDone && code != exitRejected {
			t.Fatalf("%v: exit code %d: %s", args, code, stderr.String())
		}
	}
	command("demo", "--dir", filepath.Join(dir, "region"), "--events", "3", "--stations", "4", "--files-only")
	catalogue, err := os.ReadFile(filepath.Join(dir, "region", "catalogue.csv"))
	if err != nil {
		t.Fatal(err)
	}
	for name, text := range map[string]string{"study.toml": browserStudy, "stock.csv": browserStock, "catalogue.csv": hostileStations(t, string(catalogue))} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	command("reprocess", filepath.Join(dir, "study.toml"))
	allocated, cancel := chromedp.NewExecAllocator(t.Context(), append(chromedp.DefaultExecAllocatorOptions[:], chromedp.ExecPath(browser), chromedp.NoSandbox, chromedp.WindowSize(1280, 900))...)
	t.Cleanup(cancel)
	ctx, cancel = chromedp.NewContext(allocated)
	t.Cleanup(cancel)
	do(ctx, t)
	ctx, cancel = context.WithTimeout(ctx, 2*time.Minute)
	t.Cleanup(cancel)
	return ctx, dir
}

// hostileStations is a catalogue whose names of stations are code, and long.
func hostileStations(t *testing.T, text string) string {
	t.Helper()
	rows, err := csv.NewReader(strings.NewReader(text)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	names := []string{`<script>alert(3)</script>' "x" ` + longName, "\u202eתחנה", "plain"}
	column := slices.Index(rows[0], "station_name")
	for i, row := range rows[1:] {
		if row[column] != "" {
			row[column] = names[i%len(names)]
		}
	}
	var out bytes.Buffer
	if err := csv.NewWriter(&out).WriteAll(rows); err != nil {
		t.Fatal(err)
	}
	return out.String()
}

func do(ctx context.Context, t *testing.T, actions ...chromedp.Action[chromedp.Void]) {
	t.Helper()
	if err := chromedp.Do(ctx, actions...); err != nil {
		t.Fatal(err)
	}
}

// call sends a command of the protocol.
func call[P, R any](command cdp.Command[P, R], params P) chromedp.Action[chromedp.Void] {
	return func(ctx context.Context, target *chromedp.Target) (v chromedp.Void, err error) {
		_, err = cdp.Call(ctx, target, command, params)
		return v, err
	}
}

func pageAddress(dir string) string {
	return (&url.URL{Scheme: "file", Path: filepath.ToSlash(filepath.Join(dir, "out", "report.html"))}).String()
}

// watched notes what a page does that it should not.
type watched struct {
	mu    sync.Mutex
	wrong []string
}

func (w *watched) listen(ctx context.Context, t *testing.T, address string) {
	err := chromedp.Listen(ctx, func(event any) {
		w.mu.Lock()
		defer w.mu.Unlock()
		switch e := event.(type) {
		case *network.EventRequestWillBeSent:
			if e.Request.URL != address && !strings.HasPrefix(e.Request.URL, "data:") {
				w.wrong = append(w.wrong, "asks for "+e.Request.URL)
			}
		case *runtime.EventExceptionThrown:
			w.wrong = append(w.wrong, "fails: "+e.ExceptionDetails.Text)
		case *runtime.EventConsoleAPICalled:
			w.wrong = append(w.wrong, "says "+string(e.Type)+" to the console")
		case *page.EventJavascriptDialogOpening:
			w.wrong = append(w.wrong, "opens a dialog: "+e.Message)
		}
	})
	if err != nil {
		t.Fatal(err)
	}
}

// texts are those of the elements that a selector finds.
func texts(ctx context.Context, t *testing.T, selector string) []string {
	t.Helper()
	return evaluated[[]string](ctx, t, `Array.from(document.querySelectorAll(`+strconv.Quote(selector)+`)).filter(e => e.offsetParent !== null).map(e => e.textContent.trim())`)
}

func evaluated[T any](ctx context.Context, t *testing.T, script string) T {
	t.Helper()
	out, err := chromedp.Run(ctx, chromedp.Evaluate[T](script))
	if err != nil {
		t.Fatalf("%s: %v", script, err)
	}
	return out
}

// TestReportInABrowser loads the page, and uses it.
func TestReportInABrowser(t *testing.T) {
	ctx, dir := browserReport(t)
	address := pageAddress(dir)
	w := &watched{}
	w.listen(ctx, t, address)
	do(ctx, t, call(network.Enable, network.EnableParams{}), call(runtime.Enable, cdp.Empty{}), call(page.Enable, page.EnableParams{}),
		chromedp.Navigate(address), chromedp.WaitVisible(chromedp.CSS("#provenance")))
	if title := evaluated[string](ctx, t, `document.title`); title != `Quays of <script>alert(1)</script> "Ardmoor"` {
		t.Errorf("title %q", title)
	}
	t.Run("is reached by keys", func(t *testing.T) { isReachedByKeys(ctx, t) })
	t.Run("sorts and filters", func(t *testing.T) { sortsAndFilters(ctx, t) })
	t.Run("says values", func(t *testing.T) { saysValues(ctx, t, dir) })
	t.Run("says PSV", func(t *testing.T) { saysPSV(ctx, t, dir) })
	t.Run("says who exceeds", func(t *testing.T) { saysWhoExceeds(ctx, t, dir) })
	t.Run("opens what a link leads to", func(t *testing.T) {
		do(ctx, t, chromedp.Click(chromedp.CSS("#demand-stock tr:not([hidden]) td a")), chromedp.WaitVisible(chromedp.CSS("#demand-stock details.part[open] table")))
	})
	t.Run("prints", func(t *testing.T) { prints(ctx, t) })
	t.Run("is narrow", func(t *testing.T) {
		do(ctx, t, chromedp.EmulateViewport(400, 800))
		if over := evaluated[int](ctx, t, `document.documentElement.scrollWidth - document.documentElement.clientWidth`); over > 0 {
			t.Errorf("the page is %d px wider than a narrow window", over)
		}
	})
	w.mu.Lock()
	defer w.mu.Unlock()
	for _, wrong := range w.wrong {
		t.Errorf("the page %s", wrong)
	}
}

// isReachedByKeys goes through the page with the tab key: all that can be used gets the focus,
// shows it, and says what it is.
func isReachedByKeys(ctx context.Context, t *testing.T) {
	found := map[string]bool{}
	for range evaluated[int](ctx, t, `document.querySelectorAll("a, button, input, summary, [tabindex]").length`) {
		do(ctx, t, chromedp.KeyEvent(kb.Tab))
		at := evaluated[struct{ Kind, Name, Outline string }](ctx, t, `(() => { const e = document.activeElement, s = getComputedStyle(e);
			return { Kind: e.tagName + "." + e.className, Name: (e.getAttribute("aria-label") || e.textContent).trim(), Outline: e.matches(":focus-visible") ? s.outlineStyle : "none" }; })()`)
		if at.Kind == "BODY." { // through
			break
		}
		if found[at.Kind] = true; at.Name == "" || at.Outline == "none" {
			t.Errorf("%s is called %q, its outline is %s", at.Kind, at.Name, at.Outline)
		}
	}
	for _, kind := range []string{"A.skip", "A.", "BUTTON.", "INPUT.", "SUMMARY.", "FIGURE.has-values", "DIV.wide"} {
		if !found[kind] {
			t.Errorf("no %s gets the focus: %v", kind, found)
		}
	}
	if names := evaluated[[]string](ctx, t, `Array.from(document.querySelectorAll("input")).map(e => e.getAttribute("aria-label"))`); len(slices.Compact(slices.Sorted(slices.Values(names)))) != len(names) || !strings.HasPrefix(names[0], "Rows with") {
		t.Errorf("fields are called %q", names)
	}
}

func sortsAndFilters(ctx context.Context, t *testing.T) {
	ids := func() string { return strings.Join(texts(ctx, t, "#demand-stock > .wide tbody td:first-child"), "|") }
	click := func(column int) {
		t.Helper()
		evaluated[bool](ctx, t, `document.querySelectorAll("#demand-stock > .wide th button")[`+strconv.Itoa(column)+`].click(), true`)
	}
	ratios := texts(ctx, t, `#demand-stock th[aria-sort="descending"]`)
	worst := evaluated[[]float64](ctx, t, `(() => { const at = document.querySelector('#demand-stock th[aria-sort="descending"]').cellIndex;
		return Array.from(document.querySelectorAll("#demand-stock > .wide tbody tr")).map(r => parseFloat(r.cells[at].textContent)); })()`)
	if len(ratios) != 1 || !strings.HasPrefix(ratios[0], "ratio") || len(worst) != 4 || !slices.IsSortedFunc(worst, func(a, b float64) int { return cmp.Compare(b, a) }) {
		t.Errorf("sorted at first by %q: %v", ratios, worst)
	}
	if click(0); ids() != "B7 גשר|P9|P10|T1" { // numbers in words as numbers
		t.Errorf("by structure: %s", ids())
	}
	if click(0); ids() != "T1|P10|P9|B7 גשר" {
		t.Errorf("by structure, downwards: %s", ids())
	}
	column := -1
	for i, name := range texts(ctx, t, "#demand-stock > .wide th") {
		if strings.HasPrefix(name, "period") {
			column = i
		}
	}
	if click(column); ids() != "B7 גשר|P9|P10|T1" {
		t.Errorf("by period, downwards: %s", ids())
	}
	if click(column); ids() != "T1|P10|P9|B7 גשר" {
		t.Errorf("by period: %s", ids())
	}
	do(ctx, t, chromedp.SendKeys(chromedp.CSS("#demand-stock input"), "p1 0.6"))
	if got, count := ids(), texts(ctx, t, "#demand-stock .filter span")[0]; got != "P10" || count != "1 of 4" {
		t.Errorf("filtered: %s, %s", got, count)
	}
	evaluated[bool](ctx, t, `document.querySelector("#demand-stock input").select(), true`)
	do(ctx, t, chromedp.SendKeys(chromedp.CSS("#demand-stock input"), "old one"))
	if got := ids(); got != "T1" {
		t.Errorf("filtered by name: %s", got)
	}
}

// prints makes PDFs of both common sizes of paper. Nothing is cut off at the right, and the
// parts that were closed are there.
func prints(ctx context.Context, t *testing.T) {
	for _, paper := range []struct {
		name          string
		width, height float64 // in
	}{{"A4", 8.27, 11.69}, {"Letter", 8.5, 11}} {
		pdf, err := chromedp.Run(ctx, chromedp.PrintToPDF(chromedp.PDFPaper(chromedp.PaperSize{Width: paper.width, Height: paper.height})))
		if err != nil {
			t.Fatal(err)
		}
		// One for each of the four records that govern, and six at most for all else.
		if n := bytes.Count(pdf, []byte("/Type /Page\n")) + bytes.Count(pdf, []byte("/Type /Page ")); n < 5 || n > 10 {
			t.Errorf("%s: %d pages", paper.name, n)
		}
		width := int64((paper.width - 2*14/25.4) * 96) // less the margins, in px
		do(ctx, t, call(emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{Media: "print"}), chromedp.EmulateViewport(width, 1000))
		over := evaluated[[]string](ctx, t, `Array.from(document.querySelectorAll("main *")).filter(e => e.getBoundingClientRect().right > document.documentElement.clientWidth + 1).map(e => e.tagName + " " + e.className + " " + e.textContent.trim().replace(/\s+/g, " ").slice(0, 40)).slice(0, 5)`)
		// A button would be left out of the headings that are repeated on further pages.
		if boxes := evaluated[int](ctx, t, `Array.from(document.querySelectorAll("th button")).filter(e => getComputedStyle(e).display !== "contents").length`); boxes > 0 {
			t.Errorf("%s: %d buttons in headings", paper.name, boxes)
		}
		if len(over) > 0 {
			t.Errorf("%s: cut off at the right: %v", paper.name, over)
		}
		do(ctx, t, call(emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{}), chromedp.EmulateReset())
	}
	if closed := evaluated[int](ctx, t, `document.querySelectorAll("details.part:not([open])").length`); closed > 0 {
		t.Errorf("%d parts were closed in print", closed)
	}
}

// TestReportWithoutScripts reads the page in a browser that runs none.
func TestReportWithoutScripts(t *testing.T) {
	ctx, dir := browserReport(t)
	do(ctx, t, call(emulation.SetScriptExecutionDisabled, emulation.SetScriptExecutionDisabledParams{Value: true}),
		chromedp.Navigate(pageAddress(dir)), chromedp.WaitVisible(chromedp.CSS("#provenance")))
	rows, err := chromedp.Run(ctx, chromedp.Text(chromedp.CSS("#demand-stock table")))
	if err != nil {
		t.Fatal(err)
	}
	values, err := chromedp.Run(ctx, chromedp.TextContent(chromedp.CSS("#spectrum-all .strips title"), chromedp.NodeReady))
	if err != nil {
		t.Fatal(err)
	}
	if !strings.Contains(rows, "P10") || !strings.HasPrefix(values, "T = 0.1000 s · ") {
		t.Errorf("rows %q, values %q", rows, values)
	}
}
