package db

import (
	"bytes"
	"database/sql/driver"
	"fmt"

	"modernc.org/sqlite"
)

// tiledSpectra is SQL's tiled_spectra(place, motions, periods, sd): the spectra of all motions of a
// tile at one damping, period by period. What is given as NULL is lost.
type tiledSpectra struct{ data []byte }

func (s *tiledSpectra) Step(_ *sqlite.FunctionContext, args []driver.Value) error {
	var n [3]int
	for i := range n {
		x, _ := args[i].(int64)
		n[i] = int(x)
	}
	place, motions, periods := n[0], n[1], n[2]
	if place < 0 || place >= motions || motions > TileMotions || periods < 1 || periods > mostPeriods {
		return fmt.Errorf("spectrum %d of %d in a tile, of %d periods: a store holds 1 to %d", place+1, motions, periods, mostPeriods)
	}
	if s.data == nil {
		s.data = bytes.Repeat([]byte{0xff}, OrdinateWidth*motions*periods)
	}
	if sd, ok := args[3].([]byte); ok {
		for p := range periods {
			copy(s.data[OrdinateWidth*(p*motions+place):], sd[OrdinateWidth*p:OrdinateWidth*(p+1)])
		}
	}
	return nil
}

// WindowInverse is for windows, of which there are none.
func (s *tiledSpectra) WindowInverse(*sqlite.FunctionContext, []driver.Value) error {
	return fmt.Errorf("tiled_spectra of a window")
}

// WindowValue returns the spectra.
func (s *tiledSpectra) WindowValue(*sqlite.FunctionContext) (driver.Value, error) { return s.data, nil }

// Final has nothing to release.
func (s *tiledSpectra) Final(*sqlite.FunctionContext) {}

// SQL makes tiles by tiled_spectra, in one migration.
func init() {
	sqlite.MustRegisterFunction("tiled_spectra", &sqlite.FunctionImpl{NArgs: 4, Deterministic: true, VolatileArgs: true,
		MakeAggregate: func(sqlite.FunctionContext) (sqlite.AggregateFunction, error) { return &tiledSpectra{}, nil }})
}
