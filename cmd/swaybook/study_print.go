package main

import (
	"fmt"
	"io"
	"strings"
	"text/tabwriter"

	"swaybook/db"
	"swaybook/pipeline/cluster"
	"swaybook/pipeline/study"
)

// planReport is what reprocess --check prints, as text and as JSON. Paths are absolute.
type planReport struct {
	Name  string `json:"name"`
	Study string `json:"study"`
	Store struct {
		Path  string `json:"path"`
		IsNew bool   `json:"is_new"`
	} `json:"store"`
	Shard   *shardPlan     `json:"shard"`   // to be filled, null for none
	Combine []shardPlan    `json:"combine"` // empty for none
	Sources []sourceReport `json:"sources"`
	Include []string       `json:"include"`
	Exclude []string       `json:"exclude"`
	// Ingest has the other keys of the way in, as they are given.
	Ingest []settingReport `json:"ingest"`
	Recipe struct {
		Name string `json:"name"`
		Hash string `json:"hash"`
	} `json:"recipe"`
	// Grid has empty lists for what the store has, or the default.
	Grid struct {
		PeriodsS []float64 `json:"periods_s"`
		Dampings []float64 `json:"dampings"`
	} `json:"grid"`
	MaxDrift   *float64          `json:"max_drift"`
	Keep       *int              `json:"keep"`
	State      *string           `json:"state"`
	Metrics    *string           `json:"metrics"`
	Selections []selectionReport `json:"selections"`
	Products   []productReport   `json:"products"`
}

// shardPlan is the store of a shard; one that is new was never filled.
type shardPlan struct {
	Number int    `json:"shard"`
	Count  int    `json:"count"`
	Path   string `json:"path"`
	IsNew  bool   `json:"is_new"`
}

type sourceReport struct {
	Path       string   `json:"path"`
	Kind       string   `json:"kind"`
	Files      int      `json:"files"`
	LeftOut    int      `json:"left_out"`
	Unreadable []string `json:"unreadable"`
}

type settingReport struct {
	Key   string `json:"key"`
	Value string `json:"value"`
}

type selectionReport struct {
	Name     string          `json:"name"`
	Settings []settingReport `json:"settings"`
}

type productReport struct {
	Name      string          `json:"name"`
	Kind      study.Kind      `json:"kind"`
	Selection *string         `json:"selection"`
	Settings  []settingReport `json:"settings"`
	Files     []fileReport    `json:"files"`
}

type fileReport struct {
	Path   string       `json:"path"`
	Format study.Format `json:"format"`
}

func (p *studyPlan) report(o reprocessOptions) planReport {
	s := p.study
	_, state, metrics := p.places(o.shard)
	r := planReport{
		Name: s.Name.Value, Study: s.Path(), Sources: []sourceReport{}, Include: patternTexts(s.Include), Exclude: patternTexts(s.Exclude),
		Ingest: settingReports(s.Ingest), MaxDrift: s.MaxDrift, State: given(state), Metrics: given(metrics),
		Selections: []selectionReport{}, Products: []productReport{},
	}
	r.Store.Path, r.Store.IsNew = s.Store.Value, p.isNew
	r.Combine = []shardPlan{}
	for i := range o.combine {
		r.Combine = append(r.Combine, p.shard(db.Shard{Number: i + 1, Count: o.combine}))
	}
	if o.shard.Count > 0 {
		one := p.shard(o.shard)
		r.Shard = &one
	}
	r.Recipe.Name, r.Recipe.Hash = p.ingest.pipeline.Recipe.Name, p.ingest.pipeline.Recipe.Hash()
	grid := p.ingest.pipeline.Grid
	r.Grid.PeriodsS, r.Grid.Dampings = append([]float64{}, grid.PeriodsS...), append([]float64{}, grid.Dampings...)
	if s.Keep > 0 {
		r.Keep = &s.Keep
	}
	for _, source := range p.sources {
		one := sourceReport{source.path, source.kind, source.files, source.leftOut, []string{}}
		for _, err := range source.unreadable {
			one.Unreadable = append(one.Unreadable, err.Error())
		}
		r.Sources = append(r.Sources, one)
	}
	for _, chosen := range s.Selections {
		r.Selections = append(r.Selections, selectionReport{chosen.Name, settingReports(chosen.Settings)})
	}
	for _, described := range s.Products {
		one := productReport{Name: described.Name, Kind: described.Kind, Settings: settingReports(described.Settings), Files: []fileReport{}}
		if described.Selection != "" {
			one.Selection = &described.Selection
		}
		for _, f := range described.Files {
			one.Files = append(one.Files, fileReport{f.Value, f.Format})
		}
		r.Products = append(r.Products, one)
	}
	return r
}

// shard says where a shard lies, and whether it was filled.
func (p *studyPlan) shard(s db.Shard) shardPlan {
	path := shardStore(p.study.Store.Value, s)
	return shardPlan{s.Number, s.Count, path, db.MustExist(path) != nil}
}

func given(path string) *string {
	if path == "" {
		return nil
	}
	return &path
}

func patternTexts(patterns []study.Pattern) []string {
	out := make([]string, len(patterns))
	for i, p := range patterns {
		out[i] = p.Value
	}
	return out
}

