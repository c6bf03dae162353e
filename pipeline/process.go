package pipeline

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"math"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/quality"
	"swaybook/pipeline/signal"
)

// Outcome is what became of a file.
type Outcome string

// The outcomes of a file.
const (
	Stored   Outcome = "stored"
	Held     Outcome = "held"     // its content is in the store already
	Skipped  Outcome = "skipped"  // recognised, but no ground acceleration
	Rejected Outcome = "rejected" // could not be read
	// Elsewhere is of a file that is left to another shard, or whose channels all are.
	Elsewhere Outcome = "elsewhere"
)

// opened is what becomes of an archive, which is no file in the counts.
const opened Outcome = "opened"

// result is one file, read and solved.
type result struct {
	source   db.Source
	rel      string // path below the folder that was named
	stem     string // base name without extension, for identities that no header gives
	outcome  Outcome
	reason   string // why it was skipped, or where held content was first read
	err      error  // why it was rejected
	channels []solved
	refused  ingest.ChannelErrors // why other channels of a file that is read were not
	// unsolved are those of refused that were read, and are of the run's share.
	unsolved ingest.ChannelErrors
	// elsewhere counts the channels that are left to other shards.
	elsewhere int
	key       db.IntakeKey // its place among what is read
	intake    *db.Intake   // what is kept for stores to be combined, nil for nothing
}

// solved is one channel with what was computed of it.
type solved struct {
	index    int                    // of the channel in the file
	record   string                 // what the channels of its record have in common
	channel  ingest.Channel         // without samples
	stated   ingest.Stated          // what the catalogue says of it, and nothing else
	matched  bool                   // whether the catalogue says anything
	accounts []account              // what everybody says of its event, station and record
	quake    *ingest.CatalogueEvent // the QuakeML event that gave it its event, nil for none
	doubt    string                 // why metadata do not tell its earthquake
	samples  int
	data     []byte // compressed samples
	digest   string
	spectra  *db.Spectra // nil where they are left to a later stage, or cannot be had
	findings []db.Finding
}

// reader turns files into results. It is shared by the workers.
type reader struct {
	store     Store
	catalogue *ingest.Catalogue
	hints     ingest.Hints
	computer  computer
	isLater   bool // spectra are left to a later stage
	share     share
}

func newReader(store Store, opts Options, computer computer) *reader {
	return &reader{store: store, catalogue: opts.Catalogue, hints: opts.Hints, computer: computer, share: share(opts.Shard)}
}

// process reads, recognises, describes and solves one file. What is wrong with
// the file is part of the result; an error is the store's or the context's.
func (r *reader) process(ctx context.Context, file item) (result, error) {
	res := result{source: db.Source{Path: file.Path}, rel: file.Rel, stem: file.stem, key: file.key}
	res, err := r.make(ctx, file, res)
	if err == nil && r.share.Count > 0 && res.outcome != opened {
		res, err = r.keep(res)
	}
	return res, errors.Join(err, ctx.Err())
}

// make makes of the file what can be made of it.
func (r *reader) make(ctx context.Context, file item, res result) (result, error) {
	switch {
	case file.opened:
		res.outcome = opened
		return res, nil
	case file.skip != "":
		return res.skipped(file.skip), nil
	}
	data, err := r.read(file, &res)
	if skip, ok := errors.AsType[*ingest.NotMotionError](err); ok {
		return res.skipped(skip.Reason), nil
	}
	if err != nil {
		return res.rejected(err), nil
	}
	first, held, err := r.store.Held(ctx, res.source.SHA256)
	if err != nil {
		return res, err
	}
	if held && r.share.Count == 0 {
		return res.held(first), nil
	}
	parsed := res
	err = survive(func() error {
		parsed = r.parse(ctx, file.Found, data, res, held || r.isLater)
		return nil
	})
	if err != nil {
		parsed = res.rejected(err)
	}
	return parsed, nil
}

// keep leaves to others what is not of the run's share, and writes down the rest. What is
// said of a file as a whole is said by one.
func (r *reader) keep(res result) (result, error) {
	if !r.share.takes(res.rel) {
		res.refused = res.unsolved
		if res.outcome != Stored {
			res.outcome, res.err = Elsewhere, nil
		}
	}
	if res.outcome == Stored && len(res.channels)+len(res.refused) == 0 {
		res.outcome = Elsewhere
	}
	if res.outcome == Elsewhere {
		return res, nil
	}
	var err error
	res.intake, err = intakeOf(r.share.Number, res)
	return res, err
}

// read loads the file, unless it was read out of an archive, and completes the
// description of the source.
func (r *reader) read(file item, res *result) ([]byte, error) {
	if file.Err != nil {
		return nil, file.Err
	}
	data, modified := file.data, file.modified
	if !file.isMember {
		read, info, err := ingest.Read(file.Path)
		if err != nil {
			return nil, err
		}
		data, modified = read, info.ModTime()
	}
	sum := sha256.Sum256(data)
	res.source.SHA256 = hex.EncodeToString(sum[:])
	res.source.Size = int64(len(data))
	res.source.Modified = modified
	return data, nil
}

