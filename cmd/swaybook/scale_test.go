//go:build linux

package main

import (
	"bytes"
	"database/sql"
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"syscall"
	"testing"
	"time"
)

var (
	scaleTo     = flag.Int("scale", 0, "components of TestScale, 0 for none; it measures and prints, and holds equal digests only")
	scaleShards = flag.Int("scale-shards", 8, "shards of TestScale")
	scaleKeep   = flag.String("scale-keep", "", "empty folder in which TestScale leaves its files and stores")
	scaleWhole  = flag.Bool("scale-whole", false, "have TestScale ingest all at once, too, to compare the digests")
)

// Samples of the components of TestScale, and their step in s.
const (
	scaleSamples = 1000
	scaleStepS   = "0.0200"
)

// TestScale invents so many short components, in records of three, of fifty stations an
// earthquake, ingests them in shards one after the other, combines these, asks, and prints how
// long that took, the greatest memory of a process, and what a store takes.
func TestScale(t *testing.T) {
	if *scaleTo == 0 {
		t.Skip("give -scale N to measure N components")
	}
	dir := *scaleKeep
	if dir == "" {
		dir = t.TempDir()
	}
	inventComponents(t, filepath.Join(dir, "records"), *scaleTo)
	m := measurements{t: t, dir: dir}
	records := "records"
	out := filepath.Join(dir, "all.db")
	var shards []string
	for i := range *scaleShards {
		store := fmt.Sprintf("part-%d.db", i+1)
		m.command("ingest", "--store", store, "ingest", records, "--shard", fmt.Sprintf("%d/%d", i+1, *scaleShards))
		shards = append(shards, store)
	}
	m.command("combine", append([]string{"combine", "all.db"}, shards...)...)
	m.command("combine again", append([]string{"combine", "all.db"}, shards...)...)
	m.command("spectrum", "--store", "all.db", "query", "spectrum")
	m.command("spectrum rotd50", "--store", "all.db", "query", "spectrum", "--component", "rotd50")
	m.command("demand at 1 s", "--store", "all.db", "query", "demand", "--period", "1s", "--damping", "5%", "--weight", "640kN")
	m.command("records", "--store", "all.db", "query", "records", "--format", "csv")
	m.command("digest", "--store", "all.db", "verify", "--digest")
	if *scaleWhole {
		m.command("ingest at once", "--store", "whole.db", "ingest", records)
		if got, want := digestOfStore(t, out), digestOfStore(t, filepath.Join(dir, "whole.db")); got != want {
			t.Errorf("combined digest %s, want %s", got, want)
		}
	}
	m.print(out)
}

// inventComponents writes shaped noise as .AT2 files.
func inventComponents(t *testing.T, dir string, components int) {
	t.Helper()
	for i := range components {
		record := i / 3
		event, station, component := record/50, record%50, [...]string{"000", "090", "UP"}[i%3]
		folder := filepath.Join(dir, fmt.Sprintf("E%05d", event))
		if i%150 == 0 {
			if err := os.MkdirAll(folder, 0o777); err != nil {
				t.Fatal(err)
			}
		}
		var b bytes.Buffer
		fmt.Fprintf(&b, "INVENTED RECORD\nMade-up %d, 3/12/2026, Site %d, %s\nACCELERATION TIME SERIES IN UNITS OF G\nNPTS=  %d, DT=   %s SEC\n", event, station, component, scaleSamples, scaleStepS)
		rng := rand.New(rand.NewPCG(uint64(i), 9))
		line := make([]byte, 0, 16)
		for n := range scaleSamples {
			shape := float64(n) / 200 * math.Exp(1-float64(n)/200)
			line = strconv.AppendFloat(line[:0], 0.1*shape*rng.NormFloat64(), 'E', 7, 64)
			fmt.Fprintf(&b, "%15s", line)
			if n%5 == 4 {
				b.WriteByte('\n')
			}
		}
		if err := os.WriteFile(filepath.Join(folder, fmt.Sprintf("ST%02d-%s.AT2", station, component)), b.Bytes(), 0o666); err != nil {
			t.Fatal(err)
		}
	}
}

// measurements are what commands took, those of one name together.
type measurements struct {
	t     *testing.T
	dir   string
	names []string
	took  map[string]*measured
}

type measured struct {
	wall, cpu time.Duration
	peakKB    int64
}

func (m *measurements) command(name string, args ...string) {
	m.t.Helper()
	cmd := exec.Command("swaybook", append([]string{"--quiet"}, args...)...)
	cmd.Dir = m.dir
	var stderr bytes.Buffer
	cmd.Stderr = &stderr
	began := time.Now()
	if err := cmd.Run(); err != nil {
		m.t.Fatalf("%v: %v: %s", args, err, &stderr)
	}
	if m.took == nil {
		m.took = map[string]*measured{}
	}
	if m.took[name] == nil {
		m.names = append(m.names, name)
		m.took[name] = &measured{}
	}
	one := m.took[name]
	one.wall += time.Since(began)
	one.cpu += cmd.ProcessState.UserTime() + cmd.ProcessState.SystemTime()
	one.peakKB = max(one.peakKB, cmd.ProcessState.SysUsage().(*syscall.Rusage).Maxrss)
}

// lines prints a line a command.
func (m *measurements) lines() {
	m.t.Helper()
	for _, name := range m.names {
		one := m.took[name]
		m.t.Logf("%-16s %9.2f s  processor %9.2f s  peak %6.1f MB", name, one.wall.Seconds(), one.cpu.Seconds(), float64(one.peakKB)/1024)
	}
}

func (m *measurements) print(store string) {
	m.t.Helper()
	m.t.Logf("%d components of %d samples, %d shards", *scaleTo, scaleSamples, *scaleShards)
	m.lines()
	info, err := os.Stat(store)
	if err != nil {
		m.t.Fatal(err)
	}
	raw, err := sql.Open("sqlite", "file:"+store+"?mode=ro")
	if err != nil {
		m.t.Fatal(err)
	}
	defer raw.Close()
	var spectra, ordinates, spectraBytes, samples, seriesBytes float64
	err = raw.QueryRow(`SELECT (SELECT count(*) FROM spectrum), (SELECT (SELECT count(*) FROM grid_damping) * count(*) FROM grid_period), (SELECT sum(length(sd_m)) FROM tile_part), (SELECT sum(samples) FROM edition_component), (SELECT sum(length(data)) FROM series)`).
		Scan(&spectra, &ordinates, &spectraBytes, &samples, &seriesBytes)
	if err != nil {
		m.t.Fatal(err)
	}
	ordinates *= spectra
	m.t.Logf("store %.0f MB: %.2f bytes an ordinate, of which spectra %.2f; samples %.2f bytes each", float64(info.Size())/1e6,
		(float64(info.Size())-seriesBytes)/ordinates, spectraBytes/ordinates, seriesBytes/samples)
}
