package db

import (
	"context"
	"database/sql"
	"fmt"
	"maps"
	"slices"
)

// Spectra checks that every computation that has not failed has spectra in a place of a tile, and
// that tiles have all of their parts, as they were stored. What is not is named with those whose
// spectra are in it.
func (i *Inspection) Spectra(ctx context.Context) error {
	if err := i.placesOfSpectra(ctx); err != nil {
		return err
	}
	tiles, err := i.inspectedTiles(ctx)
	if err != nil {
		return err
	}
	type row struct {
		id, seal int64
		data     sql.RawBytes
	}
	err = look(ctx, i, "tile_part", `SELECT id, crc32c, sd_m FROM tile_part ORDER BY id`, nil, func(v *row) []any { return []any{&v.id, &v.seal, &v.data} }, func(v *row) {
		id, damping, part := partOf(v.id)
		if t := tiles[id]; t != nil && !t.take(damping, part, v.seal, v.data) {
			i.found(Fault{Table: "tile_part", Text: fmt.Sprintf("tile %d has a part %d of damping %d, which the grid does not have", id, part+1, damping+1)})
		}
	})
	for _, id := range slices.Sorted(maps.Keys(tiles)) {
		if err == nil {
			err = i.damagedIn(ctx, tiles[id])
		}
	}
	return err
}

// placesOfSpectra reports computations whose spectra are nowhere, or nobody knows where.
func (i *Inspection) placesOfSpectra(ctx context.Context) error {
	type row struct {
		id    int64
		isRow bool
	}
	var nowhere []row
	err := look(ctx, i, "spectrum", `SELECT x.id, s.computation_id IS NOT NULL FROM computation x LEFT JOIN spectrum s ON s.computation_id = x.id LEFT JOIN tile t ON t.id = s.tile_id
		WHERE x.failure IS NULL AND `+isPlaced+` IS NOT TRUE ORDER BY x.id`, nil,
		func(v *row) []any { return []any{&v.id, &v.isRow} }, func(v *row) { nowhere = append(nowhere, *v) })
	for _, v := range nowhere {
		text := "has no spectra"
		if v.isRow {
			text = "where its spectra are is not what was stored; questions leave them out"
		}
		i.found(i.Of(ctx, InspectedComputation{ID: v.id}, "spectrum", text))
	}
	return err
}

// inspectedTile is what of a tile was found whole.
type inspectedTile struct {
	id                         int64
	motions, dampings, periods int
	isWhole                    []bool // by damping and part
	// lost are the periods, counted from 1, of which an ordinate was lost before it came into the
	// tile, by damping and place.
	lost map[[2]int][]int64
}

// inspectedTiles are the tiles of which somebody has spectra, by their ids, as far as their motions
// are what was stored.
func (i *Inspection) inspectedTiles(ctx context.Context) (map[int64]*inspectedTile, error) {
	out := map[int64]*inspectedTile{}
	err := look(ctx, i, "tile", `SELECT t.id, t.motions, (SELECT count(*) FROM grid_damping d WHERE d.grid_id = g.grid_id), (SELECT count(*) FROM grid_period p WHERE p.grid_id = g.grid_id)
		FROM tile t JOIN (SELECT s.tile_id, min(x.generation_id) AS generation_id FROM spectrum s JOIN computation x ON x.id = s.computation_id GROUP BY s.tile_id) o ON o.tile_id = t.id
		JOIN generation g ON g.id = o.generation_id WHERE `+isSealedTile, nil,
		func(t *inspectedTile) []any { return []any{&t.id, &t.motions, &t.dampings, &t.periods} }, func(t *inspectedTile) {
			t.dampings, t.periods = min(t.dampings, mostDampings), min(t.periods, mostPeriods)
			t.isWhole = make([]bool, t.dampings*partsOf(t.periods))
			out[t.id] = t
		})
	return out, err
}

// take looks at a part, and reports whether the tile can have it.
func (t *inspectedTile) take(damping, part int, seal int64, data []byte) bool {
	if damping >= t.dampings || part >= partsOf(t.periods) {
		return false
	}
	of := partSpan(part, t.periods)
	t.isWhole[damping*partsOf(t.periods)+part] = len(data) == OrdinateWidth*t.motions*(of.To-of.From) && sealOf(data) == seal
	if !hasLost(data[:len(data)/OrdinateWidth*OrdinateWidth]) || t.motions < 1 {
		return true
	}
	if t.lost == nil {
		t.lost = map[[2]int][]int64{}
	}
	for k := 0; OrdinateWidth*(k+1) <= len(data); k++ {
		if hasLost(data[OrdinateWidth*k : OrdinateWidth*(k+1)]) {
			key := [2]int{damping, k % t.motions}
			t.lost[key] = append(t.lost[key], int64(of.From+k/t.motions+1))
		}
	}
	return true
}

// damagedIn reports what is damaged of those who have spectra in a tile, damping by damping.
func (i *Inspection) damagedIn(ctx context.Context, t *inspectedTile) error {
	parts := partsOf(t.periods)
	damaged := make([][]int64, t.dampings)
	isWhole := len(t.lost) == 0
	for k, ok := range t.isWhole {
		if of := partSpan(k%parts, t.periods); !ok {
			isWhole = false
			for p := of.From; p < of.To; p++ {
				damaged[k/parts] = append(damaged[k/parts], int64(p+1))
			}
		}
	}
	if isWhole {
		return nil
	}
	type row struct {
		computation int64
		place       int
	}
	var rows []row
	err := look(ctx, i, "spectrum", `SELECT computation_id, place FROM spectrum WHERE tile_id = ? ORDER BY place`, []any{t.id},
		func(v *row) []any { return []any{&v.computation, &v.place} }, func(v *row) { rows = append(rows, *v) })
	for _, v := range rows {
		for damping := range t.dampings {
			of := slices.Concat(damaged[damping], t.lost[[2]int{damping, v.place}])
			if len(of) == 0 {
				continue
			}
			slices.Sort(of)
			of = slices.Compact(of)
			periods := "periods"
			if len(of) == 1 {
				periods = "period"
			}
			text := fmt.Sprintf("damping %d, %s %s: not what was stored; questions leave it out", damping+1, periods, ranges(of))
			i.found(i.Of(ctx, InspectedComputation{ID: v.computation}, "tile_part", text))
		}
	}
	return err
}
