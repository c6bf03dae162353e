package main

import (
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
	bar      *progressbar.ProgressBar
	started  time.Time
	logged   time.Time

	skipped, rejected notes
	causes            map[string]int // rejections by cause
	warnings          []warningCount
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

// warningCount is one warning with how often it was given and where first.
type warningCount struct {
	Text  string `json:"warning"`
	Count int    `json:"count"`
	First string `json:"first"`
}

func newMonitor(logger *slog.Logger, stderr io.Writer, quiet bool) *monitor {
	now := time.Now()
	return &monitor{
		logger: logger, stderr: stderr, terminal: isTerminal(stderr), quiet: quiet, started: now, logged: now,
		skipped: notes{files: []fileNote{}}, rejected: notes{files: []fileNote{}}, causes: map[string]int{}, warnings: []warningCount{},
	}
}

func isTerminal(w io.Writer) bool {
	f, ok := w.(*os.File)
	return ok && term.IsTerminal(int(f.Fd()))
}

// file takes note of one file done.
func (m *monitor) file(p pipeline.Progress) {
	m.note(p.File)
	switch {
	case m.quiet:
	case m.terminal:
		m.showBar(p)
	case time.Since(m.logged) >= logInterval:
		m.logged = time.Now()
		rate := float64(p.Done) / time.Since(m.started).Seconds()
		left := time.Duration(float64(p.Total-p.Done) / rate * float64(time.Second)).Round(time.Second)
		m.logger.Info("ingesting", "files", p.Done, "of", p.Total, "files_per_s", int(rate), "left", left.String())
	}
}

func (m *monitor) note(f pipeline.FileReport) {
	if f.Outcome == pipeline.Skipped {
		m.skipped.add(fileNote{Source: f.Path, Cause: f.Reason})
	}
	for _, c := range f.Causes {
		m.rejected.add(fileNote{Source: f.Path, Line: c.Line, Cause: c.Text})
		m.causes[general(c.Text)]++
	}
	for _, text := range f.Warnings {
		m.count(text, f.Path)
	}
	// A line in the middle of the bar would tear it; the report repeats them.
	if m.terminal {
		return
	}
	for _, c := range f.Causes {
		m.logger.Warn("rejected", "file", f.Path, "line", c.Line, "cause", c.Text)
	}
}

// count adds up equal warnings, which come once a file of a kind.
func (m *monitor) count(text, path string) {
	for i := range m.warnings {
		if m.warnings[i].Text == text {
			m.warnings[i].Count++
			return
		}
	}
	if len(m.warnings) >= maxNotes {
		return
	}
	m.warnings = append(m.warnings, warningCount{Text: text, Count: 1, First: path})
}

// particulars are what differs between files with one cause: names, quoted
// words and numbers.
var particulars = regexp.MustCompile(`"[^"]*"|\brecord \S+|\bfrom \S+?\)|[-+]?[0-9][-+.0-9eE]*`)

// general is a cause without its particulars, by which causes are counted.
func general(cause string) string { return particulars.ReplaceAllString(cause, "…") }

func (m *monitor) showBar(p pipeline.Progress) {
	if m.bar == nil {
		m.bar = progressbar.NewOptions(p.Total,
			progressbar.OptionSetWriter(m.stderr), progressbar.OptionSetDescription("ingesting"), progressbar.OptionShowCount(),
			progressbar.OptionShowIts(), progressbar.OptionSetItsString("files"), progressbar.OptionSetPredictTime(true),
			progressbar.OptionThrottle(100*time.Millisecond), progressbar.OptionClearOnFinish(), progressbar.OptionFullWidth())
	}
	m.bar.Set(p.Done) // the bar's own errors are a terminal that went away
}

// finish clears the bar.
func (m *monitor) finish() {
	if m.bar != nil {
		m.bar.Clear()
	}
}
