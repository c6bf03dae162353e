package pipeline

import (
	"context"
	"fmt"
	"path/filepath"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// BenchmarkWriter stores components of 8000 samples and the default grid in
// batches, which is all that cannot be shared out among workers.
func BenchmarkWriter(b *testing.B) {
	const files = 2 * batchWeight
	dir := b.TempDir()
	var found []item
	for i := range files {
		name := fmt.Sprintf("%03d.AT2", i)
		put(b, dir, name, at2Of("Invented", fmt.Sprintf("Site %d", i/3), []string{"000", "090", "UP"}[i%3], 0.005, 8000, uint64(i)))
		found = append(found, item{Found: ingest.Found{Path: filepath.Join(dir, name), Rel: name}, stem: stemOf(name)})
	}
	opts := withDefaults(Options{Program: "benchmark", Started: time.Now(), Clock: time.Now})
	var results []result
	for b.Loop() {
		b.StopTimer()
		store, err := db.Create(b.Context(), filepath.Join(b.TempDir(), "store.db"), SolverVersion)
		if err != nil {
			b.Fatal(err)
		}
		run, err := begin(b.Context(), store, opts)
		if err != nil {
			b.Fatal(err)
		}
		for i := len(results); i < files; i++ {
			res, err := run.reader.process(b.Context(), found[i])
			if err != nil || res.outcome != Stored {
				b.Fatal(res.outcome, res.err, err)
			}
			results = append(results, res)
		}
		w := newWriter(store, run, opts, newSource(nil, withDefaults(options())))
		b.StartTimer()
		for at := 0; at < files; at += batchWeight {
			if err := w.storeBatch(context.WithoutCancel(b.Context()), results[at:at+batchWeight]); err != nil {
				b.Fatal(err)
			}
		}
		b.StopTimer()
		if err := store.Close(); err != nil {
			b.Fatal(err)
		}
		b.StartTimer()
	}
	b.ReportMetric(float64(files*b.N)/b.Elapsed().Seconds(), "components/s")
}
