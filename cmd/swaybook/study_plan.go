package main

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/pipeline/study"
)

// studyPlan is a study that was checked: all that it says is parsed, and what it
// names has been read, ready to run.
type studyPlan struct {
	study   *study.Study
	decided string // digest, see decidedBy
	isNew   bool   // the store is not there yet
	// ingest has the store and what pipeline.Run takes, but for study.Takes, which says
	// of files and members whether they are the study's.
	ingest   ingestOptions
	sources  []sourcePlan
	products []product
	watched  []product // spectra of the selections that no product asks for spectra of
}

// asked are the products, and the selections that are watched beside them.
func (p *studyPlan) asked() []product { return slices.Concat(p.products, p.watched) }

// written are the products, and last the report, which is made of their answers: of those
// among the outputs, where these are of the same edition, and of a drift, where it is known. It
// tells of an edition that is held back, 0 for none.
func (p *studyPlan) written(o *outputs, known *driftReport, held int64) []product {
	if p.study.Report.Value == "" {
		return p.products
	}
	return append(slices.Clip(p.products), p.page(o, known, held))
}

// page is the report as a product.
func (p *studyPlan) page(o *outputs, known *driftReport, held int64) product {
	return product{
		path: "report", asked: pageBy(p, held), files: []outputFile{{p.study.Report.Value, study.HTML}},
		ask: func(ctx context.Context, _ *db.Store, at moment) (answer, error) {
			asked := p.asked()
			for i := range asked {
				if _, ok := o.answers[asked[i].path]; ok {
					continue
				}
				r, err := o.ask(ctx, &asked[i], at)
				if err != nil {
					return nil, err
				}
				o.answers[asked[i].path] = r
			}
			m := &paginator{plan: p, outputs: o, edition: at.run, known: known}
			page, err := m.page(ctx)
			return pageOf{page}, err
		},
	}
}

// sourcePlan is what one source holds.
type sourcePlan struct {
	path       string
	kind       string // folder, file or archive
	files      int    // taken; an archive counts as one
	leftOut    int    // by the study's patterns
	unreadable []error
}

// planner makes a plan and collects mistakes.
type planner struct {
	c        *cli.Context
	plan     *studyPlan
	mistakes study.Mistakes
	// hasReport says that answers are to be laid out as a page.
	hasReport bool
}

// newPlanner reads the file of a study, of which there may be none to plan.
func newPlanner(c *cli.Context, file string) (*planner, error) {
	s, err := readStudy(file)
	mistakes, ok := errors.AsType[study.Mistakes](err)
	if err != nil && !ok {
		return nil, err
	}
	p := &planner{c: c, plan: &studyPlan{study: s}}
	for _, m := range mistakes {
		m.Err = &usageError{m.Err}
		p.mistakes = append(p.mistakes, m)
	}
	p.hasReport = s != nil && s.Report.Value != ""
	return p, nil
}

// readStudyPlan reads a study and what it names. The error has every mistake, in the
// order of the study's lines.
func readStudyPlan(c *cli.Context, file string) (*studyPlan, error) {
	p, err := newPlanner(c, file)
	if err != nil {
		return nil, err
	}
	if p.plan.study != nil {
		p.store()
		p.ingest()
		if !c.IsSet("combine") { // which reads none of their files
			p.sources()
		}
		p.outputs()
		p.selections()
		p.products()
	}
	if err := c.Context.Err(); err != nil {
		return nil, err
	}
	return p.plan, studyError(p.mistakes)
}

// fail notes a mistake in a line of the study.
func (p *planner) fail(line int, key string, err error) {
	p.mistakes = append(p.mistakes, p.plan.study.Mistake(line, key, err))
}

// blame notes the errors of a command whose flags the settings are, each in the line of
// its flag, or else in that of the table.
func (p *planner) blame(err error, settings []study.Setting, line int, table string) {
	for _, wrong := range flagErrors(err) {
		at, key := line, table
		if s, ok := settingOf(wrong, settings); ok {
			at, key = s.Line, strings.TrimPrefix(p.tableOf(s, table)+"."+s.Key, ".")
		}
		p.fail(at, key, wrong.err)
	}
}

// tableOf is the table in which a setting of a product stands: its own or its selection.
func (p *planner) tableOf(s study.Setting, table string) string {
	for _, chosen := range p.plan.study.Selections {
		if slices.Contains(chosen.Settings, s) {
			return chosen.Path()
		}
	}
	return table
}