// parse reads the channels, applies the catalogue, and solves each channel that is of the
// run's share, unless its spectra are left to later. A result after the end of the context is
// none.
func (r *reader) parse(ctx context.Context, file ingest.Found, data []byte, res result, isLater bool) result {
	hints := r.hints
	if r.catalogue != nil {
		hints = r.catalogue.Hints(file.Rel, hints)
	}
	format, channels, err := ingest.Parse(ctx, file.Path, data, hints)
	res.source.Format = format
	if skip, ok := errors.AsType[*ingest.NotMotionError](err); ok {
		return res.skipped(skip.Reason)
	}
	refused, single := errors.AsType[ingest.ChannelErrors](err)
	if err != nil && !single {
		return res.rejected(err)
	}
	res.outcome, res.refused = Stored, refused
	for i := range channels {
		if ctx.Err() != nil {
			return res
		}
		s := r.tell(file, format, res.stem, &channels[i])
		if s.index = i; !r.share.takes(s.record) {
			res.elsewhere++
			continue
		}
		if err := survive(func() error { return r.solve(&s, channels[i], isLater) }); err != nil {
			res.unsolved = append(res.unsolved, &ingest.ParseError{Path: file.Path, Line: channels[i].Line, Err: err})
			continue
		}
		res.channels = append(res.channels, s)
	}
	res.refused = append(res.refused, res.unsolved...)
	return res
}

// tell describes the channel by all who speak of it. Where headers and catalogue know
// nothing of its earthquake, it is of the QuakeML event whose waves came, and the rows of
// the catalogue for that one count.
func (r *reader) tell(file ingest.Found, format, stem string, c *ingest.Channel) solved {
	header := *c
	s := solved{accounts: []account{{by: db.ByHeader, source: file.Path, scheme: schemeOf(format, header.Station.Network), channel: withoutSamples(header)}}}
	s.stated, s.matched = r.describe(file, stem, c)
	s.record = recordKey(c, file.Rel, stem)
	accounts, remark, doubt := metadataAccounts(r.hints.Metadata, r.hints.Metadata.Events(), c, len(c.Acceleration))
	if q := quakeIn(accounts); q != nil && isWithoutEvent(c) {
		*c, s.quake = header, q
		c.Event = q.Event
		s.stated, s.matched = r.describe(file, stem, c)
	}
	if remark != "" {
		c.Warnings = append(c.Warnings, remark)
	}
	s.accounts, s.doubt = append(s.accounts, accounts...), doubt
	if s.matched {
		s.accounts = append(s.accounts, catalogueAccounts(s.stated, file.Path)...)
	}
	return s
}

// schemeOf is whose codes the events of a format's files have: those of the archive that
// the format is of, or, where everybody writes his own, of the station's network, "" where
// that is not stated.
func schemeOf(format, network string) string {
	if ingest.IsOfOneArchive(format) {
		return format
	}
	if network == "" {
		return ""
	}
	return format + "/" + network
}

// describe completes what the file's content says by the catalogue, which has the
// last word, and by the file's name where neither gives a direction.
func (r *reader) describe(file ingest.Found, stem string, c *ingest.Channel) (stated ingest.Stated, matched bool) {
	if r.catalogue != nil {
		r.catalogue.GiveDirection(file.Rel, c)
	}
	silent := c.Orientation.Axis == ingest.AxisUnknown
	if silent {
		_, c.Orientation = ingest.SplitStem(stem)
	}
	if r.catalogue != nil {
		stated, matched = r.catalogue.Apply(file.Rel, c)
	}
	if silent {
		c.CheckStem(stem)
	}
	return stated, matched
}

// solve completes s by what is computed of the channel.
func (r *reader) solve(s *solved, c ingest.Channel, isLater bool) error {
	arrival := signal.Arrival(c.Acceleration, c.StepS)
	if !isLater {
		spectra, err := r.computer.compute(condition.Component{
			Acceleration: c.Acceleration, StepS: c.StepS, State: string(c.Processing), LowCutHz: numberOrNaN(c.LowCutHz), HighCutHz: numberOrNaN(c.HighCutHz),
		}, arrival)
		_, cannot := errors.AsType[*condition.StepError](err)
		switch {
		case err == nil:
			s.spectra = &spectra
		case !cannot:
			return err // of a recipe that cannot be done the samples are kept
		}
	}
	s.channel, s.samples, s.findings = withoutSamples(c), len(c.Acceleration), findingsOf(&c, arrival)
	s.data, s.digest = db.EncodeSamples(c.Acceleration, c.UnitMPS2)
	return nil
}

// findingsOf are what reading found and what the samples show, in which the motion arrives
// at the sample arrival, each flag once: data may be lost in the midst and at the end.
func findingsOf(c *ingest.Channel, arrival int) []db.Finding {
	var out []db.Finding
	for _, f := range c.Findings {
		out = append(out, db.Finding(f))
	}
	return withFound(out, quality.Assess(c.Acceleration, c.StepS, arrival))
}

func numberOrNaN(n ingest.Number) float64 {
	if !n.Known {
		return math.NaN()
	}
	return n.Value
}

// catalogueAccounts are what the catalogue says of a channel of a file.
func catalogueAccounts(stated ingest.Stated, path string) []account {
	return []account{
		{by: db.ByCatalogue, source: db.CodeRows, channel: stated.ByCode},
		{by: db.ByCatalogue, source: path, channel: stated.ByFile},
	}
}

func withoutSamples(c ingest.Channel) ingest.Channel {
	c.Acceleration = nil
	return c
}

func (res result) skipped(reason string) result {
	res.outcome, res.reason = Skipped, reason
	return res
}

func (res result) held(first string) result {
	res.outcome, res.reason = Held, "same content as "+first
	return res
}

func (res result) rejected(err error) result {
	res.outcome, res.err = Rejected, err
	return res
}
