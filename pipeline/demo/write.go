package demo

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"runtime"

	"golang.org/x/sync/errgroup"
)

// The size of the region where Options leave it open, all of it with names, and
// the limit of both numbers, which keeps codes within the width that the formats
// have for them.
const (
	DefaultEvents   = 12
	DefaultStations = 20
	MaxCount        = 999
)

// Options say what Write makes. The zero value is the region as built in, with
// seed 0 and without damaged files.
type Options struct {
	Events   int  // earthquakes; 0 means DefaultEvents
	Stations int  // 0 means DefaultStations
	Seed     int  // of all random numbers
	Damaged  bool // add a folder of damaged files
}

// Summary says what Write wrote.
type Summary struct {
	Events, Stations int
	Records          int   // pairs of event and station, those of roof and borehole besides
	Channels         int   // components of all records
	Files            int   // record files, the damaged ones not counted
	Damaged          int   // damaged files
	Bytes            int64 // of all files, catalogue and README included
	Catalogue        string
}

// ErrNotEmpty says that the folder to write to holds something else already.
var ErrNotEmpty = errors.New("the folder holds something else; choose another or empty it")

// Write makes the invented region's records in the folder dir, which is created
// if need be and must be empty: a folder for each network, catalogue.csv,
// README.txt and, if asked for, the folder damaged. Every event is recorded by
// every station. What is written depends on the options alone.
//
// Errors are of the options, ErrNotEmpty, or of the file system; after an error
// the folder may hold some of the files.
func Write(dir string, opts Options) (Summary, error) {
	opts, err := opts.complete()
	if err != nil {
		return Summary{}, err
	}
	if err := prepare(dir, opts); err != nil {
		return Summary{}, err
	}
	w := writer{dir: dir, seed: int64(opts.Seed), events: events(opts.Events, int64(opts.Seed)), stations: stations(opts.Stations, int64(opts.Seed))}
	sum, err := w.records()
	if err != nil {
		return Summary{}, err
	}
	sum.Events, sum.Stations = opts.Events, opts.Stations
	if opts.Damaged {
		if err := w.damaged(&sum); err != nil {
			return Summary{}, err
		}
	}
	return sum, w.texts(&sum)
}

// complete fills in the defaults and checks the counts.
func (o Options) complete() (Options, error) {
	for _, c := range []struct {
		name   string
		count  *int
		open   int
		plural string
	}{{"events", &o.Events, DefaultEvents, "earthquakes"}, {"stations", &o.Stations, DefaultStations, "stations"}} {
		if *c.count == 0 {
			*c.count = c.open
		}
		if *c.count < 0 || *c.count > MaxCount {
			return o, fmt.Errorf("%s: %d %s; 1 to %d can be made", c.name, *c.count, c.plural, MaxCount)
		}
	}
	return o, nil
}

// prepare makes sure that dir exists and is empty, or holds the files of the
// same options, which are then written again.
func prepare(dir string, opts Options) error {
	if err := os.MkdirAll(dir, 0o777); err != nil {
		return fmt.Errorf("create demo folder: %w", err)
	}
	entries, err := os.ReadDir(dir)
	if err != nil {
		return fmt.Errorf("read demo folder: %w", err)
	}
	earlier, err := os.ReadFile(filepath.Join(dir, readmeName))
	if err == nil && bytes.Contains(earlier, []byte(signature(opts))) {
		return nil
	}
	if len(entries) > 0 {
		return fmt.Errorf("write demo to %s: %w", dir, ErrNotEmpty)
	}
	return nil
}

// writer writes the files of one call.
type writer struct {
	dir      string
	seed     int64
	events   []event
	stations []station
}

// records simulates and writes all records. Each pair of event and station has
// its own random numbers and its own place in the results, so that the order of
// the work does not show.
func (w *writer) records() (Summary, error) {
	for i := range min(len(networks), len(w.stations)) {
		if err := os.MkdirAll(filepath.Join(w.dir, w.stations[i].network.folder), 0o777); err != nil {
			return Summary{}, fmt.Errorf("create network folder: %w", err)
		}
	}
	parts := make([]Summary, len(w.events)*len(w.stations))
	group, ctx := errgroup.WithContext(context.Background())
	group.SetLimit(runtime.GOMAXPROCS(0))
	for pair := range parts {
		if ctx.Err() != nil { // a file could not be written: the rest need not be tried
			break
		}
		group.Go(func() (err error) {
			parts[pair], err = w.pair(pair/len(w.stations), pair%len(w.stations))
			return err
		})
	}
	if err := group.Wait(); err != nil {
		return Summary{}, err
	}
	var sum Summary
	for _, p := range parts {
		sum.Records += p.Records
		sum.Channels += p.Channels
		sum.Files += p.Files
		sum.Bytes += p.Bytes
	}
	return sum, nil
}

// pair writes what one station recorded of one event.
func (w *writer) pair(event, station int) (Summary, error) {
	var sum Summary
	for _, r := range w.simulate(event, station) {
		sum.Records++
		sum.Channels += len(r.columns())
		for _, f := range r.station.network.encode(r) {
			if err := w.file(filepath.Join(r.station.network.folder, f.name), f.data, &sum); err != nil {
				return sum, err
			}
			sum.Files++
		}
	}
	return sum, nil
}

// simulate makes the records of one pair.
func (w *writer) simulate(event, station int) []*record {
	sequence := sequenceRecords + uint64(event)*(MaxCount+1) + uint64(station)
	return simulate(&w.events[event], &w.stations[station], generator(w.seed, sequence))
}

// file writes one file and adds its size to the sum.
func (w *writer) file(name string, data []byte, sum *Summary) error {
	if err := os.WriteFile(filepath.Join(w.dir, name), data, 0o666); err != nil {
		return fmt.Errorf("write demo file: %w", err)
	}
	sum.Bytes += int64(len(data))
	return nil
}

// damaged writes two files that no reader may accept: one cut off in its
// samples, one of which the unit is no acceleration.
func (w *writer) damaged(sum *Summary) error {
	if err := os.MkdirAll(filepath.Join(w.dir, "damaged"), 0o777); err != nil {
		return fmt.Errorf("create folder: %w", err)
	}
	// The last station built in is there whatever the number of stations.
	built := writer{seed: w.seed, events: w.events, stations: builtInStations()}
	r := built.simulate(0, len(built.stations)-1)[0]
	c := r.columns()[0]
	whole := at2File(r, c, "000")
	cut := bytes.LastIndexByte(whole[:len(whole)*3/5], '\n') + 1
	for _, f := range []file{
		{"truncated.AT2", whole[:cut]},
		{"unknown-unit.csv", plainFile(r, c, "V")},
	} {
		if err := w.file(filepath.Join("damaged", f.name), f.data, sum); err != nil {
			return err
		}
		sum.Damaged++
	}
	return nil
}

// texts writes catalogue and README.
func (w *writer) texts(sum *Summary) error {
	table, err := catalogue(w.events, w.stations)
	if err != nil {
		return fmt.Errorf("write catalogue: %w", err)
	}
	sum.Catalogue = filepath.Join(w.dir, "catalogue.csv")
	if err := w.file("catalogue.csv", table, sum); err != nil {
		return err
	}
	return w.file(readmeName, readme(w.seed, sum), sum)
}
