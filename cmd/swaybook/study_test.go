package main

import (
	"bytes"
	"context"
	"flag"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/pipeline/study"
)

// TestStudyKeys: every flag that names a file, or takes a list, does so in a study too.
func TestStudyKeys(t *testing.T) {
	v := studyVocabulary()
	check := func(flags []study.Flag, command *cli.Command) {
		for _, f := range flags {
			i := slices.IndexFunc(command.Flags, func(c cli.Flag) bool { return c.Names()[0] == f.Name })
			usage := command.Flags[i].(cli.DocGenerationFlag).GetUsage()
			if strings.Contains(usage, "`FILE`") != f.IsFile {
				t.Errorf("%s %s: file %v: %s", command.Name, f.Name, f.IsFile, usage)
			}
			if isList := strings.Contains(usage, "`LIST`") || strings.Contains(usage, "or a list") || strings.Contains(usage, "LAT,LON"); isList != (f.Form == study.List) && f.Name != "siting" {
				t.Errorf("%s %s: list %v: %s", command.Name, f.Name, f.Form == study.List, usage)
			}
		}
	}
	check(v.Ingest, ingestCommand())
	for kind, flags := range v.Products {
		check(flags, productCommands[kind]())
	}
	if len(v.Ingest) != len(ingestKeys) {
		t.Errorf("%d of the keys %v are flags of ingest", len(v.Ingest), ingestKeys)
	}
	for _, f := range v.Selection {
		for _, kind := range []study.Kind{study.Spectrum, study.Demand} {
			if !slices.ContainsFunc(v.Products[kind], func(p study.Flag) bool { return p.Name == f.Name }) {
				t.Errorf("query %s has no --%s", kind, f.Name)
			}
		}
	}
}

// planOf reads a study as the command does.
func planOf(t *testing.T, file string) (*studyPlan, error) {
	t.Helper()
	set := flag.NewFlagSet("swaybook", flag.ContinueOnError)
	for _, f := range globalFlags() {
		if err := f.Apply(set); err != nil {
			t.Fatal(err)
		}
	}
	return readStudyPlan(cli.NewContext(newApp(io.Discard, io.Discard), set, nil), file)
}

const quaySpectrum, quayDemand = "0.2,0.5", "0.7s"

const quayStudy = `name = "Quays"
store = "quays.db"
sources = ["records"]
exclude = ["*damaged*"]
recipe = "as-delivered"
periods = [0.1, 0.2, 0.5, 1]
dampings = ["5%"]

[selection.one]
siting = ["ground", "structure"]
screen = "none"

[spectrum.one]
selection = "one"
periods = [0.2, 0.5]
component = "each"
include-duplicates = true
units = "us"
files = ["out/one.csv", "out/one.json", "out/one.txt"]

[demand.two]
selection = "one"
component = "each"
period = "0.7s"
weight = "500kN"
files = "out/two.csv"

[demand.three]
component = "each"
structures = "three.csv"
files = "out/three.json"

[records.four]
files = ["out/four.csv", "out/four.txt"]

[records.five]
rejected = true
files = "out/five.csv"

[records.none]
where = "magnitude > 99"
files = "out/none.csv"
`

// TestProductsAnswerAsCommands: a product's files are what the command prints.
func TestProductsAnswerAsCommands(t *testing.T) {
	dir := t.TempDir()
	write := func(name, text string) {
		t.Helper()
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	write("quays.toml", quayStudy)
	write("three.csv", "id,period,damping\nsilo,0.6s,5%\npier,0.9s,5%\n")
	if err := os.CopyFS(filepath.Join(dir, "records"), os.DirFS(filepath.Join("..", "..", "testdata", "records", "at2"))); err != nil {
		t.Fatal(err)
	}
	plan, err := planOf(t, filepath.Join(dir, "quays.toml"))
	if err != nil {
		t.Fatal(err)
	}
	ctx := context.Background()
	store, err := db.Create(ctx, plan.ingest.store, pipeline.SolverVersion)
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	if _, err := pipeline.Run(ctx, store, plan.ingest.pipeline); err != nil {
		t.Fatal(err)
	}
	at := func(name string) string { return filepath.Join(dir, name) }
	chosen := []string{"--siting", "ground,structure", "--screen", "none"}
	commands := map[string][]string{
		"one":   append([]string{"query", "spectrum", "--periods", quaySpectrum, "--component", "each", "--include-duplicates", "--units", "us"}, chosen...),
		"two":   append([]string{"query", "demand", "--period", quayDemand, "--weight", "500kN", "--component", "each"}, chosen...),
		"three": {"query", "demand", "--structures", at("three.csv"), "--component", "each"},
		"four":  {"query", "records"},
		"five":  {"query", "records", "--rejected"},
		"none":  {"query", "records", "--where", "magnitude > 99"},
	}
	files := 0
	for _, p := range plan.products {
		_, name, _ := strings.Cut(p.path, ".")
		a, err := p.ask(ctx, store, moment{})
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		for _, f := range p.files {
			var got, want, stderr bytes.Buffer
			if err := f.write(a, &got); err != nil {
				t.Errorf("%s: %v", f.path, err)
			}
			args := append([]string{"swaybook", "--store", at("quays.db")}, commands[name]...)
			if code := run(ctx, append(args, "--format", string(fileFormats[f.format])), &want, &stderr); code != exitDone {
				t.Fatalf("%v: exit code %d: %s", args, code, stderr.String())
			}
			if got.String() != want.String() || got.Len() == 0 {
				t.Errorf("%s:\n%s, the command prints\n%s", f.path, got.String(), want.String())
			}
			if remarks := a.(remarked).Remarks(); f.format == "csv" && remarks != stderr.String() && name != "five" {
				t.Errorf("%s: remarks %q, the command's %q", f.path, remarks, stderr.String())
			}
			files++
		}
	}
	if files != 9 {
		t.Errorf("%d files were compared, want 9", files)
	}
}

// TestOwnFilesAreNoRecords: what a study writes and reads may lie among its sources.
func TestOwnFilesAreNoRecords(t *testing.T) {
	dir := t.TempDir()
	text := strings.Replace(strings.Replace(quayStudy, `["records"]`, `["."]`, 1), `exclude = ["*damaged*"]`, "catalogue = \"c.csv\"\nstate = \"state.json\"", 1)
	for name, text := range map[string]string{
		"quays.toml": text, "three.csv": "id,period,damping\nsilo,0.6s,5%\n", "state.json": "{}", "a.AT2": "x", "b/c.AT2": "y", "out/one.csv": "z", "out/other.csv": "z",
		"c.csv": "station,siting\nQ1,ground\n",
	} {
		if err := os.MkdirAll(filepath.Dir(filepath.Join(dir, name)), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	plan, err := planOf(t, filepath.Join(dir, "quays.toml"))
	if err != nil {
		t.Fatal(err)
	}
	if got := plan.sources[0]; got.files != 3 || got.leftOut != 0 || !plan.isNew {
		t.Errorf("source %+v, want a.AT2, b/c.AT2 and out/other.csv", got)
	}
}
