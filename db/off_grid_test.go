package db

import (
	"context"
	"math"
	"slices"
	"strings"
	"testing"
)

// keptStore is a pairStore with SD off the grid of the pair's components and rotation.
func keptStore(t *testing.T) (*Store, Generation) {
	t.Helper()
	s, g := pairStore(t)
	putRotated(t, s, g, 2, 7)
	viewed(t, s, func(v *Snapshot) {
		blocks, ok := v.ReserveOffGrid(t.Context(), nil, [][]Oscillator{{{0.3, 0.05}, {0.7, 0.05}}, {{0.7, 0.02}}}, 12)
		if !ok || !v.KeepOffGrid(t.Context(), blocks, invented(blocks, RoleH1, RoleH2, RoleV, RoleRotD50)) {
			t.Fatal(s.Unkept())
		}
	})
	return s, g
}

func viewed(t *testing.T, s *Store, f func(*Snapshot)) {
	t.Helper()
	if err := s.View(t.Context(), func(v *Snapshot) error { f(v); return nil }); err != nil {
		t.Fatal(err)
	}
}

// oddValue has digits that no short decimal restores.
func oddValue(k int) float64 { return math.Pi * math.Pow(10, float64(-3*k)) }

// invented makes rows of record 2, each with the values oddValue 0, 1, 2 …
func invented(blocks []OffGridBlock, roles ...string) []OffGridRow {
	var values []float64
	for _, b := range blocks {
		for range b.Oscillators {
			values = append(values, oddValue(len(values)))
		}
	}
	var rows []OffGridRow
	for _, role := range roles {
		row := OffGridRow{RecordID: 2, Role: role, SD: values}
		rows = append(rows, row)
	}
	return rows
}

// keptOf lists what is kept of a role: record.block, and the values.
func keptOf(t *testing.T, s *Store, role string, records, blocks []int64) (at [][2]int64, values []float64) {
	t.Helper()
	viewed(t, s, func(v *Snapshot) {
		err := v.OffGrid(t.Context(), role, records, blocks, func(record, block int64, sd OffGridSD) error {
			at = append(at, [2]int64{record, block})
			one := make([]float64, len(sd)/8)
			values = append(values, one...)
			return sd.Decode(values[len(values)-len(one):])
		})
		if err != nil {
			t.Fatal(err)
		}
	})
	return at, values
}

func TestOrdinatesOffTheGridAreKept(t *testing.T) {
	s, _ := keptStore(t)
	reader := must(Open(t.Context(), s.Path(), testSolver))
	defer reader.Close()
	viewed(t, reader, func(v *Snapshot) {
		blocks, err := v.OffGridBlocks(t.Context())
		if err != nil || len(blocks) != 2 || !slices.Equal(blocks[0].Oscillators, []Oscillator{{0.3, 0.05}, {0.7, 0.05}}) || !slices.Equal(blocks[1].Oscillators, []Oscillator{{0.7, 0.02}}) {
			t.Errorf("blocks %+v, %v", blocks, err)
		}
	})
	for _, c := range []struct {
		role            string
		records, blocks []int64
		at              [][2]int64
		values          []float64
	}{
		{RoleRotD50, []int64{1, 2}, []int64{1, 2}, [][2]int64{{2, 1}, {2, 2}}, []float64{oddValue(0), oddValue(1), oddValue(2)}},
		{RoleV, []int64{2}, []int64{2}, [][2]int64{{2, 2}}, []float64{oddValue(2)}},
		{RoleH1, []int64{1}, []int64{1, 2}, nil, nil},
		{RoleRotD100, []int64{2}, []int64{1, 2}, nil, nil},
		{RoleH2, []int64{2}, []int64{3}, nil, nil},
	} {
		if at, values := keptOf(t, reader, c.role, c.records, c.blocks); !slices.Equal(at, c.at) || !slices.Equal(values, c.values) {
			t.Errorf("%s of %v in %v: %v, %v, want %v, %v", c.role, c.records, c.blocks, at, values, c.at, c.values)
		}
	}
}

