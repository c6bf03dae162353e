package db

import (
	"context"
	"database/sql"
	"fmt"
	"math"
	"slices"
)

// Stored values that are checked whole, whatever the sample.

// OffGrid checks what is kept off the grid against its checksums, and returns how many rows
// there are.
func (i *Inspection) OffGrid(ctx context.Context) (rows int, err error) {
	type block struct {
		id   int64
		data []byte
	}
	lengths := map[int64]int{}
	err = look(ctx, i, "off_grid_block", `SELECT id, oscillators FROM off_grid_block`, nil, func(b *block) []any { return []any{&b.id, &b.data} }, func(b *block) {
		lengths[b.id] = len(b.data) / 16
		if openDoubles(make([]float64, len(b.data)/8), b.data) != nil {
			i.found(Fault{Table: "off_grid_block", Text: fmt.Sprintf("block %d is not what was stored; questions do without it", b.id)})
		}
	})
	if err != nil {
		return 0, err
	}
	type row struct {
		of, block int64
		sd        sql.RawBytes
	}
	err = look(ctx, i, "off_grid", `SELECT computation_id, block_id, sd_m FROM off_grid`, nil, func(v *row) []any { return []any{&v.of, &v.block, &v.sd} }, func(v *row) {
		rows++
		if openDoubles(make([]float64, lengths[v.block]), v.sd) != nil {
			i.found(Fault{Table: "off_grid", Text: fmt.Sprintf("computation %d, block %d: not what was stored; questions compute it again", v.of, v.block)})
		}
	})
	return rows, err
}

// Seals compares what is computed beside spectra with its checksums.
func (i *Inspection) Seals(ctx context.Context) error {
	type row struct {
		id   int64
		kind string
	}
	var damaged []row
	for _, kind := range computationSeals {
		err := look(ctx, i, "computation_seal", `SELECT n.id, '`+kind+`' FROM (`+sealsOfComputation+`) n LEFT JOIN computation_seal s ON s.computation_id = n.id WHERE s.`+kind+` IS NOT n.`+kind, nil,
			func(v *row) []any { return []any{&v.id, &v.kind} }, func(v *row) { damaged = append(damaged, *v) })
		if err != nil {
			return err
		}
	}
	for _, v := range damaged {
		i.found(i.Of(ctx, InspectedComputation{ID: v.id}, sealedIn[v.kind], v.kind+": not what was stored; questions that read it fail"))
	}
	return nil
}

// KeptOffGrid is what is kept off the grid of one computation, or of both of a pair.
type KeptOffGrid struct {
	Oscillators []Oscillator
	SD          []float64
}

// OffGridOf returns what is kept of a computation, of what is whole; of a pair that of its
// maximum too.
func (i *Inspection) OffGridOf(ctx context.Context, c InspectedComputation) (kept, maximum KeptOffGrid, err error) {
	if kept, err = i.offGridOf(ctx, c.ID); err == nil && c.IsPair() {
		maximum, err = i.offGridOf(ctx, c.maximumID)
	}
	return kept, maximum, err
}

func (i *Inspection) offGridOf(ctx context.Context, id int64) (kept KeptOffGrid, err error) {
	rows, err := i.tx.QueryContext(ctx, `SELECT b.oscillators, o.sd_m FROM off_grid o JOIN off_grid_block b ON b.id = o.block_id WHERE o.computation_id = ? ORDER BY b.id`, id)
	if err != nil {
		return kept, err
	}
	type row struct{ oscillators, sd []byte }
	found, err := collect(rows, func(v *row) []any { return []any{&v.oscillators, &v.sd} })
	for _, v := range found {
		values, sd := make([]float64, len(v.oscillators)/8), make([]float64, len(v.oscillators)/16)
		if openDoubles(values, v.oscillators) != nil || openDoubles(sd, v.sd) != nil {
			continue // reported as a whole
		}
		for pair := range slices.Chunk(values, 2) {
			kept.Oscillators = append(kept.Oscillators, Oscillator{pair[0], pair[1]})
		}
		kept.SD = append(kept.SD, sd...)
	}
	return kept, err
}

