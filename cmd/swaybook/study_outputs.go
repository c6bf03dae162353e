package main

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"maps"
	"os"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/beside"
	"swaybook/query"
	"swaybook/query/chart"
)

// outputs writes the answers of a study. They take their names together.
type outputs struct {
	store   *db.Store
	set     beside.Set
	answers map[string]reply      // of one edition, by the product's path
	written map[string]db.Written // what stands there, by path
	reports []outputReport
}

// reply is the answer to a product's question, or why there is none.
type reply struct {
	answer answer
	empty  *query.EmptyError
}

// outputReport is one file of a product in JSON.
type outputReport struct {
	Product string `json:"product"`
	Path    string `json:"path"`
	Edition int64  `json:"edition"`
	Bytes   *int64 `json:"bytes"`      // null of a file that was left absent, since there is no answer
	IsNew   bool   `json:"is_written"` // by this run
	// Remarks go with the answer, and have no room in CSV.
	Remarks string `json:"remarks,omitempty"`
	Empty   string `json:"empty,omitempty"` // why there is no answer
}

// ask asks for a product. An empty selection is an answer.
func (o *outputs) ask(ctx context.Context, p *product, at moment) (reply, error) {
	a, err := p.ask(ctx, o.store, at)
	if empty, ok := errors.AsType[*query.EmptyError](err); ok {
		return reply{empty: empty}, nil
	}
	if err != nil {
		return reply{}, fmt.Errorf("%s: %w", p.path, err)
	}
	return reply{answer: a}, nil
}

// prepare writes a product's files beside those that are there.
func (o *outputs) prepare(p *product, r reply) error {
	for _, f := range p.files {
		if err := o.prepareFile(&f, r); err != nil {
			return fmt.Errorf("%s: %w", p.path, err)
		}
	}
	return nil
}

// prepareFile writes a file of an answer. Without an answer, or a value that can be drawn, there
// is none.
func (o *outputs) prepareFile(f *outputFile, r reply) error {
	fill := func(w io.Writer) error { return f.write(r.answer, w) }
	isAbsent := r.empty != nil
	if !isAbsent && f.format.IsFigure() {
		var drawn bytes.Buffer
		err := fill(&drawn)
		if isAbsent = errors.Is(err, chart.ErrNothing); err != nil && !isAbsent {
			return err
		}
		fill = func(w io.Writer) error { _, err := drawn.WriteTo(w); return err }
	}
	if isAbsent {
		return o.set.Remove(f.path)
	}
	return o.set.Write(f.path, fill)
}

// swap has what was prepared take its place and notes what stands there. It can be undone
// until set is closed.
func (o *outputs) swap(products []product, edition int64) error {
	if err := o.set.Swap(); err != nil {
		return err
	}
	for i := range products {
		for _, f := range products[i].files {
			o.written[f.path] = stateOf(f.path, edition, products[i].asked)
		}
	}
	return nil
}

// stateOf is a file as it stands there, for what was asked of an edition.
func stateOf(path string, edition int64, asked string) db.Written {
	w := db.Written{Path: path, Edition: edition, Asked: asked, Size: -1}
	if info, err := os.Stat(path); err == nil {
		w.Size, w.ModifiedNS = info.Size(), info.ModTime().UnixNano()
	}
	return w
}

// refresh writes the files that are not those of the published edition, such as after
// somebody has published another, or changed a question, or a file.
func (o *outputs) refresh(ctx context.Context, products []product, edition int64) error {
	defer o.set.Close()
	var stale []product
	for i := range products {
		p := &products[i]
		if o.isCurrent(p, edition) {
			continue
		}
		r, ok := o.answers[p.path]
		if !ok {
			var err error
			r, err = o.ask(ctx, p, moment{run: edition})
			if errors.Is(err, db.ErrOtherGeneration) {
				return nil // it is held back what this program would have published
			}
			if err != nil {
				return err
			}
		}
		if err := o.prepare(p, r); err != nil {
			return err
		}
		stale = append(stale, *p)
		o.answers[p.path] = r
	}
	if err := ctx.Err(); err != nil || len(stale) == 0 {
		return err
	}
	return o.swap(stale, edition)
}

func (o *outputs) isCurrent(p *product, edition int64) bool {
	return !slices.ContainsFunc(p.files, func(f outputFile) bool { return o.written[f.path] != stateOf(f.path, edition, p.asked) })
}

// keep stores what stands where, so that the next run knows.
func (o *outputs) keep(ctx context.Context, products []product, before map[string]db.Written) error {
	var now []db.Written
	for i := range products {
		for _, f := range products[i].files {
			w := o.written[f.path]
			now = append(now, w)
			o.report(&products[i], w, before[f.path])
		}
	}
	if len(now) == len(before) && !slices.ContainsFunc(now, func(w db.Written) bool { return before[w.Path] != w }) {
		return nil
	}
	return o.store.Update(ctx, func(tx *db.Tx) error { return tx.SetWritten(ctx, now) })
}

func (o *outputs) report(p *product, w, before db.Written) {
	r := outputReport{Product: p.path, Path: w.Path, Edition: w.Edition}
	if w.Size >= 0 {
		r.Bytes = &w.Size
		r.IsNew = w.Size != before.Size || w.ModifiedNS != before.ModifiedNS
	}
	if a := o.answers[p.path]; a.empty != nil {
		r.Empty = a.empty.Error()
	} else if told, ok := a.answer.(remarked); ok {
		r.Remarks = told.Remarks()
	}
	o.reports = append(o.reports, r)
}

// newOutputs knows what stands there by the store's account.
func newOutputs(ctx context.Context, store *db.Store) (*outputs, map[string]db.Written, error) {
	before, err := store.Written(ctx)
	return &outputs{store: store, answers: map[string]reply{}, written: maps.Clone(before), reports: []outputReport{}}, before, err
}
