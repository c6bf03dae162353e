package pipeline

import (
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"swaybook/db"
)

// csvOf is the motion of at2 of this seed as a plain column, in gal with so many
// decimals, times a factor.
func csvOf(seed uint64, factor float64, decimals int) string {
	rng := rand.New(rand.NewPCG(seed, 3))
	var b strings.Builder
	b.WriteString("# dt = 0.01 s\nacc [gal]\n")
	for range 600 {
		fmt.Fprintf(&b, "%.*f\n", decimals, factor*0.1*980.665*rng.NormFloat64())
	}
	return b.String()
}

// The same motion in two formats and units is one in statistics; another station,
// direction or motion is not.
func TestVersionsOfOneMotion(t *testing.T) {
	const head = "file,event,station,component\n"
	for _, test := range []struct {
		name      string
		csv       string
		catalogue string
		want      string // components with the record from which each is taken instead
	}{
		{"other digits", csvOf(1, 1, 2), "zcopy.csv,invented-20260312,site-00,000\n", "invented-20260312_site-00 h1 -, invented-20260312_site-00_v2 h1 invented-20260312_site-00"},
		{"half as large", csvOf(1, -0.5, 4), "zcopy.csv,invented-20260312,site-00,000\n", "invented-20260312_site-00 h1 -, invented-20260312_site-00_v2 h1 invented-20260312_site-00"},
		{"another motion", csvOf(2, 1, 2), "zcopy.csv,invented-20260312,site-00,000\n", "invented-20260312_site-00 h1 -, invented-20260312_site-00_v2 h1 -"},
		{"another station", csvOf(1, 1, 2), "zcopy.csv,invented-20260312,site-01,000\n", "invented-20260312_site-00 h1 -, invented-20260312_site-01 h1 -"},
		{"another direction", csvOf(1, 1, 2), "zcopy.csv,invented-20260312,site-00,090\n", "invented-20260312_site-00 h1 -, invented-20260312_site-00_v2 h2 -"},
	} {
		t.Run(test.name, func(t *testing.T) {
			dir := t.TempDir()
			put(t, dir, "a000.AT2", at2("Invented", "Site 00", "000", 1))
			put(t, dir, "zcopy.csv", test.csv)
			store, opts := newStore(t), options(dir)
			opts.Catalogue = catalogue(t, head+test.catalogue)
			run(t, store, opts)
			if got := duplicates(t, store); got != test.want {
				t.Errorf("got  %s\nwant %s", got, test.want)
			}
		})
	}
}

// duplicates lists the components with the record from which statistics take
// each instead.
func duplicates(t *testing.T, store *db.Store) string {
	t.Helper()
	var of map[db.ComponentKey]string
	err := store.View(t.Context(), func(v *db.Snapshot) (err error) {
		of, err = v.Duplicates(t.Context())
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for _, c := range componentsOf(t, store) {
		code := of[db.ComponentKey{RecordID: c.RecordID, Role: c.Role}]
		if code == "" {
			code = "-"
		}
		out = append(out, c.Record.Code+" "+c.Role+" "+code)
	}
	return strings.Join(out, ", ")
}

func TestByPreference(t *testing.T) {
	record := func(id int64, edit func(*db.Version)) db.Version {
		v := db.Version{RecordID: id, RecordCode: fmt.Sprint("R", id), Component: db.Component{
			Role: db.RoleH1, Processing: "raw", StepS: 0.01, Samples: 1000, SourcePath: fmt.Sprint("p", id)}}
		edit(&v)
		return v
	}
	second := record(5, func(v *db.Version) { v.Role = db.RoleH2 })
	found := []db.Version{
		record(1, func(*db.Version) {}),
		record(2, func(v *db.Version) { v.Samples = 2000 }),
		record(3, func(v *db.Version) { v.Processing, v.LowCutHz, v.HighCutHz = "corrected", value(0.2), value(20) }),
		record(4, func(v *db.Version) { v.Processing, v.LowCutHz, v.HighCutHz = "corrected", value(0.1), value(20) }),
		record(5, func(*db.Version) {}), second,
		record(6, func(v *db.Version) { v.Processing = "mean-removed" }),
		record(7, func(v *db.Version) { v.Start = time.Now() }),
	}
	var got []string
	for _, r := range byPreference(found) {
		got = append(got, r[0].RecordCode)
	}
	if want := "[R5 R4 R3 R6 R2 R1 R7]"; fmt.Sprint(got) != want {
		t.Errorf("got %v, want %s", got, want)
	}
}
