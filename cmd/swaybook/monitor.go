package main

import (
	"fmt"
	"io"
	"log/slog"
	"os"
	"regexp"
	"time"

	"github.com/schollz/progressbar/v3"
	"golang.org/x/term"

	"swaybook/pipeline"
)

const (
	// logInterval paces the progress lines where stderr is no terminal.
	logInterval = 10 * time.Second
	// maxNotes bounds the memory of a report on an archive gone wrong; what it
	// leaves out is counted.
	maxNotes = 10_000
)

// monitor shows a run's progress, as a bar on a terminal and as log lines
// elsewhere, and keeps the notes for the report. Its methods are called by one
// goroutine at a time.
type monitor struct {
	logger   *slog.Logger
	stderr   io.Writer
	terminal bool
	quiet    bool
	bar      *progressbar.ProgressBar // of the stage at work
	stage    string                   // "" for that of files
	started  time.Time
	logged   time.Time

	skipped, rejected notes
	doubts            notes          // of earthquakes
	causes            map[string]int // rejections by cause
	warnings          tally
	unfit, unsolved   tally // why pairs were not rotated, and components not computed anew
}

// notes is a list of single files, the first of them.
type notes struct {
	files   []fileNote
	omitted int
}

func (n *notes) add(f fileNote) {
	if len(n.files) >= maxNotes {
		n.omitted++
		return
	}
	n.files = append(n.files, f)
}

// tally counts equal remarks.
type tally []remark

// remark is one text with how often it was said, and of what and with which
// particulars first.
type remark struct {
	text          string
	count         int
	first, detail string
}

func (t *tally) add(text, of, detail string) {
	for i := range *t {
		if (*t)[i].text == text {
			(*t)[i].count++
			return
		}
	}
	if len(*t) < maxNotes {
		*t = append(*t, remark{text, 1, of, detail})
	}
}

func newMonitor(logger *slog.Logger, stderr io.Writer, quiet bool) *monitor {
	now := time.Now()
	return &monitor{
		logger: logger, stderr: stderr, terminal: isTerminal(stderr), quiet: quiet, started: now, logged: now,
		skipped: notes{files: []fileNote{}}, rejected: notes{files: []fileNote{}}, causes: map[string]int{},
	}
}

func isTerminal(w io.Writer) bool {
	f, ok := w.(*os.File)
	return ok && term.IsTerminal(int(f.Fd()))
}

// file takes note of one file done.
func (m *monitor) file(p pipeline.Progress) {
	m.note(p.File)
	m.show("ingesting", "files", p.Done, p.Total)
}

// gathered takes note of a batch of a shard that was taken over.
func (m *monitor) gathered(g pipeline.GatherProgress) {
	stage := fmt.Sprintf("taking over %d/%d", g.Part, g.Parts)
	m.enter(stage)
	m.show(stage, "files and results", g.Done, g.Total)
}

// placed takes note of one file of a shard that has its place.
func (m *monitor) placed(p pipeline.Progress) {
	m.note(p.File)
	m.enter("placing")
	m.show("placing", "files", p.Done, p.Total)
}

// component takes note of one held component computed anew.
func (m *monitor) component(r pipeline.Recomputed) {
	m.enter("computing")
	if r.Reason != "" {
		m.unsolved.add(r.Reason, r.Record, r.Role)
	}
	m.show("computing", "components", r.Done, r.Total)
}

// verified takes note of how far a verification is.
func (m *monitor) verified(v pipeline.Verified) {
	m.enter(v.Stage)
	m.show(v.Stage, map[string]string{pipeline.VerifyReading: "series", pipeline.VerifyComputing: "results"}[v.Stage], v.Done, v.Total)
}

// asked takes note of one question of a study asked.
func (m *monitor) asked(done, total int) { m.question("asking", done, total) }

// compared takes note of one compared.
func (m *monitor) compared(done, total int) { m.question("comparing", done, total) }

func (m *monitor) question(stage string, done, total int) {
	m.enter(stage)
	m.show(stage, "questions", done, total)
}

// enter begins another stage.
func (m *monitor) enter(stage string) {
	if m.stage != stage {
		m.finish()
		m.stage, m.bar, m.started = stage, nil, time.Now()
	}
}

// record takes note of one record of the last stage done.
func (m *monitor) record(r pipeline.Rotated) {
	m.enter("rotating")
	if r.Reason != "" {
		m.unfit.add(r.Reason, r.Record, r.Detail)
	}
	m.show("rotating", "records", r.Done, r.Total)
}

// show tells how far a stage is.
func (m *monitor) show(doing, things string, done, total int) {
	switch {
	case m.quiet:
	case m.terminal:
		m.showBar(doing, things, done, total)
	case time.Since(m.logged) >= logInterval:
		m.logged = time.Now()
		rate := float64(done) / time.Since(m.started).Seconds()
		left := time.Duration(float64(total-done) / rate * float64(time.Second)).Round(time.Second)
		m.logger.Info(doing, things, done, "of", total, things+"_per_s", int(rate), "left", left.String())
	}
}

// doubt takes note of what metadata leave open.
func (m *monitor) doubt(d pipeline.Doubt) { m.doubts.add(fileNote{Source: d.Path, Cause: d.Text}) }

func (m *monitor) note(f pipeline.FileReport) {
	if f.Outcome == pipeline.Skipped {
		m.skipped.add(fileNote{Source: f.Path, Cause: f.Reason})
	}
	for _, c := range f.Causes {
		m.rejected.add(fileNote{Source: f.Path, Line: c.Line, Cause: c.Text})
		m.causes[general(c.Text)]++
	}
	for _, text := range f.Warnings {
		m.warnings.add(text, f.Path, "")
	}
	// A line in the middle of the bar would tear it; the report repeats them.
	if m.terminal {
		return
	}
	for _, c := range f.Causes {
		m.logger.Warn("rejected", "file", f.Path, "line", c.Line, "cause", c.Text)
	}
}

// particulars are what differs between files with one cause: names, quoted
// words and numbers.
var particulars = regexp.MustCompile(`"[^"]*"|\brecord \S+|\bfrom \S+?\)|[-+]?[0-9][-+.0-9eE]*`)

// general is a cause without its particulars, by which causes are counted.
func general(cause string) string { return particulars.ReplaceAllString(cause, "…") }

func (m *monitor) showBar(doing, things string, done, total int) {
	// A bar that was full stays so; where more has come to light, another goes on.
	if m.bar == nil || m.bar.IsFinished() {
		m.bar = progressbar.NewOptions(total,
			progressbar.OptionSetWriter(m.stderr), progressbar.OptionSetDescription(doing), progressbar.OptionShowCount(),
			progressbar.OptionShowIts(), progressbar.OptionSetItsString(things), progressbar.OptionSetPredictTime(true),
			progressbar.OptionThrottle(100*time.Millisecond), progressbar.OptionClearOnFinish(), progressbar.OptionFullWidth())
	}
	if m.bar.GetMax() != total {
		m.bar.ChangeMax(total)
	}
	m.bar.Set(done) // the bar's own errors are a terminal that went away
}

// end clears the bar and says once for each reason why pairs were not rotated.
func (m *monitor) end() {
	m.finish()
	if m.terminal {
		return // the report says it
	}
	for _, u := range m.unfit {
		m.logger.Warn("not rotated", "reason", u.text, "records", u.count, "first", u.first, "detail", u.detail)
	}
}

// finish clears the bar.
func (m *monitor) finish() {
	if m.bar != nil {
		m.bar.Clear()
	}
}
