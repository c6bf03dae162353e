package main

import (
	"fmt"
	"io"
	"maps"
	"slices"

	"swaybook/pipeline"
)

// ingestReport is what the command prints, as text and as JSON.
type ingestReport struct {
	Store string `json:"store"`
	pipeline.Summary
	ByCause       []causeCount `json:"rejected_by_cause"`
	SkippedFiles  []fileNote   `json:"skipped_files"`
	RejectedFiles []fileNote   `json:"rejected_files"`
	// Beyond the limit of the lists, files are only counted.
	SkippedOmitted  int            `json:"skipped_files_omitted"`
	RejectedOmitted int            `json:"rejected_files_omitted"`
	Warnings        []warningCount `json:"warnings"`
	// Unfit lists why horizontal pairs were not rotated.
	Unfit []reasonCount `json:"not_rotated_by_reason"`
	// Unsolved lists why held components were not computed anew.
	Unsolved []reasonCount `json:"not_recomputed_by_reason"`
	// Catalogue lists what in the catalogue had no effect.
	Catalogue []string `json:"catalogue_notes"`
	// Metadata lists what of StationXML and QuakeML was not taken, or is doubtful, and
	// the files that were recorded while waves of several QuakeML events came.
	Metadata        []fileNote `json:"metadata_notes"`
	MetadataOmitted int        `json:"metadata_notes_omitted"`

	skipped bool // rotation, since that was asked for
}

// causeCount counts the rejections of one cause, its particulars left out.
type causeCount struct {
	Cause string `json:"cause"`
	Count int    `json:"count"`
}

// warningCount is one warning with how often it was given and where first.
type warningCount struct {
	Text  string `json:"warning"`
	Count int    `json:"count"`
	First string `json:"first"`
}

// reasonCount is one reason why pairs were not rotated, how many, and the record
// and the particulars of the first.
type reasonCount struct {
	Reason string `json:"reason"`
	Count  int    `json:"count"`
	First  string `json:"first"`
	Detail string `json:"detail"`
}

// fileNote is one file that was not stored and why.
type fileNote struct {
	Source string `json:"source"`
	Line   int    `json:"line,omitempty"`
	Cause  string `json:"cause"`
}

func reasonCounts(remarks tally) []reasonCount {
	out := make([]reasonCount, len(remarks))
	for i, r := range remarks {
		out[i] = reasonCount{r.text, r.count, r.first, r.detail}
	}
	return out
}

func newIngestReport(o ingestOptions, summary pipeline.Summary, complete bool) ingestReport {
	m := o.monitor
	r := ingestReport{
		Store: o.store, Summary: summary, skipped: o.pipeline.SkipRotation, ByCause: []causeCount{}, Warnings: []warningCount{}, Unfit: reasonCounts(m.unfit), Unsolved: reasonCounts(m.unsolved), Catalogue: []string{},
		SkippedFiles: m.skipped.files, SkippedOmitted: m.skipped.omitted, RejectedFiles: m.rejected.files, RejectedOmitted: m.rejected.omitted,
	}
	for _, w := range m.warnings {
		r.Warnings = append(r.Warnings, warningCount{w.text, w.count, w.first})
	}
	for _, cause := range slices.Sorted(maps.Keys(m.causes)) {
		r.ByCause = append(r.ByCause, causeCount{cause, m.causes[cause]})
	}
	metadata := notes{files: []fileNote{}}
	for _, n := range o.pipeline.Hints.Metadata.Notes() {
		metadata.add(fileNote{n.Path, n.Line, n.Text})
	}
	for _, f := range m.doubts.files {
		metadata.add(f)
	}
	metadata.omitted += m.doubts.omitted
	r.Metadata, r.MetadataOmitted = metadata.files, metadata.omitted
	slices.SortStableFunc(r.ByCause, func(a, b causeCount) int { return b.Count - a.Count })
	if c := o.pipeline.Catalogue; c != nil {
		for _, column := range c.UnknownColumns {
			r.Catalogue = append(r.Catalogue, "unknown column "+column.String())
		}
		r.Catalogue = append(r.Catalogue, c.Notes()...)
		// After a run that was stopped, rows of the files not reached are no news.
		if complete {
			for _, line := range c.Unmatched() {
				r.Catalogue = append(r.Catalogue, fmt.Sprintf("line %d matches no file", line))
			}
		}
	}
	return r
}

