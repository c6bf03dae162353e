package query

import (
	"bytes"
	"errors"
	"slices"
	"testing"

	"swaybook/db"
)

const cutSeries = `UPDATE series SET data = substr(data, 1, 20) WHERE id IN
	(SELECT c.series_id FROM component c JOIN record r ON r.id = c.record_id WHERE r.code = ? AND c.role = 'h2')`

// TestDamagedSamplesAreLeftOut: a series that is damaged stops no question about
// other records, and its own record is left out with the reason where it is needed.
func TestDamagedSamplesAreLeftOut(t *testing.T) {
	roof := pulses("roof", inventedComponent{}, inventedComponent{})
	roof.siting = "structure"
	store := newStore(t, handGrid, []inventedRecord{
		pulses("good", inventedComponent{}, inventedComponent{}), pulses("bad", inventedComponent{}, inventedComponent{}), roof,
		{code: "stored", siting: "ground", components: pair(1, 1)},
	})
	for _, code := range []string{"bad", "roof", "stored"} {
		alter(t, store, cutSeries, code)
	}
	damaged, structure := LeftOut{"damaged in the store", 1}, LeftOut{"siting structure", 1}
	tests := map[string]struct {
		where     string
		component Component
		damping   float64 // 0.02 is on the grid
		records   int
		leftOut   []LeftOut
	}{
		"pairs that are not stored":        {"", ComponentRotD50, 0.02, 2, []LeftOut{damaged, structure}},
		"off the grid":                     {"", ComponentRotD50, 0.03, 1, []LeftOut{{"damaged in the store", 2}, structure}},
		"single, off the grid":             {"", ComponentH2, 0.03, 1, []LeftOut{{"damaged in the store", 2}, structure}},
		"the sound one of two":             {"", ComponentH1, 0.03, 3, []LeftOut{structure}},
		"combined, off the grid":           {"", ComponentGeomean, 0.03, 1, []LeftOut{{"damaged in the store", 2}, structure}},
		"on the grid":                      {"", ComponentEach, 0.02, 3, []LeftOut{structure}},
		"peaks":                            {"pga_g > 0", ComponentRotD100, 0.02, 2, []LeftOut{damaged, structure}},
		"peaks of others":                  {`record != "bad" and record != "roof" and pga_g > 0`, ComponentRotD100, 0.02, 2, nil},
		"peaks that cannot matter":         {`not (record in ["bad", "roof"] or pga_g < 0)`, ComponentRotD100, 0.02, 2, nil},
		"peaks, or not":                    {`record == "good" or pgv_m_s > 0 and siting != "structure"`, ComponentRotD50, 0.02, 2, []LeftOut{damaged}},
		"no peaks, on the grid and single": {"samples > 0", ComponentH2, 0.02, 3, []LeftOut{structure}},
	}
	for name, test := range tests {
		t.Run(name, func(t *testing.T) {
			r := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Where: test.where, Component: test.component}, Damping: test.damping}).Selection
			if r.Records != test.records || !slices.Equal(r.LeftOut, test.leftOut) {
				t.Errorf("%d records, left out %v, want %d, %v", r.Records, r.LeftOut, test.records, test.leftOut)
			}
			if want := map[Component]int{ComponentEach: 6}[test.component]; want > 0 && r.Spectra != want {
				t.Errorf("%d spectra, want %d", r.Spectra, want)
			}
		})
	}
}

