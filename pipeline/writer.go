package pipeline

import (
	"context"
	"errors"
	"slices"
	"syscall"

	"swaybook/db"
	"swaybook/ingest/archive"
)

// writer stores results in the order of the files, batch by batch. It runs in one
// goroutine at a time.
type writer struct {
	store   Store
	run     state
	opts    Options
	source  *source
	done    int
	summary Summary
	settler *settler                                      // of the batch in hand
	known   map[db.Statement]string                       // what settlers know to be stated
	reached func(context.Context, *db.Tx, []result) error // notes that a batch is stored, nil for nothing
	isWhole bool                                          // nothing is published of a run that does not come to its end
	doubts  []recordDoubt                                 // kept to the end: another file may state what one does not
	unread  []string                                      // files and members that the system did not let be read
}

func newWriter(store Store, run state, opts Options, src *source) *writer {
	return &writer{store: store, run: run, opts: opts, source: src, known: map[db.Statement]string{}}
}

// files brings the files to the store.
func (w *writer) files(ctx context.Context) error {
	return stage[item, result]{
		workers: w.opts.Workers, clock: w.opts.Clock, process: w.run.reader.process,
		weigh: weightOf, store: w.storeBatch,
	}.run(ctx, w.source.items(ctx))
}

// weightOf is what a result weighs in a batch. Of a file that is left to another shard hardly
// anything is written, so that a batch is a second of them.
func weightOf(res result) int {
	if res.outcome == Elsewhere {
		return 0
	}
	return max(1, len(res.channels))
}

// storeBatch stores the results in one transaction and reports them once it is
// committed.
func (w *writer) storeBatch(ctx context.Context, batch []result) error {
	reports, doubts := make([]FileReport, 0, len(batch)), len(w.doubts)
	err := w.store.Update(ctx, func(tx *db.Tx) error {
		w.settler = newSettler(tx, w.known, w.opts.Hints.Metadata)
		for _, res := range batch {
			if res.outcome == opened {
				if err := tx.ForgetUnread(ctx, res.source.Path, archive.Join(res.source.Path, "")); err != nil {
					return err
				}
				continue
			}
			report, err := w.storeFile(ctx, tx, res)
			if err != nil {
				return err
			}
			reports = append(reports, report)
		}
		if err := w.settler.settle(ctx); err != nil || w.reached == nil {
			return err
		}
		return w.reached(ctx, tx, batch)
	})
	if err != nil {
		w.doubts = w.doubts[:doubts]
		return err
	}
	for _, report := range reports {
		w.done++
		w.summary.add(report)
		w.opts.Progress(Progress{Done: w.done, Total: int(w.source.total.Load()), File: report})
	}
	return nil
}

func (w *writer) storeFile(ctx context.Context, tx *db.Tx, res result) (FileReport, error) {
	if err := w.keepIntake(ctx, tx, res); err != nil {
		return FileReport{}, err
	}
	var err error
	if res, err = w.recheck(ctx, tx, res); err != nil {
		return FileReport{}, err
	}
	report := FileReport{Path: res.source.Path, Outcome: res.outcome, Reason: res.reason}
	if err := tx.ForgetRejections(ctx, res.source.Path, keepDigest(res)); err != nil {
		return report, err
	}
	switch res.outcome {
	case Stored:
		return w.storeChannels(ctx, tx, res, report)
	case Held:
		return w.storeHeld(ctx, tx, res, report)
	case Rejected:
		return w.reject(ctx, tx, res, report, 0, res.err)
	}
	return report, nil
}

// recheck looks again whether the content is held: two files of equal content
// may have been read at the same time.
func (w *writer) recheck(ctx context.Context, tx *db.Tx, res result) (result, error) {
	if res.outcome != Stored {
		return res, nil
	}
	first, held, err := tx.Held(ctx, res.source.SHA256)
	if held {
		res = res.held(first)
	}
	return res, err
}

