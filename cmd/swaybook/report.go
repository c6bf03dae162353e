package main

import (
	"context"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline/beside"
)

func reportCommand() *cli.Command {
	return &cli.Command{
		Name:      "report",
		Usage:     "write the answers of a study as one page of HTML",
		ArgsUsage: "STUDY.toml",
		Description: "The page is of what is published in the study's store; nothing is read anew or computed that is stored. It needs no\n" +
			"other file and no network. A study with the key report has swaybook reprocess write it after each run.",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "out", Usage: "write `PLACE`: a file that ends in .html, or a folder, for report.html in it (default: the study's report)"},
		},
		Action: func(c *cli.Context) error {
			if c.NArg() != 1 {
				return usagef("report needs one STUDY.toml, found %d arguments", c.NArg())
			}
			if c.IsSet("store") {
				return usagef("--store does not go with report: the study names its store")
			}
			plan, err := readReportPlan(c, c.Args().First())
			if err != nil {
				return err
			}
			file, err := reportPlace(c, plan)
			if err != nil {
				return err
			}
			return makeReport(c, plan, file)
		},
	}
}

// makeReport writes the report of a plan's store, and says so.
func makeReport(c *cli.Context, plan *studyPlan, file string) error {
	err := withStoreAt(c, plan.study.Store.Value, func(ctx context.Context, store *db.Store) error {
		return writeReport(ctx, store, plan, file)
	})
	if err == nil {
		_, err = fmt.Fprintf(c.App.Writer, "written %s\n", file)
	}
	return err
}

// reportPlace is the file that the report goes to.
func reportPlace(c *cli.Context, plan *studyPlan) (string, error) {
	out := c.String("out")
	if out == "" {
		if out = plan.study.Report.Value; out == "" {
			return "", usagef("report: the study names no file for it; give --out")
		}
		return out, nil
	}
	info, err := os.Stat(out)
	if ext := filepath.Ext(out); err != nil && ext != "" && !strings.EqualFold(ext, ".html") {
		return "", ofFlag("out", usagef("--out %q: want a file that ends in .html, or a folder", out))
	}
	if isFolder := err == nil && info.IsDir(); isFolder || !strings.EqualFold(filepath.Ext(out), ".html") {
		out = filepath.Join(out, "report.html")
	}
	return out, nil
}

// readReportPlan reads of a study what its questions need.
func readReportPlan(c *cli.Context, file string) (*studyPlan, error) {
	p, err := newPlanner(c, file)
	if err != nil {
		return nil, err
	}
	if p.hasReport = true; p.plan.study != nil {
		p.selections()
		p.products()
	}
	return p.plan, studyError(p.mistakes)
}

// writeReport writes the page of what is published.
func writeReport(ctx context.Context, store *db.Store, plan *studyPlan, file string) error {
	var published int64
	if err := store.View(ctx, func(s *db.Snapshot) error { published = s.Edition.ID; return nil }); err != nil {
		return err
	}
	o := &outputs{store: store, answers: map[string]reply{}}
	page := plan.page(o, nil, 0)
	r, err := o.ask(ctx, &page, moment{run: published})
	if err != nil {
		return err
	}
	return beside.WriteFile(file, func(w io.Writer) error { return page.files[0].write(r.answer, w) })
}
