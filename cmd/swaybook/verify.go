package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"strings"
	"time"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline"
)

// sampleSize is how many results a verification computes anew unless it is told otherwise:
// some seconds of work.
const sampleSize = 300

func verifyCommand() *cli.Command {
	return &cli.Command{
		Name:  "verify",
		Usage: "look for damage in the store, or print the digest of what it has published",
		Description: "Checks the file, what its tables say of each other, all samples against their digests, and computes a random\n" +
			"sample of the spectra, or all, anew from the stored samples, to compare them bit for bit. Lists every fault and\n" +
			"ends with 1 where there is any. It changes nothing and repairs nothing, and takes no lock.",
		Flags: []cli.Flag{
			&cli.BoolFlag{Name: "all", DisableDefaultText: true, Usage: "compute everything anew"},
			&cli.IntFlag{Name: "sample", Value: sampleSize, Usage: "`N` results to compute anew, of each recipe: components and pairs"},
			&cli.Uint64Flag{Name: "seed", DefaultText: "another each time", Usage: "of the random sample"},
			&cli.IntFlag{Name: "workers", DefaultText: "one a processor", Usage: "results in work at the same time"},
			&cli.BoolFlag{Name: "digest", DisableDefaultText: true, Usage: "print one line that is equal for equal published contents, and nothing else"},
			&cli.BoolFlag{Name: "json", DisableDefaultText: true, Usage: "print the report as JSON"},
		},
		Action: func(c *cli.Context) error {
			o, err := newVerifyOptions(c)
			if err != nil {
				return err
			}
			return runVerify(c.Context, o, c.App.Writer)
		},
	}
}

type verifyOptions struct {
	store        string
	digest, json bool
	pipeline     pipeline.VerifyOptions
	monitor      *monitor
}

func newVerifyOptions(c *cli.Context) (o verifyOptions, err error) {
	if err := noArguments(c); err != nil {
		return o, err
	}
	o = verifyOptions{store: storePath(c), digest: c.Bool("digest"), json: c.Bool("json")}
	for _, flag := range []string{"all", "sample", "seed", "workers", "json"} {
		if o.digest && c.IsSet(flag) {
			return o, usagef("--digest and --%s: a digest is of all that is published, and one line", flag)
		}
	}
	if c.Bool("all") && (c.IsSet("sample") || c.IsSet("seed")) {
		return o, usagef("--all leaves no sample to choose")
	}
	if n := c.Int("sample"); n < 0 {
		return o, usagef("--sample %d: want 0 or more", n)
	}
	if err := checkWorkers(c); err != nil {
		return o, err
	}
	logger, err := newLogger(c)
	if err != nil {
		return o, err
	}
	o.monitor = newMonitor(logger, c.App.ErrWriter, c.Bool("quiet"))
	o.pipeline = pipeline.VerifyOptions{Sample: c.Int("sample"), Seed: c.Uint64("seed"), Workers: c.Int("workers"), Clock: time.Now, Progress: o.monitor.verified}
	if !c.IsSet("seed") {
		o.pipeline.Seed = uint64(time.Now().UnixNano() / 1e3 % 1e9)
	}
	if c.Bool("all") {
		o.pipeline.Sample = -1
	}
	return o, nil
}

// errFaulty ends a verification that found faults, which have been printed by then.
func errFaulty(n int) error {
	if n == 1 {
		return errors.New("the store has a fault")
	}
	return fmt.Errorf("the store has %d faults", n)
}

func runVerify(ctx context.Context, o verifyOptions, w io.Writer) error {
	if o.digest {
		line, err := db.Digest(ctx, o.store)
		if err != nil {
			return err
		}
		_, err = fmt.Fprintln(w, line)
		return err
	}
	started := time.Now()
	found, err := pipeline.Verify(ctx, o.store, o.pipeline)
	o.monitor.finish()
	if err != nil {
		return err
	}
	report := newVerifyReport(o, found, time.Since(started))
	if o.json {
		err = writeJSON(w, report)
	} else {
		err = report.write(w)
	}
	if err == nil && len(report.Faults) > 0 {
		return errFaulty(len(report.Faults))
	}
	return err
}

// verifyReport is what the command prints, as text and as JSON.
type verifyReport struct {
	Store      string     `json:"store"`
	Whole      bool       `json:"whole"`
	Faults     []db.Fault `json:"faults"`
	Remarks    []string   `json:"remarks"`
	Series     int        `json:"series"`
	Results    int        `json:"results"`
	Recomputed int        `json:"recomputed"`
	Seed       *uint64    `json:"seed"` // nil where there was nothing to choose
	OffGrid    int        `json:"off_grid_rows"`
	Ordinates  int        `json:"view_ordinates"`
	Seconds    float64    `json:"seconds"`
}

func newVerifyReport(o verifyOptions, v pipeline.Verification, took time.Duration) verifyReport {
	r := verifyReport{
		Store: o.store, Whole: len(v.Faults) == 0, Faults: append([]db.Fault{}, v.Faults...), Remarks: append([]string{}, v.Remarks...),
		Series: v.Series, Results: v.Results, Recomputed: v.Recomputed, OffGrid: v.OffGrid, Ordinates: v.Ordinates, Seconds: took.Seconds(),
	}
	if o.pipeline.Sample >= 0 && v.Recomputed < v.Results {
		r.Seed = &o.pipeline.Seed
	}
	return r
}

func (r verifyReport) write(w io.Writer) error {
	var out strings.Builder
	for _, f := range r.Faults {
		fmt.Fprintf(&out, "%s\n", f)
	}
	for _, text := range r.Remarks {
		fmt.Fprintf(&out, "note: %s\n", text)
	}
	fmt.Fprintf(&out, "%d series compared with their digests, %d of %d results computed anew%s\n", r.Series, r.Recomputed, r.Results, r.seedText())
	fmt.Fprintf(&out, "%d rows off the grid, %d ordinates of the view\n", r.OffGrid, r.Ordinates)
	if r.Whole {
		fmt.Fprintf(&out, "%s: no fault found\n", r.Store)
	}
	_, err := io.WriteString(w, out.String())
	return err
}

func (r verifyReport) seedText() string {
	if r.Seed == nil {
		return ""
	}
	return fmt.Sprintf(" (--seed %d)", *r.Seed)
}
