package main

import (
	"go/parser"
	"go/token"
	"io/fs"
	"path"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// layers says what a package may import of ours, and why. A package that is
// not listed may import nothing of ours; tests are free.
var layers = map[string][]string{
	"cmd/swaybook":       {"ingest", "pipeline", "pipeline/condition", "pipeline/demo", "pipeline/study", "pipeline/beside", "pipeline/cluster", "db", "query", "query/chart", "query/report"},                // wiring, no arithmetic and no SQL
	"ingest":             {"ingest/miniseed", "ingest/fdsnxml", "ingest/archive", "ingest/tomlfile"},                                                                                                          // what one reader needs
	"pipeline":           {"ingest", "ingest/archive", "db", "pipeline/spectrum", "pipeline/geodesy", "pipeline/likeness", "pipeline/condition", "pipeline/signal", "pipeline/intensity", "pipeline/quality"}, // the way in
	"pipeline/demo":      {"pipeline/stochastic"},                                                                                                                                                             // invents files, knows nothing of readers
	"db":                 {"migrations"},                                                                                                                                                                      // the only SQL
	"pipeline/condition": {"pipeline/signal", "pipeline/internal/elementary"},                                                                                                                                 // the steps of recipes
	"pipeline/beside":    {},
	"pipeline/cluster":   {},
	"pipeline/study":     {"ingest/tomlfile"},                                 // lines of keys
	"pipeline/intensity": {"pipeline/signal"},                                 // Fourier amplitudes
	"pipeline/quality":   {"pipeline/signal", "pipeline/internal/elementary"}, // means and integrals
	"pipeline/likeness":  {"pipeline/internal/elementary"},
	"pipeline/signal":    {"pipeline/internal/elementary"},
	"query/parquet":      {},                                                                                                                                                                                                                                // rows of plain structs
	"query/report":       {"query", "query/chart"},                                                                                                                                                                                                          // answers on a page
	"pipeline/spectrum":  {"pipeline/internal/kernel", "pipeline/internal/elementary"},                                                                                                                                                                      // the loops behind the solver
	"query":              {"db", "query/stats", "query/modal", "query/design", "query/mixed", "query/chart", "query/parquet", "pipeline/spectrum", "pipeline/condition", "pipeline/intensity", "pipeline/geodesy", "pipeline/siteclass", "ingest/tomlfile"}, // the way out; never pipeline itself; the nearest known code
	"query/design":       {"query/stats", "ingest/tomlfile"},                                                                                                                                                                                                // logarithms of the same bits everywhere; lines of keys
	"query/mixed":        {"query/stats"},                                                                                                                                                                                                                   // logarithms that are the same everywhere
}

// sqlImports are for db alone.
var sqlImports = []string{"database/sql", "modernc.org/sqlite"}

func TestImportsFollowTheLayers(t *testing.T) {
	root := filepath.Join("..", "..")
	err := filepath.WalkDir(root, func(file string, d fs.DirEntry, err error) error {
		if err == nil && d.IsDir() && d.Name() == "testdata" { // what is there is no package of the program
			return filepath.SkipDir
		}
		if err != nil || d.IsDir() || !strings.HasSuffix(file, ".go") || strings.HasSuffix(file, "_test.go") {
			return err
		}
		rel, err := filepath.Rel(root, file)
		if err != nil {
			return err
		}
		checkImports(t, file, path.Dir(filepath.ToSlash(rel)))
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
}

func checkImports(t *testing.T, file, pkg string) {
	t.Helper()
	f, err := parser.ParseFile(token.NewFileSet(), file, nil, parser.ImportsOnly)
	if err != nil {
		t.Fatal(err)
	}
	for _, spec := range f.Imports {
		imported := strings.Trim(spec.Path.Value, `"`)
		if ours, ok := strings.CutPrefix(imported, "swaybook/"); ok && !slices.Contains(layers[pkg], ours) {
			t.Errorf("%s: package %s must not import %s", file, pkg, ours)
		}
		if slices.Contains(sqlImports, imported) && pkg != "db" {
			t.Errorf("%s: only db may import %s", file, imported)
		}
	}
}

// The top level is fixed.
func TestTopLevel(t *testing.T) {
	allowed := strings.Fields("cmd ingest pipeline db query migrations testdata go.mod go.sum README.md DEVELOPERS.md")
	entries, err := filepath.Glob(filepath.Join("..", "..", "*"))
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		name := filepath.Base(e)
		if !slices.Contains(allowed, name) && !strings.HasPrefix(name, ".") && !ignored(name) {
			t.Errorf("%s does not belong at the top level", name)
		}
	}
}

// ignored are the traces of a build and of a demo, which git ignores too.
func ignored(name string) bool {
	return name == "swaybook" || name == "swaybook-demo" || strings.HasPrefix(path.Ext(name), ".db")
}