// storeHeld applies the catalogue to held content, and repeats what stands
// against its channels.
func (w *writer) storeHeld(ctx context.Context, tx *db.Tx, res result, report FileReport) (FileReport, error) {
	standing, err := tx.RejectionsOf(ctx, res.source.Path, res.source.SHA256)
	if err != nil {
		return report, err
	}
	for _, r := range standing {
		report.Causes = append(report.Causes, Cause{Line: r.Line, Text: r.Cause})
	}
	err = w.describeHeld(ctx, tx, res, &report)
	return report, err
}

// keepDigest names the content whose rejections still hold: those of single
// channels of a file that is held.
func keepDigest(res result) string {
	if res.outcome == Held {
		return res.source.SHA256
	}
	return ""
}

// storeChannels stores each channel in its record, and why others could not be
// read. A file none of whose channels finds a place is rejected.
func (w *writer) storeChannels(ctx context.Context, tx *db.Tx, res result, report FileReport) (FileReport, error) {
	sourceID := int64(0)
	for _, refusal := range res.refused {
		var err error
		if report, err = w.reject(ctx, tx, res, report, refusal.Line, refusal); err != nil {
			return report, err
		}
	}
	for _, s := range res.channels {
		if err := w.settler.distinguish(ctx, &s.channel, s.quake); err != nil {
			return report, err
		}
		if s.channel.Event.ID != "" {
			s.stated.Event.ID = s.channel.Event.ID
		}
		p, err := place(ctx, tx, res, &s.channel, s.samples)
		if err != nil {
			if report, err = w.reject(ctx, tx, res, report, s.channel.Line, err); err != nil {
				return report, err
			}
			continue
		}
		if sourceID == 0 {
			if sourceID, err = tx.AddSource(ctx, res.source, w.run.id); err != nil {
				return report, err
			}
		}
		if err := w.storeChannel(ctx, tx, res.source.Path, s, p, sourceID); err != nil {
			return report, err
		}
		report.Components++
		if p.newRecord {
			report.Records++
		}
		report.Warnings = append(report.Warnings, s.channel.Warnings...)
	}
	switch {
	case report.Components > 0:
	case res.elsewhere > 0:
		report.Outcome = Elsewhere
	default:
		report.Outcome = Rejected
	}
	return report, nil
}

func (w *writer) storeChannel(ctx context.Context, tx *db.Tx, path string, s solved, p placement, sourceID int64) error {
	record, err := tx.PutRecord(ctx, recordOf(s.channel, p.code), false)
	if err == nil && s.matched {
		record, err = tx.PutRecord(ctx, recordOf(s.stated.Channel, p.code), true)
	}
	if err != nil {
		return err
	}
	if err := w.settler.state(ctx, record, s.accounts); err != nil {
		return err
	}
	w.doubt(path, s.doubt, record.ID)
	if err := tx.SetRoles(ctx, record.ID, p.renamed); err != nil {
		return err
	}
	if err := w.bring(ctx, tx, p.from, record.ID); err != nil {
		return err
	}
	c := componentOf(s, p.role)
	c.SourceID = sourceID
	twins, err := tx.FlagTwins(ctx, record.ID, s.digest)
	if err != nil {
		return err
	}
	c.Findings = append(c.Findings, twins...)
	return tx.AddComponent(ctx, record.ID, c, s.data, s.digest, w.run.generation.ID, s.spectra)
}

// bring moves what leaves another record into this one.
func (w *writer) bring(ctx context.Context, tx *db.Tx, from *departure, recordID int64) error {
	if from == nil {
		return nil
	}
	w.settler.touched[db.Subject{Kind: db.SubjectRecord, ID: from.recordID}] = true
	if err := tx.MoveComponents(ctx, from.recordID, recordID, from.moved, from.paths); err != nil {
		return err
	}
	return tx.SetRoles(ctx, from.recordID, from.renamed)
}