// settingOf is the setting that an error is of: of its flag, of several that whose value
// it names; where the flag is not known, that which the error speaks of.
func settingOf(wrong flagError, settings []study.Setting) (study.Setting, bool) {
	text := wrong.Error()
	var found []study.Setting
	for _, s := range settings {
		if s.Key == wrong.flag || wrong.flag == "" && strings.Contains(text, "--"+s.Key) {
			found = append(found, s)
		}
	}
	if len(found) == 0 {
		return study.Setting{}, false
	}
	i := slices.IndexFunc(found, func(s study.Setting) bool { return strings.Contains(text, s.Value) })
	return found[max(i, 0)], true
}

// store looks whether the store is there, without opening a database.
func (p *planner) store() {
	store := p.plan.study.Store
	if store.Value == "" {
		return
	}
	head, err := readWhole(store.Value, int64(len(ingest.DatabaseMark)))
	switch {
	case errors.Is(err, fs.ErrNotExist):
		p.plan.isNew = true
		// A new store is made in a folder that is there: that of a disk which is not mounted
		// must not get an empty one.
		if _, err := os.Stat(filepath.Dir(store.Value)); err != nil {
			p.fail(store.Line, "store", fmt.Errorf("find its folder: %w", err))
		}
	case err != nil:
		p.fail(store.Line, "store", err)
	case len(head) > 0 && string(head) != ingest.DatabaseMark:
		p.fail(store.Line, "store", usagef("%s is there, and is no SQLite database", p.plan.study.Short(store.Value)))
	}
}

// ingest has the ingest command read its flags.
func (p *planner) ingest() {
	s := p.plan.study
	p.plan.decided = decidedBy(s)
	c, wrong := flagContext(p.c, ingestCommand(), s.Ingest)
	logger, err := newLogger(p.c)
	if err != nil {
		wrong = append(wrong, err)
	}
	m := newMonitor(logger, p.c.App.ErrWriter, p.c.Bool("quiet"))
	o := ingestOptions{store: s.Store.Value, monitor: m, pipeline: pipelineOptions(s.Store.Value, m)}
	wrong = append(wrong, o.describe(c))
	for _, source := range s.Sources {
		o.pipeline.Paths = append(o.pipeline.Paths, source.Value)
	}
	own := o.pipeline.Own
	own[s.Path()] = "the study itself"
	for _, one := range s.Ingest {
		if name, isList := strings.CutPrefix(one.Value, "@"); isList {
			own[name] = "a list of the study"
		}
	}
	own[s.State.Value], own[s.Metrics.Value], own[s.Report.Value] = "the study's state", "the study's metrics", "the study's report"
	for _, product := range s.Products {
		for _, f := range product.Files {
			own[f.Value] = "an answer of the study"
		}
		for _, one := range product.Settings {
			if slices.Contains(fileKeys, one.Key) {
				own[one.Value] = "a file of the study"
			}
		}
	}
	delete(own, "")
	p.plan.ingest = o
	p.blame(errors.Join(wrong...), s.Ingest, 0, "")
}

// errNothingThere says that a source holds nothing, as the folder does at which a disk is
// not mounted. To take it for an archive that was emptied would empty the store.
var errNothingThere = errors.New("holds no file: is the archive not mounted?")

// sources lists what the sources hold.
func (p *planner) sources() {
	for _, text := range p.plan.study.Sources {
		source, err := p.source(text.Value)
		if err != nil {
			p.fail(text.Line, "sources", err)
		}
		p.plan.sources = append(p.plan.sources, source)
	}
}

func (p *planner) source(path string) (sourcePlan, error) {
	s := p.plan.study
	out := sourcePlan{path: path, kind: "folder"}
	found, err := ingest.Discover([]string{path})
	if err != nil {
		return out, err
	}
	if info, err := os.Stat(path); err == nil && !info.IsDir() {
		if out.kind = "file"; ingest.IsArchive(path) {
			out.kind = "archive"
		}
	}
	for _, f := range found {
		_, isOwn := p.plan.ingest.pipeline.Own[f.Path]
		switch {
		case isOwn, ingest.SkipByName(filepath.Base(f.Path)) != "": // may lie in an empty folder, too
		case f.Err != nil:
			out.unreadable = append(out.unreadable, fmt.Errorf("%s: %w", s.Short(f.Path), f.Err))
		case s.Takes(f.Rel, false), s.Takes(f.Rel, true) && ingest.IsArchive(f.Path):
			out.files++
		default:
			out.leftOut++
		}
	}
	switch {
	case out.files > 0:
		return out, nil
	case out.leftOut > 0:
		return out, usagef("%s: include and exclude leave none of its files (%d)", s.Short(path), out.leftOut)
	}
	return out, errors.Join(append(out.unreadable, fmt.Errorf("%s %w", s.Short(path), errNothingThere))...)
}

