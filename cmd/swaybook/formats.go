package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
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
			"the last resort.",
		Flags: []cli.Flag{formatFlag("table or json")},
		Action: func(c *cli.Context) error {
			var form query.Format
			err := errors.Join(noArguments(c), parseInto(&form, c, "format", func(s string) (query.Format, error) {
				return query.ParseFormat(s, query.FormatTable, query.FormatJSON)
			}))
			if err != nil {
				return err
			}
			return runFormats(c.App.Writer, form)
		},
	}
}

// formatRow is one format in JSON.
type formatRow struct {
	Name     string `json:"name"`
	Title    string `json:"title"`
	Channels string `json:"channels"`
	Unit     string `json:"unit"`
	NotRead  string `json:"not_read"`
}

func runFormats(w io.Writer, form query.Format) error {
	var rows []formatRow
	for _, f := range ingest.Formats() {
		rows = append(rows, formatRow(f))
	}
	if form == query.FormatJSON {
		e := json.NewEncoder(w)
		e.SetIndent("", "  ")
		return e.Encode(map[string]any{"formats": rows})
	}
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(t, "name\twhat it is\tchannels\tunit\tnot read")
	for _, r := range rows {
		fmt.Fprintf(t, "%s\t%s\t%s\t%s\t%s\n", r.Name, r.Title, r.Channels, r.Unit, r.NotRead)
	}
	return t.Flush()
}
