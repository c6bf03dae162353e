package pipeline

import (
	"cmp"
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"

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

// Three versions under two networks and none, and a copy that knows nothing: which
// comes first does not matter, nor that two of the networks have nothing to do with
// each other.
func TestVersionsDoNotDependOnOrder(t *testing.T) {
	files := []string{"aa.csv", "none.csv", "bb.csv", "copy.csv"}
	text := map[string]string{"aa.csv": csvOf(1, 1, 2), "none.csv": csvOf(1, 1, 3), "bb.csv": csvOf(1, 2, 3), "copy.csv": "# unit = gal\n" + csvOf(1, 2, 3)}
	const table = "file,event,station,network,component\naa.csv,EV,S1,AA,000\nnone.csv,EV,S1,,000\nbb.csv,EV,S1,BB,000\n"
	for range 6 {
		rand.Shuffle(len(files), func(i, j int) { files[i], files[j] = files[j], files[i] })
		store := newStore(t)
		for _, name := range files {
			dir := t.TempDir()
			put(t, dir, name, text[name])
			opts := options(dir)
			opts.Catalogue = catalogue(t, table)
			run(t, store, opts)
		}
		motions := map[int64]int{}
		err := store.View(t.Context(), func(v *db.Snapshot) error {
			found, err := v.Versions(t.Context())
			for _, c := range found {
				motions[c.MotionID]++
			}
			return err
		})
		if err != nil {
			t.Fatal(err)
		}
		if len(motions) != 1 {
			t.Errorf("%v: motions held several times %v, want one", files, motions)
		}
		for _, n := range motions {
			if n != 4 {
				t.Errorf("%v: %d components of one motion, want 4", files, n)
			}
		}
	}
}

// duplicates lists the components with the record of the first that holds the same
// motion.
func duplicates(t *testing.T, store *db.Store) string {
	t.Helper()
	first := map[int64]string{}
	of := map[string]string{}
	err := store.View(t.Context(), func(v *db.Snapshot) error {
		found, err := v.Versions(t.Context())
		for _, c := range found { // in the order of component ids
			if first[c.MotionID] == "" {
				first[c.MotionID] = c.RecordCode
			} else {
				of[c.RecordCode+c.Role] = first[c.MotionID]
			}
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for _, c := range componentsOf(t, store) {
		out = append(out, c.Record.Code+" "+c.Role+" "+cmp.Or(of[c.Record.Code+c.Role], "-"))
	}
	return strings.Join(out, ", ")
}