// Ordinates compares the view ordinate with what questions read, of about so many records of
// the published edition: to read ordinates one by one costs more than to solve for them, and
// Structure compares what the view is. It returns the number of ordinates that it compared.
func (i *Inspection) Ordinates(ctx context.Context, records int) (compared int, err error) {
	if err := i.powers(ctx); err != nil || i.published.ID == 0 {
		return 0, err
	}
	v, err := snapshotOf(ctx, i.tx, nothingShown, `id = ?`, i.published.ID)
	if err != nil {
		return 0, ctx.Err() // reported with the generations
	}
	codes := map[int64]string{}
	type record struct {
		id   int64
		code string
	}
	err = look(ctx, i, "edition_record", `SELECT id, code FROM `+v.shown("record"), nil, func(r *record) []any { return []any{&r.id, &r.code} }, func(r *record) { codes[r.id] = r.code })
	if err != nil {
		return 0, err
	}
	nth := max(1, int64(len(codes)/records))
	for position, damping := range v.Generation.Grid.Dampings {
		for _, role := range []string{RoleH1, RoleH2, RoleV, RoleRotD50, RoleRotD100} {
			n, err := i.compareView(ctx, v, codes, role, position, damping, nth)
			if err != nil {
				return compared, err
			}
			compared += n
		}
	}
	return compared, nil
}

// powers checks what the view multiplies with.
func (i *Inspection) powers(ctx context.Context) error {
	type row struct {
		exponent, leading int
		factor            float64
	}
	rows := 0
	err := look(ctx, i, "power", `SELECT exponent, leading, factor FROM power`, nil, func(v *row) []any { return []any{&v.exponent, &v.leading, &v.factor} }, func(v *row) {
		rows++
		leading := 1 << 52
		if v.exponent == 0 {
			leading = 0
		}
		if v.leading != leading || v.factor != math.Ldexp(1, max(v.exponent, 1)-1075) {
			i.found(Fault{Table: "power", Text: fmt.Sprintf("exponent %d: not what was stored; the view ordinate is wrong", v.exponent)})
		}
	})
	if err == nil && rows != 2047 {
		i.found(Fault{Table: "power", Text: fmt.Sprintf("%d rows, want 2047; the view ordinate lacks values", rows)})
	}
	return err
}

func (i *Inspection) compareView(ctx context.Context, v *Snapshot, codes map[int64]string, role string, position int, damping float64, nth int64) (compared int, err error) {
	periods := v.Generation.Grid.PeriodsS
	want, expected := map[string][]float64{}, 0
	err = v.Spectra(ctx, role, position, Span{0, len(periods)}, func(id int64, sd []float64) error {
		switch {
		case id%nth != 0:
		case sd == nil:
			i.found(Fault{Table: "tile_part", Record: codes[id], Role: role, Text: "not what was stored"})
		default:
			want[codes[id]], expected = slices.Clone(sd), expected+len(sd)
		}
		return nil
	})
	if ctx.Err() != nil {
		return 0, ctx.Err()
	}
	if err != nil {
		return 0, nil // cannot be read, which the checks of the file have told
	}
	type row struct {
		code               string
		period, sd, v, psa float64
	}
	at := map[float64]int{}
	for k, t := range periods {
		at[t] = k
	}
	err = look(ctx, i, "ordinate", `SELECT record, period_s, sd_m, psv_m_s, psa_g FROM ordinate WHERE component = ?1 AND damping = ?2
		AND (?3 = 1 OR record IN (SELECT code FROM edition_record WHERE id % ?3 = 0))`, []any{role, damping, nth},
		func(r *row) []any { return []any{&r.code, &r.period, &r.sd, &r.v, &r.psa} }, func(r *row) {
			sd, known := want[r.code]
			k, onGrid := at[r.period]
			if !known || !onGrid {
				return
			}
			compared++
			omega := 2 * math.Pi / r.period
			for _, pair := range [][2]float64{{r.sd, sd[k]}, {r.v, sd[k] * omega}, {r.psa, sd[k] * omega * omega / 9.80665}} {
				if math.Float64bits(pair[0]) != math.Float64bits(pair[1]) {
					i.found(Fault{Table: "ordinate", Record: r.code, Role: role, Text: fmt.Sprintf("at %g s and damping %g the view has %.17g, questions %.17g", r.period, damping, pair[0], pair[1])})
					return
				}
			}
		})
	if err == nil && compared != expected {
		i.found(Fault{Table: "ordinate", Role: role, Text: fmt.Sprintf("at damping %g the view has %d ordinates, questions %d", damping, compared, expected)})
	}
	return compared, err
}
