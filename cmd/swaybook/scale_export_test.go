//go:build linux

package main

import (
	"context"
	"flag"
	"fmt"
	"io/fs"
	"math"
	"math/rand/v2"
	"path/filepath"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/spectrum"
)

var scaleExport = flag.Int("scale-export", 0, "records of TestScaleExport, of 5020 ordinates each on the usual grid, 0 for none; it measures and prints")

// TestScaleExport invents a store of so many pairs, with spectra of random numbers, exports it as
// Parquet and prints how long that took and the greatest memory.
func TestScaleExport(t *testing.T) {
	if *scaleExport == 0 {
		t.Skip("give -scale-export N to measure N records")
	}
	m := measurements{t: t, dir: t.TempDir()}
	ordinates := inventStore(t, filepath.Join(m.dir, "s.db"), *scaleExport)
	m.command("export parquet", "--store", "s.db", "export", "parquet", "out")
	m.lines()
	var files int
	var bytes int64
	err := filepath.WalkDir(filepath.Join(m.dir, "out"), func(_ string, e fs.DirEntry, err error) error {
		if err != nil || e.IsDir() {
			return err
		}
		info, err := e.Info()
		if err == nil {
			files, bytes = files+1, bytes+info.Size()
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("%d ordinates, %.2f million a second; %d files, %.1f bytes an ordinate", ordinates,
		float64(ordinates)/1e6/m.took["export parquet"].wall.Seconds(), files, float64(bytes)/float64(ordinates))
}

// inventStore makes a store of pairs, with what is over all directions, and returns the number of
// its ordinates.
func inventStore(t *testing.T, path string, records int) (ordinates int) {
	t.Helper()
	ctx := t.Context()
	store, err := db.Create(ctx, path, pipeline.SolverVersion)
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	change := func(f func(tx *db.Tx) error) {
		t.Helper()
		if err := store.Update(ctx, f); err != nil {
			t.Fatal(err)
		}
	}
	var run int64
	var g db.Generation
	change(func(tx *db.Tx) (err error) {
		if run, err = tx.StartRun(ctx, "ingest", "test", time.Date(2026, 1, 2, 3, 4, 5, 0, time.UTC)); err != nil {
			return err
		}
		g, err = tx.PutGeneration(ctx, db.Recipe{Name: "as-delivered", Steps: condition.AsDelivered().Canonical()}, db.Grid(spectrum.DefaultGrid()), pipeline.SolverVersion)
		return err
	})
	rng := rand.New(rand.NewPCG(20260312, 2))
	const atATime = 100
	for from := 0; from < records; from += atATime {
		change(func(tx *db.Tx) error {
			for i := from; i < min(from+atATime, records); i++ {
				if err := inventPair(ctx, tx, rng, i, g); err != nil {
					return err
				}
			}
			return nil
		})
	}
	change(func(tx *db.Tx) error {
		if _, err := tx.PutEdition(ctx, run, g.ID); err != nil {
			return err
		}
		return tx.Publish(ctx, run)
	})
	return records * 4 * len(g.Grid.Dampings) * len(g.Grid.PeriodsS)
}

func inventPair(ctx context.Context, tx *db.Tx, rng *rand.Rand, i int, g db.Generation) error {
	event := &db.Event{Code: fmt.Sprintf("Q%d", i/50), Magnitude: new(5 + float64(i%20)/10)}
	record, err := tx.PutRecord(ctx, db.Record{
		Code: fmt.Sprintf("R%07d", i*7919%10_000_000), Siting: "ground", Event: event, Distances: db.Distances{BestKM: new(float64(i % 100))}, // in another order than that of ids
	}, false)
	if err != nil {
		return err
	}
	for _, role := range []string{db.RoleH1, db.RoleH2} {
		name := fmt.Sprintf("%d%s", i, role)
		source, err := tx.AddSource(ctx, db.Source{Path: name, SHA256: name, Format: "invented"}, 1)
		if err != nil {
			return err
		}
		data, digest := db.EncodeSamples([]float64{0, rng.Float64(), 0}, 1)
		c := db.Component{Role: role, Axis: "horizontal", StepS: 0.01, Samples: 3, SourceID: source}
		if err := tx.AddComponent(ctx, record.ID, c, data, digest, g.ID, new(inventSpectra(rng, g.Grid))); err != nil {
			return err
		}
	}
	return tx.AddRotated(ctx, record.ID, g.ID, inventSpectra(rng, g.Grid), inventSpectra(rng, g.Grid))
}

func inventSpectra(rng *rand.Rand, grid db.Grid) db.Spectra {
	var computed [][]float64
	for range grid.Dampings {
		sd := make([]float64, len(grid.PeriodsS))
		for p, t := range grid.PeriodsS {
			sd[p] = t * t * math.Exp(rng.NormFloat64()) / 40
		}
		computed = append(computed, sd)
	}
	return db.NewSpectra(computed, map[string]float64{db.MeasurePGA: 1, db.MeasurePGV: 0.1, db.MeasurePGD: 0.01}, nil)
}
