package query

import (
	"cmp"
	"context"
	"database/sql"
	"flag"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/spectrum"
)

var update = flag.Bool("update", false, "rewrite the golden files")

// handGrid has ω = 4, 2, 1 and ½ rad/s exactly, so that PSV and PSA of a plain
// SD are plain.
var handGrid = db.Grid{PeriodsS: []float64{math.Pi / 2, math.Pi, 2 * math.Pi, 4 * math.Pi}, Dampings: []float64{0.02, 0.05}}

// inventedRecord is a record without meaning. All names are made up.
type inventedRecord struct {
	code, siting string
	event        *db.Event
	station      *db.Station
	distanceKM   *float64
	start        time.Time
	components   []inventedComponent
	// unrotated leaves out the spectra of the pair over all directions, which are
	// otherwise those of a component whose level is the geometric mean of both
	// for RotD50, and 1.25 times the larger for RotD100.
	unrotated bool
}

// inventedComponent has a stored SD of level·(period position + 1) at the first
// damping and half of that at the second. Its samples are a pulse that has
// nothing to do with the stored spectrum, so that a test sees which of both
// an answer is made of.
type inventedComponent struct {
	role  string
	level float64  // m
	stepS float64  // 0: 0.01
	peak  float64  // m/s² of the pulse; 0: 1
	axis  string   // "": by the role
	found []string // flags
	// left are the flags of the conditioned motion, nil of a component that was left as
	// it was delivered.
	left  []string
	lowHz float64 // corner of the high-pass filter; 0: 0.05
	// azimuthDeg is that of a horizontal, NaN where unknown; 0: by the role.
	azimuthDeg float64
	isShort    bool // ends with the pulse
	isTimed    bool // says when it starts: the pulse at noon, and it so many samples before
	ahead      int
}

func ptr[T any](x T) *T { return &x }

var (
	quakeA   = &db.Event{Code: "QA", Name: "Quake of Ardmoor", Magnitude: ptr(6.5), MagnitudeType: "Mw", DepthKM: ptr(9.0), Origin: time.Date(2024, 2, 3, 4, 5, 6, 0, time.UTC)}
	quakeB   = &db.Event{Code: "QB", Name: "Quake of Belwick", Magnitude: ptr(5.25), Origin: time.Date(2019, 12, 31, 23, 59, 59, 0, time.UTC)}
	quakeC   = &db.Event{Code: "QC"}
	stationA = &db.Station{Network: "ZX", Code: "AAA", Name: "Ardmoor Mill", Vs30MPS: ptr(310.0), LatitudeDeg: ptr(1.5), LongitudeDeg: ptr(-2.5)}
	stationB = &db.Station{Network: "ZX", Code: "BBB"}
)

func pair(h1, h2 float64) []inventedComponent {
	return []inventedComponent{{role: db.RoleH1, level: h1}, {role: db.RoleH2, level: h2}}
}

// handRecords have geometric means 0.04, 0.01 and 0.16 m at the first period and
// damping among the pairs of free-field records.
func handRecords() []inventedRecord {
	return []inventedRecord{
		{code: "R1", siting: "free-field", event: quakeA, station: stationA, distanceKM: ptr(12.5), components: append(pair(0.02, 0.08), inventedComponent{role: db.RoleV, level: 0.3})},
		{code: "R2", siting: "ground", event: quakeA, station: stationB, distanceKM: ptr(40.0), components: pair(0.01, 0.01)},
		{code: "R3", siting: "free-field", event: quakeC, station: stationA, start: time.Date(2021, 6, 1, 0, 0, 0, 0, time.UTC), components: pair(0.16, 0.16)},
		{code: "R4", siting: "free-field", event: quakeB, station: stationB, components: []inventedComponent{{role: db.RoleH1, level: 0.5}}},
		{code: "R5", siting: "structure", event: quakeB, station: stationA, components: pair(1, 2)},
		{code: "R6", siting: "borehole", event: quakeB, components: []inventedComponent{{role: db.RoleV, level: 0.7}}},
	}
}

