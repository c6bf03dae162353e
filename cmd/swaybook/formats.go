package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"text/tabwriter"

	"github.com/urfave/cli/v2"

	"swaybook/ingest"
	"swaybook/query"
)

func formatsCommand() *cli.Command {
	return &cli.Command{
		Name:  "formats",
		Usage: "list the record formats that are read",
		Description: "Formats are recognised by content, whatever a file's name. What matches two of them is rejected; plain columns are\n" +
			"the last resort. A layout describes a format of one's own; README.md says how.",
		Flags: []cli.Flag{layoutFlag(), formatFlag("table or json")},
		Action: func(c *cli.Context) error {
			form, err := listFormat(c)
			if err != nil {
				return err
			}
			layouts, err := readLayouts(c.StringSlice("layout"))
			if err != nil {
				return err
			}
			return runFormats(c.App.Writer, form, layouts)
		},
	}
}

func layoutFlag() cli.Flag {
	return &cli.StringSliceFlag{Name: "layout", Usage: "TOML `FILE` that describes a text format; may be given several times"}
}

// readLayouts loads the layouts before anything else is done.
func readLayouts(names []string) (layouts ingest.Layouts, err error) {
	for _, name := range names {
		f, err := os.Open(name)
		if err != nil {
			return nil, fmt.Errorf("read layout: %w", err)
		}
		err = layouts.Read(name, f)
		f.Close()
		if err != nil {
			return nil, err
		}
	}
	return layouts, nil
}

// listFormat reads the flag --format of a list that takes no arguments.
func listFormat(c *cli.Context) (form query.Format, err error) {
	err = errors.Join(noArguments(c), parseInto(&form, c, "format", func(s string) (query.Format, error) {
		return query.ParseFormat(s, query.FormatTable, query.FormatJSON)
	}))
	return form, err
}

// writeList writes the rows of a list as JSON under their name.
func writeList[T any](w io.Writer, name string, rows []T) error {
	return writeJSON(w, map[string]any{name: rows})
}

// writeJSON writes a value as JSON for people and programs.
func writeJSON(w io.Writer, value any) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(value)
}

// formatRow is one format in JSON.
type formatRow struct {
	Name     string `json:"name"`
	Title    string `json:"title"`
	Channels string `json:"channels"`
	Unit     string `json:"unit"`
	NotRead  string `json:"not_read"`
}

func runFormats(w io.Writer, form query.Format, layouts ingest.Layouts) error {
	var rows []formatRow
	for _, f := range ingest.Formats(layouts) {
		rows = append(rows, formatRow(f))
	}
	if form == query.FormatJSON {
		return writeList(w, "formats", rows)
	}
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(t, "name\twhat it is\tchannels\tunit\tnot read")
	for _, r := range rows {
		fmt.Fprintf(t, "%s\t%s\t%s\t%s\t%s\n", r.Name, r.Title, r.Channels, r.Unit, r.NotRead)
	}
	return t.Flush()
}