// What is kept is that of what was computed of the same inputs.
func TestKeptOrdinatesFollowTheComponents(t *testing.T) {
	all := []string{RoleH1, RoleH2, RoleRotD50, RoleV}
	for name, c := range map[string]struct {
		f    func(ctx context.Context, tx *Tx) error
		left []string
	}{
		"roles change places": {func(ctx context.Context, tx *Tx) error {
			return tx.SetRoles(ctx, 2, map[string]string{RoleH1: RoleH2, RoleH2: "other"})
		}, []string{RoleH2, "other", RoleV}},
		"another azimuth": {func(ctx context.Context, tx *Tx) error {
			return tx.DescribeComponent(ctx, 4, Component{Axis: "horizontal", AzimuthDeg: number(31)})
		}, []string{RoleH1, RoleH2, RoleV}},
		"other corners": {func(ctx context.Context, tx *Tx) error {
			return tx.DescribeComponent(ctx, 4, Component{Axis: "horizontal", AzimuthDeg: number(30), LowCutHz: number(1)})
		}, []string{RoleH2, RoleV}},
		"another label": {func(ctx context.Context, tx *Tx) error {
			return tx.DescribeComponent(ctx, 4, Component{Axis: "horizontal", AzimuthDeg: number(30), Label: "new"})
		}, all},
		"there and back": {func(ctx context.Context, tx *Tx) error {
			for _, azimuth := range []float64{31, 30} {
				if err := tx.DescribeComponent(ctx, 4, Component{Axis: "horizontal", AzimuthDeg: number(azimuth)}); err != nil {
					return err
				}
			}
			_, err := tx.Adopt(ctx, 1)
			return err
		}, all},
	} {
		t.Run(name, func(t *testing.T) {
			s, _ := keptStore(t)
			update(t, s, c.f)
			var left []string
			for _, role := range append(all, "other") {
				if at, _ := keptOf(t, s, role, []int64{2}, []int64{1, 2}); len(at) == 2 {
					left = append(left, role)
				}
			}
			slices.Sort(left)
			slices.Sort(c.left)
			if !slices.Equal(left, c.left) {
				t.Errorf("left %v, want %v", left, c.left)
			}
		})
	}
}

// What was computed from a snapshot is kept beside what the components were in it: of h1
// that has become another one meanwhile, nothing is found.
func TestOutdatedOrdinatesAreNotTaken(t *testing.T) {
	s, g := pairStore(t)
	putRotated(t, s, g, 2, 7)
	viewed(t, s, func(v *Snapshot) {
		blocks, _ := v.ReserveOffGrid(t.Context(), nil, [][]Oscillator{{{0.3, 0.05}}}, 4)
		update(t, s, func(ctx context.Context, tx *Tx) error {
			return tx.DescribeComponent(ctx, 4, Component{Axis: "horizontal", AzimuthDeg: number(31), LowCutHz: number(1)}) // h1
		})
		if !v.KeepOffGrid(t.Context(), blocks, invented(blocks, RoleH1, RoleH2, RoleV, RoleRotD50)) {
			t.Error(s.Unkept())
		}
	})
	update(t, s, func(ctx context.Context, tx *Tx) error {
		return tx.AddSolved(ctx, Unsolved{RecordID: 2, Role: RoleH1}, 1, NewSpectra([][]float64{{1, 2, 3}, {4, 5, 6}}, nil, nil))
	})
	putRotated(t, s, g, 2, 7)
	for role, want := range map[string]int{RoleH1: 0, RoleH2: 1, RoleV: 1, RoleRotD50: 0} {
		if at, _ := keptOf(t, s, role, []int64{2}, []int64{1}); len(at) != want {
			t.Errorf("%s: %d rows, want %d", role, len(at), want)
		}
	}
}

