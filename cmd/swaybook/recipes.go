package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"slices"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/query"
)

func recipesCommand() *cli.Command {
	return &cli.Command{
		Name:  "recipes",
		Usage: "list what can be done to components before their spectra are computed",
		Description: "A recipe is a list of steps for raw components, or for those in other states of processing. The built-in ones\n" +
			"and those of the store are listed, and those of files named by --recipe; README.md says how to write one.",
		Flags: []cli.Flag{
			&cli.StringSliceFlag{Name: "recipe", Usage: "TOML `FILE` of a recipe of one's own, to check and list; may be given several times"},
			formatFlag("table or json"),
		},
		Action: func(c *cli.Context) error {
			form, err := listFormat(c)
			if err != nil {
				return err
			}
			rows, err := recipeRows(c)
			if err != nil {
				return err
			}
			return writeRecipes(c.App.Writer, form, rows)
		},
	}
}

// builtInRecipes are the names of the recipes that no file holds.
func builtInRecipes() []string {
	var names []string
	for _, r := range condition.BuiltIn() {
		names = append(names, r.Name)
	}
	return names
}

// readRecipe returns a built-in recipe by name, or that of a file.
func readRecipe(name string) (condition.Recipe, error) {
	for _, r := range condition.BuiltIn() {
		if r.Name == name {
			return r, nil
		}
	}
	text, err := os.ReadFile(name)
	if err != nil {
		return condition.Recipe{}, fmt.Errorf("read recipe: %w", err)
	}
	r, err := condition.Parse(text)
	if e, ok := errors.AsType[*condition.FileError](err); ok {
		if e.Line > 0 {
			return r, usagef("%s:%d: %w", name, e.Line, e.Err)
		}
		return r, usagef("%s: %w", name, e.Err)
	}
	return r, err
}

// recipeRow is one recipe in JSON.
type recipeRow struct {
	Name    string    `json:"name"`
	Hash    string    `json:"hash"`
	Explain string    `json:"explain"`
	States  []string  `json:"states"`
	Steps   []stepRow `json:"steps"`
	// Store says what the store has of it: "published", "superseded", "building" or "".
	Store string `json:"store"`
}

type stepRow struct {
	condition.Step
	Words string `json:"words"`
}

// recipeRows are the recipes that are built in, those of the store, and those of files.
func recipeRows(c *cli.Context) ([]recipeRow, error) {
	var rows []recipeRow
	add := func(r condition.Recipe, hash, state string) {
		at := slices.IndexFunc(rows, func(row recipeRow) bool { return row.Hash == hash })
		if at < 0 {
			at = len(rows)
			rows = append(rows, newRecipeRow(r, hash))
		}
		rows[at].Store = cmp.Or(rows[at].Store, state)
	}
	for _, r := range condition.BuiltIn() {
		add(r, r.Hash(), "")
	}
	if _, err := os.Stat(storePath(c)); err == nil {
		err := withStore(c, func(ctx context.Context, store *db.Store) error {
			held, err := store.Recipes(ctx)
			for _, h := range held {
				r, errRead := condition.FromCanonical(h.Recipe.Steps)
				if errors.Is(errRead, condition.ErrOtherVersion) {
					errRead, r.Explain = nil, "of another version of this program"
				}
				err = errors.Join(err, errRead)
				add(r, h.Hash, h.State)
			}
			return err
		})
		if err != nil {
			return nil, err
		}
	}
	for _, name := range c.StringSlice("recipe") {
		r, err := readRecipe(name)
		if err != nil {
			return nil, err
		}
		add(r, r.Hash(), "")
	}
	return rows, nil
}

func newRecipeRow(r condition.Recipe, hash string) recipeRow {
	row := recipeRow{Name: r.Name, Hash: hash, Explain: r.Explain, States: r.States, Steps: []stepRow{}}
	for _, s := range r.Steps {
		row.Steps = append(row.Steps, stepRow{s, s.Words()})
	}
	return row
}

func writeRecipes(w io.Writer, form query.Format, rows []recipeRow) error {
	if form == query.FormatJSON {
		return writeList(w, "recipes", rows)
	}
	p := &printer{w: w}
	for i, r := range rows {
		if i > 0 {
			p.printf("\n")
		}
		p.printf("%s  %.12s", r.Name, r.Hash)
		if r.Store != "" {
			p.printf("  %s in the store", r.Store)
		}
		p.printf("\n  for %s\n", condition.Recipe{States: r.States}.Applies())
		if r.Explain != "" {
			p.printf("  %s\n", r.Explain)
		}
		for k, s := range r.Steps {
			p.printf("  %d. %-17s  %s\n", k+1, s.Do, s.Words)
		}
	}
	return p.err
}
