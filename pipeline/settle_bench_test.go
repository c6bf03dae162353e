package pipeline

import (
	"fmt"
	"math/rand/v2"
	"path/filepath"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// BenchmarkSettle stores and settles records of invented earthquakes without codes, at
// four stations each, in batches of 64: spread over years, in a swarm with one each 20 s,
// or one recorded at all stations of a network. It reports the time a record in the
// first and in the last tenth, which should not differ by much.
func BenchmarkSettle(b *testing.B) {
	for _, test := range []struct {
		name             string
		events, stations int
		every            time.Duration
	}{
		{"events=500", 500, 4, 11 * time.Hour},
		{"events=5000", 5000, 4, 11 * time.Hour},
		{"swarm=5000", 5000, 4, 20 * time.Second},
		{"stations=5000", 1, 5000, 0},
	} {
		b.Run(test.name, func(b *testing.B) {
			for b.Loop() {
				rng := rand.New(rand.NewPCG(9, 9))
				var files []inventedAccount
				for i := range test.events {
					e := ingest.Event{Origin: quakeTime.Add(time.Duration(i)*test.every + time.Duration(rng.IntN(5000))*time.Millisecond),
						Latitude: ingest.Known(40 + rng.Float64()), Longitude: ingest.Known(14 + rng.Float64()),
						Magnitude: ingest.Known(4 + 2*rng.Float64())}
					for j := range test.stations {
						s := ingest.Station{Network: "XX", Code: fmt.Sprintf("S%d", j), Latitude: ingest.Known(41 + 0.0001*float64(j)), Longitude: ingest.Known(15)}
						files = append(files, header("", fmt.Sprintf("%d-%d", i, j), e, s))
					}
				}
				first, last := settleAll(b, files)
				b.ReportMetric(first, "first-µs/record")
				b.ReportMetric(last, "last-µs/record")
			}
		})
	}
}

// settleAll stores and settles the files in batches and returns the microseconds that a
// record took in the first and in the last tenth of them.
func settleAll(b *testing.B, files []inventedAccount) (first, last float64) {
	b.Helper()
	store, err := db.Create(b.Context(), filepath.Join(b.TempDir(), "store.db"), SolverVersion)
	if err != nil {
		b.Fatal(err)
	}
	defer store.Close()
	known := map[db.Statement]string{}
	tenth, began := len(files)/10/64, time.Now()
	batches := (len(files) + 63) / 64
	for n := range batches {
		if n == batches-tenth {
			began = time.Now()
		}
		part := files[64*n : min(64*(n+1), len(files))]
		err := change(b.Context(), store, func(tx *db.Tx) error {
			g, err := settleGeneration(b.Context(), tx, testGrid, nil)
			if err != nil {
				return err
			}
			s := newSettler(tx, known, nil)
			for _, a := range part {
				if err := s.distinguish(b.Context(), &a.account.channel, nil); err != nil {
					return err
				}
				a.code, _ = ingest.RecordID(&a.account.channel, "")
				if err := a.put(b.Context(), tx, s, g); err != nil {
					return err
				}
			}
			return s.settle(b.Context())
		})
		if err != nil {
			b.Fatal(err)
		}
		if n == tenth-1 {
			first = float64(time.Since(began).Microseconds()) / float64(64*tenth)
		}
	}
	return first, float64(time.Since(began).Microseconds()) / float64(len(files)-64*(batches-tenth))
}
