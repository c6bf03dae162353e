package main

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"
	"time"
)

// benchmarkFiles is the archive of the target: 10,000 files, of which a run that finds
// nothing changed takes less than 2 % of the first run's time.
const benchmarkFiles = 10_000

// BenchmarkUnchangedStudy is a run that finds nothing changed, of invented components of
// 8000 samples; its share of the first run's time is a metric. It takes two minutes and
// 1.3 GB of the temporary folder.
func BenchmarkUnchangedStudy(b *testing.B) {
	dir := b.TempDir()
	writeInvented(b, filepath.Join(dir, "records"), benchmarkFiles)
	study := filepath.Join(dir, "study.toml")
	text := "name = \"Invented\"\nstore = \"s.db\"\nsources = \"records\"\nrecipe = \"standard\"\nmax-drift = \"5%\"\nkeep = 5\nstate = \"state.json\"\n" +
		"[spectrum.all]\nfiles = \"all.csv\"\n[demand.tank]\nperiod = \"0.83s\"\nfiles = \"tank.json\"\n[records.held]\nfiles = \"held.csv\"\n"
	if err := os.WriteFile(study, []byte(text), 0o666); err != nil {
		b.Fatal(err)
	}
	reprocess := func() time.Duration {
		begun := time.Now()
		if code := run(b.Context(), []string{"swaybook", "--quiet", "reprocess", study}, io.Discard, os.Stderr); code != exitDone {
			b.Fatalf("exit code %d", code)
		}
		return time.Since(begun)
	}
	first := reprocess()
	for b.Loop() {
		reprocess()
	}
	perRun := b.Elapsed() / time.Duration(b.N)
	b.ReportMetric(first.Seconds(), "s/first")
	b.ReportMetric(100*perRun.Seconds()/first.Seconds(), "%first")
}

// writeInvented writes components of white noise under an envelope, three a record, as old
// files.
func writeInvented(b *testing.B, dir string, files int) {
	const samples, stepS = 8000, 0.005
	if err := os.MkdirAll(dir, 0o777); err != nil {
		b.Fatal(err)
	}
	random := rand.New(rand.NewPCG(1, 2))
	old := time.Now().Add(-24 * time.Hour)
	for k := range files {
		event, station, component := k/30, k/3%10, []string{"H1", "H2", "V"}[k%3]
		name := filepath.Join(dir, fmt.Sprintf("EV%03d_ST%02d_%s.AT2", event, station, component))
		f, err := os.Create(name)
		if err != nil {
			b.Fatal(err)
		}
		w := bufio.NewWriter(f)
		fmt.Fprintf(w, "INVENTED\nInvented event %d, station ST%02d, %s\nACCELERATION TIME SERIES IN UNITS OF G\nNPTS= %d, DT= %g SEC\n", event, station, component, samples, stepS)
		for i := range samples {
			x := float64(i) * stepS / 6
			fmt.Fprintf(w, "%15.7E", 0.1*x*x*math.Exp(2*(1-x))*random.NormFloat64())
			if i%5 == 4 {
				w.WriteByte('\n')
			}
		}
		if err := w.Flush(); err != nil {
			b.Fatal(err)
		}
		if err := f.Close(); err != nil {
			b.Fatal(err)
		}
		if err := os.Chtimes(name, old, old); err != nil {
			b.Fatal(err)
		}
	}
}
