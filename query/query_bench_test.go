package query

import (
	"context"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// benchStore holds invented pairs on the default grid: spectra of random
// numbers, also over all directions, and samples samples of noise each.
func benchStore(b *testing.B, components, samples int) *db.Store {
	b.Helper()
	grid := db.Grid(spectrum.DefaultGrid())
	rng := rand.New(rand.NewPCG(20260312, 1))
	store := newStore(b, grid, nil)
	ctx := context.Background()
	err := change(ctx, store, func(tx *db.Tx) error {
		g, _, err := tx.Current(ctx)
		if err != nil {
			return err
		}
		for i := range components / 2 {
			event := &db.Event{Code: fmt.Sprintf("Q%d", i%12), Magnitude: ptr(5 + float64(i%20)/10)}
			record, err := tx.PutRecord(ctx, db.Record{Code: fmt.Sprintf("R%05d", i), Siting: "ground", Event: event, Distances: db.Distances{BestKM: ptr(float64(i % 100))}}, false)
			if err != nil {
				return err
			}
			for _, role := range []string{db.RoleH1, db.RoleH2} {
				if err := putRandom(ctx, tx, rng, record.ID, role, samples, g); err != nil {
					return err
				}
			}
			if err := tx.AddRotated(ctx, record.ID, g.ID, randomSpectra(rng, g.Grid), randomSpectra(rng, g.Grid)); err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		b.Fatal(err)
	}
	return store
}

func putRandom(ctx context.Context, tx *db.Tx, rng *rand.Rand, record int64, role string, n int, g db.Generation) error {
	name := fmt.Sprintf("%d%s", record, role)
	src, err := tx.AddSource(ctx, db.Source{Path: name, SHA256: name, Format: "invented"}, 1)
	if err != nil {
		return err
	}
	samples := make([]float64, n)
	for i := range samples {
		samples[i] = math.Round(1e6*rng.NormFloat64()) / 1e6
	}
	data, digest := db.EncodeSamples(samples, 1)
	c := db.Component{Role: role, Axis: "horizontal", StepS: 0.01, Samples: n, SourceID: src}
	return tx.AddComponent(ctx, record, c, data, digest, g.ID, new(randomSpectra(rng, g.Grid)))
}

func randomSpectra(rng *rand.Rand, grid db.Grid) db.Spectra {
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

// BenchmarkSpectrum asks for 251 periods of 3000 stored components.
func BenchmarkSpectrum(b *testing.B) {
	store := benchStore(b, 3000, 50)
	for _, component := range []Component{ComponentEach, ComponentRotD50, ComponentGeomean} {
		b.Run(string(component), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				q := SpectrumQuestion{Selection: Selection{Component: component, Where: "magnitude > 1"}, Damping: 0.05}
				if _, err := q.Ask(b.Context(), store); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(3000*float64(b.N)/b.Elapsed().Seconds(), "components/s")
		})
	}
}

// BenchmarkDemandOnGrid asks for one period of the grid of 3000 stored
// components, which takes one ordinate of each spectrum.
func BenchmarkDemandOnGrid(b *testing.B) {
	store := benchStore(b, 3000, 50)
	for _, component := range []Component{ComponentEach, ComponentRotD50} {
		b.Run(string(component), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				q := DemandQuestion{Selection: Selection{Component: component}, Structure: Structure{PeriodS: 1, Damping: 0.05}}
				if _, err := q.Ask(b.Context(), store); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(3000*float64(b.N)/b.Elapsed().Seconds(), "components/s")
		})
	}
}

// BenchmarkReduce is the share of BenchmarkSpectrum without the store.
func BenchmarkReduce(b *testing.B) {
	const n = 3000
	rng := rand.New(rand.NewPCG(1, 1))
	grid := spectrum.DefaultGrid()
	motions := make([]motion, n)
	o := newOrdinates(dampedBy(0.05, grid.PeriodsS), n)
	for i := range motions {
		motions[i] = motion{members: []*db.HeldComponent{{}}}
	}
	for i := range o.sd {
		o.sd[i] = rng.ExpFloat64()
	}
	q := SpectrumQuestion{Measure: MeasurePSA, Percentiles: DefaultPercentiles()}
	for b.Loop() {
		if _, err := q.reduceAll(b.Context(), o, sample{motions: motions, at: upTo(len(motions))}); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkDemandOffGrid asks for one period off the grid of 300 components of
// 8000 samples, each by itself and over all directions: another period each time, or one
// that is kept.
func BenchmarkDemandOffGrid(b *testing.B) {
	store := benchStore(b, 300, 8000)
	another := 1.2345
	for name, step := range map[string]float64{"computed": 1e-6, "kept": 0} {
		for _, component := range []Component{ComponentEach, ComponentRotD50} {
			b.Run(name+"/"+string(component), func(b *testing.B) {
				for b.Loop() {
					another += step
					q := DemandQuestion{Selection: Selection{Component: component}, Structure: Structure{PeriodS: another, Damping: 0.02}}
					if _, err := q.Ask(b.Context(), store); err != nil {
						b.Fatal(err)
					}
				}
				b.ReportMetric(300*float64(b.N)/b.Elapsed().Seconds(), "components/s")
			})
		}
	}
}

// BenchmarkExport writes 251 periods and five dampings of 1000 components.
func BenchmarkExport(b *testing.B) {
	store := benchStore(b, 1000, 50)
	rows := 0
	for b.Loop() {
		summary, err := ExportQuestion{}.Write(b.Context(), store, io.Discard)
		if err != nil {
			b.Fatal(err)
		}
		rows = summary.Rows
	}
	b.ReportMetric(float64(rows)*float64(b.N)/b.Elapsed().Seconds(), "rows/s")
}

// BenchmarkDataset writes the same as Parquet.
func BenchmarkDataset(b *testing.B) {
	store := benchStore(b, 1000, 50)
	rows, dir := 0, b.TempDir()
	for b.Loop() {
		folder, err := os.MkdirTemp(dir, "")
		if err != nil {
			b.Fatal(err)
		}
		summary, err := DatasetQuestion{}.Write(b.Context(), store, folder)
		if err != nil {
			b.Fatal(err)
		}
		if rows = summary.Ordinates; os.RemoveAll(folder) != nil {
			b.Fatal("folder stays")
		}
	}
	b.ReportMetric(float64(rows)*float64(b.N)/b.Elapsed().Seconds(), "rows/s")
}