// reject stores one cause against the file.
func (w *writer) reject(ctx context.Context, tx *db.Tx, res result, report FileReport, line int, cause error) (FileReport, error) {
	if _, isOfSystem := errors.AsType[syscall.Errno](cause); isOfSystem {
		w.unread = append(w.unread, res.source.Path)
	}
	said := causeOf(line, cause)
	r := db.Rejection{Path: res.source.Path, Line: said.Line, Cause: said.Text, SHA256: res.source.SHA256}
	if c := (Cause{Line: r.Line, Text: r.Cause}); !slices.Contains(report.Causes, c) {
		report.Causes = append(report.Causes, c)
	}
	return report, tx.Reject(ctx, r, w.run.id)
}

// recordDoubt is a doubt of a record.
type recordDoubt struct {
	Doubt
	recordID int64
}

// doubt keeps what is doubtful of a record, "" for nothing. The channels of a file mostly
// say one thing.
func (w *writer) doubt(path, text string, recordID int64) {
	d := recordDoubt{Doubt{path, text}, recordID}
	if text != "" && (len(w.doubts) == 0 || w.doubts[len(w.doubts)-1] != d) {
		w.doubts = append(w.doubts, d)
	}
}

// standing returns the doubts of records of which nobody says when their earthquake was.
func (w *writer) standing(ctx context.Context, tx *db.Tx) ([]Doubt, error) {
	var out []Doubt
	for _, d := range w.doubts {
		timed, err := tx.IsTimed(ctx, d.recordID)
		if err != nil {
			return nil, err
		}
		if !timed && (len(out) == 0 || out[len(out)-1] != d.Doubt) {
			out = append(out, d.Doubt)
		}
	}
	return out, nil
}

// publish makes what is stored the edition that questions read: of the run's generation,
// unless its recipe could be carried out on none of the components and there is another.
func (w *writer) publish(ctx context.Context, tx *db.Tx) error {
	generation := w.run.generation.ID
	barren, err := tx.IsBarren(ctx, generation)
	if err != nil {
		return err
	}
	if published, ok, err := tx.PublishedEdition(ctx); err != nil {
		return err
	} else if ok && barren {
		generation = published.GenerationID
	}
	isNew, err := tx.PutEdition(ctx, w.run.id, generation)
	if err == nil && isNew {
		err = tx.Publish(ctx, w.run.id)
	}
	return err
}

// publishPart publishes what a run that was stopped has stored, but not the beginning of
// another generation than the one that questions read.
func (w *writer) publishPart(ctx context.Context, tx *db.Tx) error {
	current, ok, err := tx.PublishedEdition(ctx)
	if err != nil || ok && current.GenerationID != w.run.generation.ID {
		return err
	}
	return w.publish(ctx, tx)
}

// finish closes the run's entry. The summary counts what was committed.
func (w *writer) finish(ctx context.Context, err error) (Summary, error) {
	w.summary.Seconds = w.opts.Clock().Sub(w.opts.Started).Seconds()
	outcome := "done"
	switch {
	case interrupted(err):
		outcome = "interrupted"
	case err != nil:
		outcome = "failed"
	}
	ctx = context.WithoutCancel(ctx)
	var standing []Doubt
	errFinish := w.store.Update(ctx, func(tx *db.Tx) (err error) {
		if outcome == "interrupted" && !w.isWhole {
			if err := w.publishPart(ctx, tx); err != nil {
				return err
			}
		}
		if w.summary.EventsJoined, w.summary.Duplicates, err = tx.Relations(ctx); err != nil {
			return err
		}
		if w.summary.Unconditioned, err = tx.Failures(ctx, w.run.generation.ID); err != nil {
			return err
		}
		if standing, err = w.standing(ctx, tx); err != nil {
			return err
		}
		return tx.FinishRun(ctx, w.run.id, outcome, w.summary, w.opts.Clock())
	})
	for _, d := range standing {
		w.opts.Doubted(d)
	}
	if errors.Is(err, db.ErrFull) && errors.Is(errFinish, db.ErrFull) {
		errFinish = nil // it says the same again
	}
	return w.summary, errors.Join(err, errFinish)
}
