package pipeline

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/spectrum"
)

// byChannel are the records of a miniSEED 2 file, each of 512 bytes, by their channel.
func byChannel(t *testing.T, data string) map[string]string {
	t.Helper()
	out := map[string]string{}
	for ; data != ""; data = data[512:] {
		out[data[15:18]] += data[:512]
	}
	return out
}

// Channels of one instrument in a file each, as archives of networks have them, of which
// one starts 70 ms after the others, are a pair on one clock: each direction alone has the
// spectrum of its component, and all directions that of the channels in one file, which are
// cut to their common time, but for what was cut off.
func TestChannelsInFilesOfTheirOwn(t *testing.T) {
	fixture := func(name string) string {
		data, err := os.ReadFile(filepath.Join("..", "testdata", "records", "miniseed", name))
		if err != nil {
			t.Fatal(err)
		}
		return string(data)
	}
	together, apart := t.TempDir(), t.TempDir()
	put(t, together, "all.mseed", fixture("three-channels.mseed"))
	for channel, data := range byChannel(t, fixture("three-channels.mseed")) {
		put(t, apart, fmt.Sprintf("2041/XX/TARN/%[1]s.D/XX.TARN.00.%[1]s.D.2041.063", channel), data)
	}
	stores := map[string]*db.Store{together: newStore(t), apart: newStore(t)}
	for dir, store := range stores {
		put(t, dir, "station.xml", fixture("station.xml"))
		if got := run(t, store, options(dir)); got.Records != 1 || got.Stored != 3 || got.Rotated != 1 {
			t.Errorf("summary = %+v, want one record of three channels, rotated", got)
		}
	}
	off := func(role string, i int) float64 {
		return stored(t, stores[apart], role)[i]/stored(t, stores[together], role)[i] - 1
	}
	for i := range stored(t, stores[apart], db.RoleH1) {
		h1, h2, rotd50, rotd100 := off(db.RoleH1, i), off(db.RoleH2, i), off(db.RoleRotD50, i), off(db.RoleRotD100, i)
		// A thousandth beside, since the maximum of another direction is at another time.
		if most := max(math.Abs(h1), math.Abs(h2)) + 1e-3; most > 0.05 || math.Abs(rotd50) > most || math.Abs(rotd100) > most {
			t.Errorf("over all directions off by %.3g and %.3g, the components by %.3g and %.3g", rotd50, rotd100, h1, h2)
		}
	}
	compareDirections(t, stores[apart], -7)
}

// The same where the north's packets begin 3 s later still, in another second, and nobody
// says what earthquake it was.
func TestChannelsThatStartSecondsApart(t *testing.T) {
	dir, store := t.TempDir(), newStore(t)
	for _, name := range []string{"three-channels.mseed", "station.xml"} {
		data, err := os.ReadFile(filepath.Join("..", "testdata", "records", "miniseed", name))
		if err != nil {
			t.Fatal(err)
		}
		if name == "station.xml" {
			put(t, dir, name, string(data))
			continue
		}
		for channel, data := range byChannel(t, string(data)) {
			if channel == "HNN" {
				data = threeSecondsLater(data)
			}
			put(t, dir, channel+"/a.mseed", data)
		}
	}
	if got := run(t, store, options(dir)); got.Records != 1 || got.Stored != 3 || got.Rotated != 1 {
		t.Errorf("summary = %+v, want one record of three channels, rotated", got)
	}
	compareDirections(t, store, -307)
}

// threeSecondsLater moves the starts of miniSEED 2 records, the seconds of which are in their
// byte 26.
func threeSecondsLater(data string) string {
	out := []byte(data)
	for at := 0; at < len(out); at += 512 {
		out[at+26] += 3
	}
	return string(out)
}

// compareDirections compares the pair of the store's only record, computed here from what is
// stored of its components, with the stored spectra: those of the components along 0 and 90°,
// those of the pair over all directions. The second starts so many samples later.
func compareDirections(t *testing.T, store *db.Store, wantLater int) {
	t.Helper()
	solver, err := spectrum.NewSolver(spectrum.NigamJennings, 0.01, spectrum.Grid{PeriodsS: testGrid.PeriodsS, Dampings: testGrid.Dampings}.Oscillators())
	if err != nil {
		t.Fatal(err)
	}
	var motions []condition.Conditioned
	var held []db.HeldComponent
	for _, role := range []string{db.RoleH1, db.RoleH2} {
		for _, c := range componentsOf(t, store) {
			if c.Role == role {
				held = append(held, c)
				motions = append(motions, conditionedOf(t, store, c))
			}
		}
	}
	later := int(math.Round(held[1].Start.Sub(held[0].Start).Seconds() / 0.01))
	if later != wantLater {
		t.Fatalf("the second starts %d samples after the first, want %d", later, wantLater)
	}
	p := spectrum.NewPair(motions[0].Acceleration, motions[1].Acceleration, motions[0].SamplesBefore(motions[1])+later, 90)
	for role, samples := range map[string][]float64{db.RoleH1: p.A, db.RoleH2: p.B} {
		want, got := stored(t, store, role), solver.SD(nil, samples)
		for i := range want {
			if off := math.Abs(got[i]/want[i] - 1); off > 1e-6 {
				t.Errorf("%s: SD %g along its direction, alone %g", role, got[i], want[i])
			}
		}
	}
	sd50, sd100 := solver.RotD(p.A, p.B, solver.SD(nil, p.A), solver.SD(nil, p.B))
	if got := stored(t, store, db.RoleRotD50); !slices.Equal(got, sd50) {
		t.Errorf("rotd50 = %v, want %v", got, sd50)
	}
	if got := stored(t, store, db.RoleRotD100); !slices.Equal(got, sd100) {
		t.Errorf("rotd100 = %v, want %v", got, sd100)
	}
}

// conditionedOf is what the store's recipe makes of a component.
func conditionedOf(t *testing.T, store *db.Store, c db.HeldComponent) (out condition.Conditioned) {
	t.Helper()
	err := store.View(t.Context(), func(v *db.Snapshot) error {
		recipe, err := condition.FromCanonical(v.Generation.Recipe.Steps)
		if err != nil {
			return err
		}
		delivered, err := v.Motion(t.Context(), c.ID)
		if err != nil {
			return err
		}
		out, err = recipe.Apply(condition.Component(delivered))
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return out
}
