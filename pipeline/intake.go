package pipeline

import (
	"context"
	"crypto/sha256"
	"encoding/json"
	"errors"
	"fmt"
	"slices"

	"swaybook/db"
	"swaybook/ingest"
)

// What reading made of a file, as it is kept for stores to be combined: a result before
// anything was decided by what else is held, without samples and spectra.
type saidFile struct {
	Rel, Stem string
	Source    db.Source
	Outcome   Outcome
	Reason    string        `json:",omitempty"`
	Refused   []saidCause   `json:",omitempty"` // one of a file that is rejected, else those of channels
	Channels  []saidChannel `json:",omitempty"`
}

type saidCause struct {
	Line int
	Text string
}

type saidChannel struct {
	Index    int // in the file
	Channel  ingest.Channel
	Stated   ingest.Stated
	Matched  bool
	Accounts []saidAccount
	Quake    *ingest.CatalogueEvent `json:",omitempty"`
	Doubt    string                 `json:",omitempty"`
	Samples  int
	Digest   string
	Findings []db.Finding `json:",omitempty"`
}

type saidAccount struct {
	By, Source, Scheme string
	Channel            ingest.Channel
	Quakes             []ingest.CatalogueEvent `json:",omitempty"`
}

// causeOf is the cause in a line, 0 for none, in words.
func causeOf(line int, cause error) saidCause {
	if pe, ok := errors.AsType[*ingest.ParseError](cause); ok {
		return saidCause{Line: pe.Line, Text: pe.Cause()}
	}
	return saidCause{Line: line, Text: cause.Error()}
}

// intakeOf is what a shard keeps of a result, with the samples of its channels.
func intakeOf(shard int, res result) (*db.Intake, error) {
	said := saidFile{Rel: res.rel, Stem: res.stem, Source: res.source, Outcome: res.outcome, Reason: res.reason}
	if res.err != nil {
		said.Refused = append(said.Refused, causeOf(0, res.err))
	}
	for _, refusal := range res.refused {
		said.Refused = append(said.Refused, causeOf(refusal.Line, refusal))
	}
	in := &db.Intake{IntakeKey: res.key, Shard: shard}
	for i := range res.channels {
		s := &res.channels[i]
		said.Channels = append(said.Channels, writtenDown(s))
		in.Series = append(in.Series, db.IntakeSeries{Channel: s.index, Samples: s.samples, Data: s.data, Digest: s.digest})
	}
	var err error
	if in.Said, err = json.Marshal(said); err != nil {
		return nil, fmt.Errorf("write down what was read of %s: %w", res.source.Path, err)
	}
	return in, nil
}

func writtenDown(s *solved) saidChannel {
	out := saidChannel{
		Index: s.index, Channel: s.channel, Stated: s.stated, Matched: s.matched, Quake: s.quake, Doubt: s.doubt,
		Samples: s.samples, Digest: s.digest, Findings: s.findings,
	}
	for _, a := range s.accounts {
		out.Accounts = append(out.Accounts, saidAccount{By: a.by, Source: a.source, Scheme: a.scheme, Channel: a.channel, Quakes: a.quakes})
	}
	return out
}

// resultOf is the result of which this was kept.
func resultOf(said []byte) (res result, err error) {
	var f saidFile
	if err := json.Unmarshal(said, &f); err != nil {
		return res, fmt.Errorf("read what was read: %w", err)
	}
	res = result{source: f.Source, rel: f.Rel, stem: f.Stem, outcome: f.Outcome, reason: f.Reason}
	for _, c := range f.Refused {
		refusal := &ingest.ParseError{Path: f.Source.Path, Line: c.Line, Err: errorText(c.Text)}
		if f.Outcome == Rejected {
			res.err = refusal
			break
		}
		res.refused = append(res.refused, refusal)
	}
	for i := range f.Channels {
		res.channels = append(res.channels, f.Channels[i].solved())
	}
	return res, nil
}

// checkIntake is a db.CheckIntake.
func checkIntake(in db.Intake) error {
	res, err := resultOf(in.Said)
	if err != nil {
		return fmt.Errorf("%w: %w", db.ErrDamaged, err)
	}
	return checkSeries(&res, in.Series)
}

// checkSeries says whether a result's samples are among those that are kept with it.
func checkSeries(res *result, kept []db.IntakeSeries) error {
	for i := range res.channels {
		c := &res.channels[i]
		if !slices.ContainsFunc(kept, func(s db.IntakeSeries) bool {
			return s.Channel == c.index && s.Samples == c.samples && s.Digest == c.digest
		}) {
			return fmt.Errorf("%w: the samples of channel %d are lost", db.ErrDamaged, c.index+1)
		}
	}
	return nil
}

func (c *saidChannel) solved() solved {
	s := solved{
		index: c.Index, channel: c.Channel, stated: c.Stated, matched: c.Matched, quake: c.Quake, doubt: c.Doubt,
		samples: c.Samples, digest: c.Digest, findings: c.Findings,
	}
	for _, a := range c.Accounts {
		s.accounts = append(s.accounts, account{by: a.By, source: a.Source, scheme: a.Scheme, channel: a.Channel, quakes: a.Quakes})
	}
	return s
}

// errorText is an error of which nothing but its words is left.
type errorText string

func (e errorText) Error() string { return string(e) }

// keepIntake keeps what stores are combined by, in a shard.
func (w *writer) keepIntake(ctx context.Context, tx *db.Tx, res result) error {
	shard := w.opts.Shard
	if shard.Count == 0 {
		return nil
	}
	sum := sha256.Sum256([]byte(res.source.SHA256 + "\n" + w.opts.Decided + "\n" + w.opts.Program))
	if err := tx.PutSighting(ctx, res.key, sum[:16]); err != nil {
		return err
	}
	switch {
	case res.intake == nil:
		return tx.ForgetIntake(ctx, shard.Number, res.key)
	default:
		return tx.PutIntake(ctx, *res.intake)
	}
}