// TestDamagedAnswers: what is left of an answer is that of the sound records, in
// demands, lists and exports too, and nothing is an answer of its own.
func TestDamagedAnswers(t *testing.T) {
	records := func() []inventedRecord {
		return []inventedRecord{pulses("bad", inventedComponent{level: 1}, inventedComponent{level: 1}), pulses("good", inventedComponent{level: 1, peak: 3}, inventedComponent{level: 1})}
	}
	store, sound := newStore(t, handGrid, records()), newStore(t, handGrid, records()[1:])
	alter(t, store, cutSeries, "bad")
	want := []LeftOut{{"damaged in the store", 1}}
	demand := DemandQuestion{Structure: Structure{PeriodS: 0.7, Damping: 0.02}, BandWidth: 0.1}
	got, err := demand.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	other, err := demand.Ask(t.Context(), sound)
	if err != nil {
		t.Fatal(err)
	}
	if got.Quantities[0].Reduction.Max != other.Quantities[0].Reduction.Max || got.Quantities[0].Reduction.Count != 1 || !slices.Equal(got.Selection.LeftOut, want) {
		t.Errorf("demand %+v of %+v, want %+v", got.Quantities[0].Reduction, got.Selection, other.Quantities[0].Reduction)
	}
	list, err := RecordsQuestion{Selection{Component: ComponentRotD50}}.Ask(t.Context(), store)
	if err != nil || len(list.Rows) != 1 || list.Rows[0].Record != "good" || !slices.Equal(list.Selection.LeftOut, want) {
		t.Errorf("list %+v, %v", list, err)
	}
	export := ExportQuestion{Selection: Selection{Component: ComponentRotD50}, Dampings: []float64{0.02, 0.03}}
	var text, soundText bytes.Buffer
	summary, err := export.Write(t.Context(), store, &text)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := export.Write(t.Context(), sound, &soundText); err != nil {
		t.Fatal(err)
	}
	if text.String() != soundText.String() || summary.Rows != 2*len(handGrid.PeriodsS) || !slices.Equal(summary.Selection.LeftOut, want) {
		t.Errorf("export of %+v:\n%s\nwant\n%s", summary, &text, &soundText)
	}
	alter(t, store, cutSeries, "good")
	alter(t, store, `DELETE FROM off_grid`)
	var empty *EmptyError
	if _, err := demand.Ask(t.Context(), store); !errors.As(err, &empty) || !slices.Equal(empty.LeftOut, []LeftOut{{"damaged in the store", 2}}) {
		t.Errorf("demand of nothing sound: %v", err)
	}
	if _, err := export.Write(t.Context(), store, &text); !errors.As(err, &empty) {
		t.Errorf("export of nothing sound: %v", err)
	}
}

// loseOrdinate is what a migration left of a spectrum that was damaged: of the damping of a
// position, a role and a record's code.
const loseOrdinate = `UPDATE tile_part SET (sd_m, crc32c) = (SELECT d, crc32c(d) FROM (
		SELECT CAST(substr(sd_m, 1, 8 * s.place) || x'ffffffffffffffff' || substr(sd_m, 8 * s.place + 9) AS BLOB) AS d
		FROM spectrum s JOIN computed k ON k.computation_id = s.computation_id JOIN record r ON r.id = k.record_id WHERE k.role = ?2 AND r.code = ?3))
	WHERE id = (SELECT (s.tile_id << 20) + (?1 << 12) FROM spectrum s JOIN computed k ON k.computation_id = s.computation_id JOIN record r ON r.id = k.record_id WHERE k.role = ?2 AND r.code = ?3)`

// TestDamagedSpectraAreLeftOut: so are spectra that are lost, that nobody knows the place of, and
// those that are not there, which ingest computes again.
func TestDamagedSpectraAreLeftOut(t *testing.T) {
	const where = ` WHERE computation_id = (SELECT k.computation_id FROM computed k JOIN record r ON r.id = k.record_id WHERE k.role = ?2 AND r.code = ?3)`
	for name, damage := range map[string]string{
		"lost":      loseOrdinate,
		"misplaced": `UPDATE spectrum SET place = place + 20 + ?1` + where,
		"gone":      `DELETE FROM spectrum` + where + ` AND ?1 = 0`,
	} {
		t.Run(name, func(t *testing.T) {
			store := newStore(t, handGrid, handRecords())
			alter(t, store, `DELETE FROM edition_column`) // which still says where all is
			alter(t, store, damage, 0, db.RoleH2, "R2")
			const reason = "damaged in the store"
			for component, spectra := range map[Component]int{ComponentGeomean: 2, ComponentH2: 2, ComponentEach: 6} {
				r := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Component: component}, Damping: 0.02}).Selection
				if r.Spectra != spectra || !slices.Contains(r.LeftOut, LeftOut{reason, 1}) {
					t.Errorf("%s: %+v, want %d spectra", component, r, spectra)
				}
			}
		})
	}
}