func settingReports(settings []study.Setting) []settingReport {
	out := make([]settingReport, len(settings))
	for i, s := range settings {
		out[i] = settingReport{s.Key, s.Value}
	}
	return out
}

// print writes the plan. Paths for people are relative to the study's folder.
func (p *studyPlan) print(w io.Writer, o reprocessOptions) error {
	r := p.report(o)
	if o.json {
		return writeJSON(w, r)
	}
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	out := &printer{w: table}
	out.printf("%s\nnothing was done: this is the plan of %s\n\n", r.Name, p.study.File)
	p.printWayIn(out, &r)
	out.printf("\nproduct\tselection\tsettings\tfiles\n")
	for i, one := range p.study.Products {
		out.printf("%s\t%s\t%s\t%s\n", one.Path(), orDash(one.Selection), orDash(p.words(one.Settings)), orDash(p.files(r.Products[i].Files)))
	}
	if out.err != nil {
		return out.err
	}
	return table.Flush()
}

// printWayIn writes what fills the store.
func (p *studyPlan) printWayIn(out *printer, r *planReport) {
	short := p.study.Short
	state := newOrThere(r.Store.IsNew)
	out.printf("store\t%s, %s\n", short(r.Store.Path), state)
	p.printShards(out, r)
	for i, s := range r.Sources {
		out.printf("%s\t%s, %s\n", titleOnce(i, "sources"), short(s.Path), sourceWords(s))
	}
	if len(r.Include)+len(r.Exclude) > 0 {
		out.printf("patterns\tinclude %s; exclude %s\n", orDash(strings.Join(r.Include, " ")), orDash(strings.Join(r.Exclude, " ")))
	}
	for _, s := range p.study.Ingest {
		if s.Key != "recipe" && s.Key != "periods" && s.Key != "dampings" {
			out.printf("%s\t%s\n", s.Key, short(s.Value))
		}
	}
	out.printf("recipe\t%s  %.12s\n", r.Recipe.Name, r.Recipe.Hash)
	out.printf("periods\t%s\n", gridWords(r.Grid.PeriodsS, " s", r.Store.IsNew))
	out.printf("dampings\t%s\n", gridWords(r.Grid.Dampings, "", r.Store.IsNew))
	drift, keep := "published whatever changed", "all editions"
	if r.MaxDrift != nil {
		drift = "held back beyond " + percentWords(*r.MaxDrift)
	}
	if r.Keep != nil {
		keep = fmt.Sprintf("editions: %d", *r.Keep)
	}
	out.printf("drift\t%s\nkept\t%s\n", drift, keep)
	for _, one := range []struct {
		title string
		path  *string
	}{{"state", r.State}, {"metrics", r.Metrics}} {
		if one.path != nil {
			out.printf("%s\t%s\n", one.title, short(*one.path))
		}
	}
}

// printShards writes which shard is to be filled, or which are to be combined.
func (p *studyPlan) printShards(out *printer, r *planReport) {
	if s := r.Shard; s != nil {
		out.printf("fill\t%s, %s, %s\n", db.Shard{Number: s.Number, Count: s.Count}, p.study.Short(s.Path), newOrThere(s.IsNew))
	}
	if n := len(r.Combine); n > 0 {
		out.printf("combine\t%s to %d of %d\n", p.study.Short(r.Combine[0].Path), n, n)
		if missing := p.missingShards(n); len(missing) > 0 {
			out.printf("missing\tshards %s\n", numbers(missing))
		}
	}
}

func newOrThere(isNew bool) string {
	if isNew {
		return "new"
	}
	return "is there"
}

func titleOnce(i int, title string) string {
	if i > 0 {
		return ""
	}
	return title
}

func sourceWords(s sourceReport) string {
	text := fmt.Sprintf("%s: files %d", s.Kind, s.Files)
	if s.LeftOut > 0 {
		text += fmt.Sprintf(", left out %d", s.LeftOut)
	}
	if n := len(s.Unreadable); n > 0 {
		text += fmt.Sprintf(", not readable %d, first %s", n, s.Unreadable[0])
	}
	return text
}

// gridWords says in short what a list of the grid has.
func gridWords(list []float64, unit string, isNew bool) string {
	const few = 8
	switch n := len(list); {
	case n == 0 && isNew:
		return "the default"
	case n == 0:
		return "the store's"
	case n > few:
		return fmt.Sprintf("%d, from %g to %g%s", n, list[0], list[n-1], unit)
	default:
		return strings.Trim(fmt.Sprint(list), "[]") + unit
	}
}

// words writes settings as flags.
func (p *studyPlan) words(settings []study.Setting) string {
	var words []string
	for _, s := range settings {
		word := s.Key
		if s.Value != "true" {
			word += "=" + cluster.Quote(p.study.Short(s.Value))
		}
		words = append(words, word)
	}
	return strings.Join(words, " ")
}

func (p *studyPlan) files(files []fileReport) string {
	var names []string
	for _, f := range files {
		names = append(names, p.study.Short(f.Path))
	}
	return strings.Join(names, ", ")
}

func orDash(text string) string {
	if text == "" {
		return "-"
	}
	return text
}