// outputs looks whether the files to write can be: folders that are missing will be made.
func (p *planner) outputs() {
	s := p.plan.study
	if s.Metrics.Value != "" && s.State.Value == "" {
		p.fail(s.Metrics.Line, "metrics", usagef("give state too, by which the next run knows when the last one was right"))
	}
	p.output("state", s.State)
	p.output("metrics", s.Metrics)
	p.output("report", s.Report)
	for _, product := range s.Products {
		for _, f := range product.Files {
			p.output(product.Path()+".files", f.Text)
		}
	}
}

func (p *planner) output(key string, file study.Text) {
	if file.Value == "" {
		return
	}
	short := p.plan.study.Short
	info, err := os.Stat(file.Value)
	if err == nil {
		if !info.Mode().IsRegular() {
			p.fail(file.Line, key, fmt.Errorf("%s is there, and is no file", short(file.Value)))
		}
		return
	}
	for dir := filepath.Dir(file.Value); ; dir = filepath.Dir(dir) {
		info, err := os.Stat(dir)
		if err == nil && !info.IsDir() {
			p.fail(file.Line, key, fmt.Errorf("%s is no folder", short(dir)))
		}
		if err == nil || dir == filepath.Dir(dir) {
			return
		}
	}
}

// selections has the spectra of the selections watched that no product asks for spectra of.
// What is wrong with one that a product uses, its question tells.
func (p *planner) selections() {
	s := p.plan.study
	for _, chosen := range s.Selections {
		isUsed, isWatched := false, false
		for _, product := range s.Products {
			if product.Selection == chosen.Name {
				isUsed, isWatched = true, isWatched || product.Kind == study.Spectrum
			}
		}
		if isWatched {
			continue
		}
		c, wrong := flagContext(p.c, querySpectrumCommand(), chosen.Settings)
		ask, err := newSpectrumAsker(c)
		err = errors.Join(append(wrong, err)...)
		switch {
		case err == nil:
			p.plan.watched = append(p.plan.watched, product{path: chosen.Path(), ask: ask})
		case !isUsed:
			p.blame(err, chosen.Settings, chosen.Line, chosen.Path())
		}
	}
}

// withFigures are the settings of a product with that which has its command draw, where it is
// written as a figure.
func (p *planner) withFigures(described *study.Product) []study.Setting {
	settings := slices.Clone(described.Settings)
	for _, f := range described.Files {
		if !f.Format.IsFigure() {
			continue
		}
		return append(settings, study.Setting{Key: "plot", Text: f.Text})
	}
	if p.hasReport && isDrawn(described) { // by the report
		return append(settings, study.Setting{Key: "plot", Text: study.Text{Value: "report.svg"}})
	}
	return slices.DeleteFunc(settings, func(s study.Setting) bool {
		isOfFigure := slices.Contains(figureKeys, s.Key)
		if isOfFigure {
			p.fail(s.Line, described.Path()+"."+s.Key, usagef("goes with a figure: a file that ends in .svg or .png"))
		}
		return isOfFigure
	})
}

// isDrawn reports whether the answer has a figure: spectra and the demand on one structure.
func isDrawn(described *study.Product) bool {
	hasMany := slices.ContainsFunc(described.Settings, func(s study.Setting) bool { return s.Key == "structures" })
	return described.Kind == study.Spectrum || described.Kind == study.Demand && !hasMany
}

// products makes the questions of the products.
func (p *planner) products() {
	for _, described := range p.plan.study.Products {
		asked := askedBy(&described)
		c, wrong := flagContext(p.c, productCommands[described.Kind](), p.withFigures(&described))
		ask, err := newQuestion[described.Kind](c)
		p.blame(errors.Join(append(wrong, err)...), described.Settings, described.Line, described.Path())
		out := product{path: described.Path(), asked: asked, ask: ask}
		for _, f := range described.Files {
			out.files = append(out.files, outputFile{f.Value, f.Format})
		}
		p.plan.products = append(p.plan.products, out)
	}
}