func newStore(t testing.TB, grid db.Grid, records []inventedRecord) *db.Store {
	t.Helper()
	ctx := context.Background()
	store, err := db.Create(ctx, filepath.Join(t.TempDir(), "invented.db"), spectrum.Version)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := store.Close(); err != nil {
			t.Error(err)
		}
	})
	err = change(ctx, store, func(tx *db.Tx) error {
		run, err := tx.StartRun(ctx, "ingest", "test", time.Date(2026, 1, 2, 3, 4, 5, 0, time.UTC))
		if err != nil {
			return err
		}
		g, err := tx.PutGeneration(ctx, db.Recipe{Name: "as-delivered", Steps: condition.AsDelivered().Canonical()}, grid, spectrum.Version)
		if err != nil {
			return err
		}
		for _, r := range records {
			if err := r.put(ctx, tx, run, g); err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return store
}

// alter changes the store as another SQLite client would.
func alter(t *testing.T, store *db.Store, statement string, args ...any) {
	t.Helper()
	client, err := sql.Open("sqlite", store.Path())
	if err != nil {
		t.Fatal(err)
	}
	defer client.Close()
	if _, err := client.ExecContext(t.Context(), statement, args...); err != nil {
		t.Fatal(err)
	}
}

func (r inventedRecord) put(ctx context.Context, tx *db.Tx, run int64, g db.Generation) error {
	record, err := tx.PutRecord(ctx, db.Record{
		Code: r.code, Siting: r.siting, Event: r.event, Station: r.station, Distances: db.Distances{BestKM: r.distanceKM}, Start: r.start,
	}, false)
	if err != nil {
		return err
	}
	for _, c := range r.components {
		if err := c.put(ctx, tx, run, record.ID, r.code, g); err != nil {
			return err
		}
	}
	level := map[string]float64{}
	for _, c := range r.components {
		level[c.role] = c.level
	}
	a, isFirst := level[db.RoleH1]
	b, isSecond := level[db.RoleH2]
	if r.unrotated || !isFirst || !isSecond {
		return nil
	}
	median, maximum := inventedComponent{level: math.Sqrt(a * b)}, inventedComponent{level: 1.25 * max(a, b)}
	return tx.AddRotated(ctx, record.ID, g.ID, median.spectra(g.Grid), maximum.spectra(g.Grid))
}

func (c inventedComponent) put(ctx context.Context, tx *db.Tx, run, record int64, code string, g db.Generation) error {
	path := "invented/" + code + "." + c.role
	src, err := tx.AddSource(ctx, db.Source{Path: path, SHA256: fmt.Sprintf("%x", path), Format: "invented"}, run)
	if err != nil {
		return err
	}
	samples := c.samples()
	samples[len(samples)-1] += 1e-300 * float64(src) // no two components have the same inputs
	data, digest := db.EncodeSamples(samples, 1)
	component := db.Component{
		Role: c.role, Axis: "horizontal", Label: c.role, StepS: c.step(), Samples: len(samples), Unit: "m/s2", Processing: "corrected",
		LowCutHz: ptr(cmp.Or(c.lowHz, 0.05)), SourceID: src, SourceLine: 3,
	}
	switch {
	case c.role == db.RoleV:
		component.Axis = "vertical"
	case math.IsNaN(c.azimuthDeg):
	case c.azimuthDeg == 0 && c.role == db.RoleH2:
		component.AzimuthDeg = ptr(90.0)
	default:
		component.AzimuthDeg = ptr(c.azimuthDeg)
	}
	if c.isTimed {
		component.Start = time.Date(2026, 3, 12, 12, 0, 0, 0, time.UTC).Add(-time.Duration(float64(c.ahead) * c.step() * 1e9))
	}
	if c.axis != "" {
		component.Axis = c.axis
	}
	component.Findings = inventedFindings(c.found)
	return tx.AddComponent(ctx, record, component, data, digest, g.ID, new(c.spectra(g.Grid)))
}

func (c inventedComponent) step() float64 {
	if c.stepS == 0 {
		return 0.01
	}
	return c.stepS
}

// samples is one sine pulse of 0.5 s with 0.1 s of silence after it.
func (c inventedComponent) samples() []float64 {
	peak := c.peak
	if peak == 0 {
		peak = 1
	}
	seconds := 0.6
	if c.isShort {
		seconds = 0.5
	}
	out := make([]float64, int(math.Round(seconds/c.step())))
	for i := range out {
		if t := float64(i) * c.step(); t < 0.5 {
			out[i] = peak * math.Sin(2*math.Pi*t)
		}
	}
	return append(make([]float64, c.ahead), out...)
}

// spectra also sets PGA to level·g, PGV to level m/s and PGD to level m.
func (c inventedComponent) spectra(grid db.Grid) db.Spectra {
	var out [][]float64
	for d := range grid.Dampings {
		sd := make([]float64, len(grid.PeriodsS))
		for p := range sd {
			sd[p] = c.level * float64(p+1) / float64(d+1)
		}
		out = append(out, sd)
	}
	return db.NewSpectra(out, map[string]float64{
		db.MeasurePGA: c.level * StandardGravity, db.MeasurePGV: c.level, db.MeasurePGD: c.level,
	}, c.conditioning())
}

func (c inventedComponent) conditioning() *db.Conditioning {
	if c.left == nil {
		return nil
	}
	return &db.Conditioning{StepS: c.step(), Samples: len(c.samples()), Findings: inventedFindings(c.left)}
}

func inventedFindings(flags []string) (out []db.Finding) {
	for _, flag := range flags {
		out = append(out, db.Finding{Flag: flag, Value: 2, Bound: 1, Words: "invented"})
	}
	return out
}

// near allows rounding of a few operations.
func near(got, want float64) bool {
	if math.IsNaN(want) {
		return math.IsNaN(got)
	}
	return math.Abs(got-want) <= 1e-14*math.Abs(want)
}

// golden compares with the file of this name, or writes it.
func golden(t *testing.T, name string, got []byte) {
	t.Helper()
	path := filepath.Join("testdata", name)
	if *update {
		if err := os.WriteFile(path, got, 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if string(got) != string(want) {
		t.Errorf("%s differs; got\n%s\nwant\n%s", name, got, want)
	}
}

// change changes the store and publishes it, as a run does.
func change(ctx context.Context, store *db.Store, f func(*db.Tx) error) error {
	return store.Update(ctx, func(tx *db.Tx) error {
		if err := f(tx); err != nil {
			return err
		}
		g, ok, err := tx.Current(ctx)
		if err != nil || !ok {
			return err
		}
		run, err := tx.StartRun(ctx, "ingest", "test", time.Date(2026, 1, 2, 3, 4, 5, 0, time.UTC))
		if err != nil {
			return err
		}
		isNew, err := tx.PutEdition(ctx, run, g.ID)
		if err != nil || !isNew {
			return err
		}
		return tx.Publish(ctx, run)
	})
}