// TestDamagedPartsAreLeftOut: of a tile that is damaged at some periods all records are left out of
// questions about these, and none of those about others.
func TestDamagedPartsAreLeftOut(t *testing.T) {
	grid := db.Grid{Dampings: []float64{0.02, 0.05}}
	for p := range 12 {
		grid.PeriodsS = append(grid.PeriodsS, 0.1*float64(1+p))
	}
	for name, damage := range map[string]string{
		"cut":     `UPDATE tile_part SET sd_m = substr(sd_m, 1, 30) WHERE id = (1 << 20) + 1`,
		"garbled": `UPDATE tile_part SET sd_m = CAST(substr(sd_m, 2) || substr(sd_m, 1, 1) AS BLOB) WHERE id = (1 << 20) + 1`,
		"gone":    `DELETE FROM tile_part WHERE id = (1 << 20) + 1`,
	} {
		t.Run(name, func(t *testing.T) {
			store := newStore(t, grid, handRecords())
			err := change(t.Context(), store, func(tx *db.Tx) error {
				g, _, err := tx.Current(t.Context())
				if err != nil {
					return err
				}
				return inventedRecord{code: "R7", siting: "ground", components: pair(2, 2)}.put(t.Context(), tx, 1, g)
			})
			if err != nil {
				t.Fatal(err)
			}
			alter(t, store, damage)
			ask := func(component Component, damping float64, periods ...float64) SelectionReport {
				return askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Component: component}, Damping: damping, PeriodsS: periods}).Selection
			}
			for _, component := range []Component{ComponentGeomean, ComponentRotD50} {
				for _, r := range []SelectionReport{ask(component, 0.02, grid.PeriodsS[:8]...), ask(component, 0.05)} {
					if r.Records != 4 || slices.Contains(r.LeftOut, LeftOut{"damaged in the store", 3}) {
						t.Errorf("%s beside the damage: %+v", component, r)
					}
				}
				for _, r := range []SelectionReport{ask(component, 0.02, grid.PeriodsS[8]), ask(component, 0.02)} {
					if r.Records != 1 || !slices.Contains(r.LeftOut, LeftOut{"damaged in the store", 3}) {
						t.Errorf("%s where the damage is: %+v", component, r)
					}
				}
			}
		})
	}
}

// resealPeaks makes of the peaks that are there what the editions show.
const resealPeaks = `UPDATE edition_seal SET sums = (SELECT json_array(sum(crc32c(k.record_id, k.role, m.peaks))) FROM edition_computed k
	JOIN (SELECT computation_id, sum(crc32c(computation_id, name, value)) AS peaks FROM measure WHERE name IN ('pga_m_s2', 'pgv_m_s', 'pgd_m') GROUP BY 1) m
	ON m.computation_id = k.computation_id WHERE k.role = part) WHERE name = 'peaks'`

// TestLostPeaksAreLeftOut: so are components and pairs that lack a measure, where
// it is needed, in a store that had lost it before it had checksums.
func TestLostPeaksAreLeftOut(t *testing.T) {
	for _, role := range []string{db.RoleH2, db.RoleRotD50} {
		store := newStore(t, handGrid, handRecords())
		alter(t, store, `DELETE FROM measure WHERE name = 'pgv_m_s' AND computation_id = (
			SELECT k.computation_id FROM computed k JOIN record r ON r.id = k.record_id WHERE k.role = ? AND r.code = 'R2')`, role)
		if _, err := (RecordsQuestion{Selection{Component: Component(role)}}).Ask(t.Context(), store); !errors.Is(err, db.ErrAltered) {
			t.Errorf("%s: list of what had checksums: %v", role, err)
		}
		alter(t, store, resealPeaks)
		list, err := RecordsQuestion{Selection{Component: Component(role)}}.Ask(t.Context(), store)
		if err != nil || !slices.Contains(list.Selection.LeftOut, LeftOut{"damaged in the store", 1}) {
			t.Errorf("%s: list %+v, %v", role, list.Selection, err)
		}
		if err := list.Write(&bytes.Buffer{}, FormatJSON); err != nil {
			t.Errorf("%s: %v", role, err)
		}
		for where, want := range map[string]bool{"pga_g > 0": true, "magnitude > 0": false} {
			r := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Component: Component(role), Where: where}, Damping: 0.02}).Selection
			if got := slices.Contains(r.LeftOut, LeftOut{"damaged in the store", 1}); got != want {
				t.Errorf("%s where %s: left out %v", role, where, r.LeftOut)
			}
		}
	}
}

// TestPossibleText: what an expression says where nothing is known of peaks.
func TestPossibleText(t *testing.T) {
	for text, want := range map[string]string{
		`magnitude > 5 and pga_g > 1`:                     `magnitude > 5 and true`,
		`not (magnitude > 5 or pga_g > 1)`:                `not (magnitude > 5 or false)`,
		`!(pga_g > 1 && !(pgv_m_s > 1)) || pgd_m + 1 < 2`: `!(false && !true) || true`,
		`pga_g > 1 ? magnitude > 5 : magnitude > 6`:       `true`,
		`(pga_g > 1) == (magnitude > 5)`:                  `true`,
		`record in ["a", "b"] and max(pga_g, 1) > 2`:      `record in ["a", "b"] and true`,
	} {
		if got := possibleText(text); got != want {
			t.Errorf("possibleText(%s) = %s, want %s", text, got, want)
		}
		if _, err := compileWhere(text); err != nil {
			t.Errorf("%s: %v", text, err)
		}
	}
}
