package main

import (
	"context"
	"errors"
	"io"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline/study"
	"swaybook/query"
	"swaybook/query/chart"
	"swaybook/query/report"
)

// product is a question of a study, ready to be asked.
type product struct {
	path  string // the table that describes it: of a selection that is watched, this
	asked string // digest of the question, see askedBy; of what is written only
	ask   asker
	files []outputFile // none of a product that is only watched
}

// outputFile is where an answer is written.
type outputFile struct {
	path   string
	format study.Format
}

// write writes an answer in the format of the file.
func (f *outputFile) write(a answer, w io.Writer) error {
	if f.format.IsFigure() {
		if figure, ok := a.(drawer); ok {
			return figure.Draw(w, chart.Format(f.format))
		}
		return errNoFigure
	}
	return a.Write(w, fileFormats[f.format])
}

// fileFormats are the formats of answers, other than figures, by the extensions of files.
var fileFormats = map[study.Format]query.Format{
	study.CSV: query.FormatCSV, study.JSON: query.FormatJSON, study.TXT: query.FormatTable, study.HTML: "",
}

// moment is a state of the store: what a run left, 0 for what is published; of any solver,
// as it was computed, or of this program's.
type moment struct {
	run       int64
	anySolver bool
}

// asker asks a question of a store.
type asker func(ctx context.Context, store *db.Store, at moment) (answer, error)

// answer can be written, in the formats that its files may have.
type answer interface {
	Write(io.Writer, query.Format) error
}

// Answers are more than that as far as there is use for it: query.Compared, and these.
type (
	drawer interface {
		Draw(io.Writer, chart.Format) error
	}
	// remarked has remarks that go to people where the format has no room for them.
	remarked interface{ Remarks() string }
	// sectioned has a part of a report.
	sectioned interface {
		Section(id string, names report.Names) report.Section
	}
	// governed knows the records that are the greatest of something.
	governed interface{ Governing() query.Governing }
)

// Answers to products are all of that, but that lists of records govern nothing; the report,
// made of them, can be written only.
type ofProduct interface {
	answer
	query.Compared
	drawer
	remarked
	sectioned
}

var (
	_, _ ofProduct = inUnits{}, list{}
	_    governed  = inUnits{}
)

// inUnits is an answer of statistics in the units that were asked for.
type inUnits struct {
	statistics
	drawn
	units query.Units
	// section is its part of a report.
	section func(id string, names report.Names) report.Section
}

func (a inUnits) Section(id string, names report.Names) report.Section { return a.section(id, names) }

func (a inUnits) Write(w io.Writer, f query.Format) error { return a.statistics.Write(w, f, a.units) }

// drawn is what has a figure, or none where that is nil.
type drawn struct{ figure func() figure }

func (d drawn) Draw(w io.Writer, f chart.Format) error {
	if d.figure == nil {
		return errNoFigure
	}
	is := d.figure()
	return chart.Write(w, f, is.size, is.Chart)
}

// errNoFigure does not come up, since a study's reader refuses figures where there are none.
var errNoFigure = errors.New("the answer has no figure")

// list is an answer of records.
type list struct {
	writer
	query.Compared
	drawn
	remarks string
}

func (l list) Section(id string, _ report.Names) report.Section { return report.Of(id, l.Sheet()) }

func (l list) Remarks() string { return l.remarks }

// unmeasured is what has nothing by which it could be compared.
type unmeasured struct{}

func (unmeasured) Figures() []query.Figure { return nil }
func (unmeasured) Motions() []query.Motion { return nil }

// newQuestion reads the flags of a command into its question, by kind.
var newQuestion = map[study.Kind]func(*cli.Context) (asker, error){
	study.Spectrum: newSpectrumAsker,
	study.Demand:   newDemandAsker,
	study.Records:  newRecordsAsker,
}

// askIn asks for statistics in units. A figure shows them where there is one, and a report.
func askIn[A statistics](units query.Units, draw func(A, query.Units) figure, section func(string, A, report.Names) report.Section, ask func(ctx context.Context, store *db.Store, at moment) (A, error)) asker {
	return func(ctx context.Context, store *db.Store, at moment) (answer, error) {
		a, err := ask(ctx, store, at)
		if err != nil {
			return nil, err
		}
		out := inUnits{statistics: a, units: units, section: func(id string, names report.Names) report.Section { return section(id, a, names) }}
		if draw != nil {
			out.figure = func() figure { return draw(a, units) }
		}
		return out, nil
	}
}

func newSpectrumAsker(c *cli.Context) (asker, error) {
	o, err := newSpectrumOptions(c)
	section := func(id string, a *query.SpectrumAnswer, _ report.Names) report.Section {
		return report.Spectrum(id, a, o.units, o.plot.marks, o.plot.axes == axesLinear)
	}
	ask := func(ctx context.Context, store *db.Store, at moment) (*query.SpectrumAnswer, error) {
		q := o.question
		q.AsOf, q.AnySolver = at.run, at.anySolver
		return q.Ask(ctx, store)
	}
	return askIn(o.units, o.plot.of, section, ask), validated(err, o.question.Validate, o.question.Selection)
}

func newDemandAsker(c *cli.Context) (asker, error) {
	if c.IsSet("structures") {
		return newPortfolioAsker(c)
	}
	o, err := newDemandOptions(c)
	section := func(id string, a *query.DemandAnswer, _ report.Names) report.Section {
		return report.Demand(id, a, o.units, o.plot.axes == axesLinear, o.figure(a, o.units).size)
	}
	ask := func(ctx context.Context, store *db.Store, at moment) (*query.DemandAnswer, error) {
		q := o.question
		q.AsOf, q.AnySolver = at.run, at.anySolver
		return q.Ask(ctx, store)
	}
	return askIn(o.units, o.figure, section, ask), validated(err, o.question.Validate, o.question.Selection)
}

func newPortfolioAsker(c *cli.Context) (asker, error) {
	o, err := newPortfolioOptions(c)
	section := func(id string, a statistics, names report.Names) report.Section {
		if whole, ok := a.(*query.PortfolioAnswer); ok {
			return report.Portfolio(id, whole, o.units, names)
		}
		return report.Nearest(id, a.(*query.NearestAnswer), o.units)
	}
	ask := func(ctx context.Context, store *db.Store, at moment) (statistics, error) {
		asked := o
		asked.question.AsOf, asked.question.AnySolver = at.run, at.anySolver
		return asked.ask(ctx, store)
	}
	return askIn(o.units, nil, section, ask), validated(err, o.validate, o.question.Selection)
}

func newRecordsAsker(c *cli.Context) (asker, error) {
	o, err := newRecordsOptions(c)
	ask := func(ctx context.Context, store *db.Store, at moment) (answer, error) {
		if o.list != nil {
			a, err := o.list(ctx, store, at.run)
			return list{a, unmeasured{}, drawn{}, ""}, err
		}
		q := o.question
		q.AsOf, q.AnySolver = at.run, at.anySolver
		a, err := q.Ask(ctx, store)
		if empty, ok := errors.AsType[*query.EmptyError](err); ok { // a list may be empty
			return list{a, a, drawn{}, empty.Error() + "\n"}, nil
		}
		if err != nil {
			return nil, err
		}
		return list{a, a, drawn{func() figure { return o.figure(a) }}, a.Selection.Remarks()}, nil
	}
	return ask, validated(err, o.question.Validate, o.question.Selection)
}

// validated checks a question whose flags were read. Of one that could not be read whole
// the expression can be checked all the same.
func validated(err error, validate func() error, s query.Selection) error {
	if err != nil {
		return errors.Join(err, s.Validate())
	}
	return validate()
}