func (r ingestReport) print(w io.Writer, asJSON bool) error {
	if asJSON {
		return writeJSON(w, r)
	}
	p := &printer{w: w}
	p.printf("%s, %.1f s\n", r.Store, r.Seconds)
	p.printf("  files seen                              %7d\n", r.Files)
	p.printf("  components stored                       %7d  from %d files, in %d new records\n", r.Stored, r.StoredFiles, r.Records)
	p.printf("  files already held                      %7d\n", r.Held)
	p.printf("  files skipped: no ground acceleration   %7d\n", r.Skipped)
	p.printf("  files rejected                          %7d\n", r.Rejected)
	if r.Elsewhere > 0 {
		p.printf("  files of other shards                   %7d\n", r.Elsewhere)
	}
	if r.Channels > 0 {
		p.printf("  channels rejected from files stored     %7d\n", r.Channels)
	}
	r.printComputed(p)
	r.printRotation(p)
	if r.Stored == 0 && r.Rotated == 0 && r.Recomputed == 0 {
		p.printf("Nothing new was stored.\n")
	}
	p.notes("Skipped:", r.SkippedFiles, r.SkippedOmitted, "--json lists them")
	if len(r.RejectedFiles) > maxLines {
		p.printf("Rejected by cause:\n")
		for _, c := range r.ByCause {
			p.printf("  %7d  %s\n", c.Count, c.Cause)
		}
	}
	p.notes("Rejected:", r.RejectedFiles, r.RejectedOmitted, "see: swaybook --store "+r.Store+" query records --rejected")
	for i, w := range r.Warnings {
		if i == 0 {
			p.printf("Doubtful, and kept with the components:\n")
		}
		p.printf("  %s (%d times, first in %s)\n", w.Text, w.Count, w.First)
	}
	p.notes("Metadata that were not taken, or are doubtful:", r.Metadata, r.MetadataOmitted, "--json lists them")
	for _, note := range r.Catalogue {
		p.printf("Catalogue: %s\n", note)
	}
	return p.err
}

func (r ingestReport) printComputed(p *printer) {
	if r.Recomputed > 0 {
		p.printf("  held components computed anew           %7d\n", r.Recomputed)
	}
	if r.NotRecomputed > 0 {
		p.printf("  held components that could not be       %7d\n", r.NotRecomputed)
		p.reasons(r.Unsolved)
	} else if r.Unconditioned > 0 {
		p.printf("  held components the recipe fails on     %7d  as before; see query records --rejected\n", r.Unconditioned)
	}
}

func (r ingestReport) printRotation(p *printer) {
	assumed := ""
	if r.Assumed > 0 {
		assumed = fmt.Sprintf("  of %d an azimuth is unknown, a right angle was assumed", r.Assumed)
	}
	if r.skipped {
		p.printf("  records left to rotate in a later run   %7d\n", r.Unrotated)
		return
	}
	p.printf("  records rotated                         %7d%s\n", r.Rotated, assumed)
	if r.Unrotated > 0 {
		p.printf("  records left to rotate                  %7d\n", r.Unrotated)
	}
	if r.NotRotated > 0 {
		p.printf("  records whose horizontals do not pair   %7d\n", r.NotRotated)
	}
	if r.EventsJoined > 0 {
		p.printf("  event codes that mean another's event   %7d  see query records --conflicts\n", r.EventsJoined)
	}
	if r.Duplicates > 0 {
		p.printf("  components held in a better version too %7d  left out of statistics\n", r.Duplicates)
	}
	if r.Damaged > 0 {
		p.printf("  records damaged in the store            %7d\n", r.Damaged)
	}
	p.reasons(r.Unfit)
}

// reasons prints why something was not done, with how often and of what first.
func (p *printer) reasons(list []reasonCount) {
	for _, u := range list {
		detail := ""
		if u.Detail != "" {
			detail = " (" + u.Detail + ")"
		}
		p.printf("    %s: %d, first %s%s\n", u.Reason, u.Count, u.First, detail)
	}
}

// maxLines is how many single files the text names of a kind.
const maxLines = 30

// notes prints the first files of a list and where the rest can be seen.
func (p *printer) notes(title string, notes []fileNote, omitted int, rest string) {
	if len(notes) > 0 {
		p.printf("%s\n", title)
	}
	for i, n := range notes {
		if i == maxLines {
			p.printf("  … and %d more; %s\n", len(notes)-maxLines+omitted, rest)
			return
		}
		if n.Line > 0 {
			p.printf("  %s:%d: %s\n", n.Source, n.Line, n.Cause)
		} else {
			p.printf("  %s: %s\n", n.Source, n.Cause)
		}
	}
}