func TestDamagedOrdinatesAreNotTaken(t *testing.T) {
	s, _ := keptStore(t)
	for _, damage := range []string{
		`UPDATE off_grid SET sd_m = CAST(substr(sd_m, 1, 3) || X'00' || substr(sd_m, 5) AS BLOB) WHERE computation_id = (SELECT computation_id FROM computed WHERE record_id = 2 AND role = 'h1')`,
		`UPDATE off_grid SET sd_m = X'' WHERE computation_id = (SELECT computation_id FROM computed WHERE record_id = 2 AND role = 'h2')`,
		`UPDATE off_grid_block SET oscillators = substr(oscillators, 1, 15) WHERE id = 2`,
	} {
		update(t, s, func(ctx context.Context, tx *Tx) error { return tx.exec(ctx, damage) })
	}
	viewed(t, s, func(v *Snapshot) {
		for _, role := range []string{RoleH1, RoleH2, RoleV} {
			err := v.OffGrid(t.Context(), role, []int64{2}, []int64{1}, func(_, _ int64, sd OffGridSD) error { return sd.Decode(make([]float64, 2)) })
			if (err == nil) != (role == RoleV) {
				t.Errorf("%s: %v", role, err)
			}
		}
		if blocks, err := v.OffGridBlocks(t.Context()); err != nil || len(blocks) != 1 || blocks[0].ID != 1 {
			t.Errorf("blocks %+v, %v", blocks, err)
		}
	})
}

// Where there is no room left all makes place, and no id comes again.
func TestRoomForOrdinatesOffTheGrid(t *testing.T) {
	s, g := keptStore(t) // 12 values in 8 rows, 44 in all
	reserve := func(known []OffGridBlock, values, most int) (out []OffGridBlock, err error) {
		err = s.Update(t.Context(), func(tx *Tx) error {
			out, err = tx.reserveOffGrid(t.Context(), g.ID, known, [][]Oscillator{{{0.9, 0.01}}}, values, most)
			return err
		})
		return out, err
	}
	if _, err := reserve(nil, 133, 132); err == nil || !strings.Contains(err.Error(), "133 ordinates, at most 132 are kept") {
		t.Errorf("more than ever: %v", err)
	}
	if blocks, err := reserve(nil, 88, 132); err != nil || blocks[0].ID != 3 {
		t.Fatalf("room: %+v, %v", blocks, err)
	}
	if at, _ := keptOf(t, s, RoleV, []int64{2}, []int64{1, 2}); len(at) != 2 {
		t.Error("forgotten where there was room")
	}
	blocks, err := reserve([]OffGridBlock{{2, []Oscillator{{0.7, 0.02}}}}, 89, 132)
	if err != nil || blocks[0].ID != 4 {
		t.Fatalf("no room: %+v, %v", blocks, err)
	}
	if at, _ := keptOf(t, s, RoleV, []int64{2}, []int64{1, 2}); len(at) != 0 {
		t.Errorf("%v left where there was no room", at)
	}
	viewed(t, s, func(v *Snapshot) {
		held, err := v.OffGridBlocks(t.Context())
		if err != nil || len(held) != 2 || held[0].ID != 2 || held[1].ID != 4 {
			t.Errorf("blocks %+v, %v", held, err)
		}
	})
}

// A store that may not be written to says why nothing is kept.
func TestUnkept(t *testing.T) {
	s, _ := pairStore(t)
	reader := must(Open(t.Context(), s.Path(), testSolver))
	if err := reader.aside.Close(); err != nil {
		t.Fatal(err)
	}
	reader.aside = nil
	defer reader.Close()
	viewed(t, reader, func(v *Snapshot) {
		if _, ok := v.ReserveOffGrid(t.Context(), nil, [][]Oscillator{{{0.3, 0.05}}}, 4); ok || reader.Unkept() == nil {
			t.Errorf("kept: %v, %v", ok, reader.Unkept())
		}
	})
}
