package pipeline

import (
	"cmp"
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
	return driftingCSV(seed, factor, decimals, 0)
}

// driftingCSV is that with a baseline that rises to so many times the motion's root
// mean square.
func driftingCSV(seed uint64, factor float64, decimals int, drift float64) string {
	rng := rand.New(rand.NewPCG(seed, 3))
	var b strings.Builder
	b.WriteString("# dt = 0.01 s\nacc [gal]\n")
	for i := range 600 {
		fmt.Fprintf(&b, "%.*f\n", decimals, factor*0.1*980.665*(rng.NormFloat64()+drift*float64(i)/600))
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
		{"with a drift", driftingCSV(1, 1, 3, 5), "zcopy.csv,invented-20260312,site-00,000\n", "invented-20260312_site-00 h1 -, invented-20260312_site-00_v2 h1 invented-20260312_site-00"},
		{"another motion with a drift", driftingCSV(2, 1, 3, 5), "zcopy.csv,invented-20260312,site-00,000\n", "invented-20260312_site-00 h1 -, invented-20260312_site-00_v2 h1 -"},
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

// What one sensor gave is one motion with what it is most like, not with that of the
// sensor beside it, which it is like, too.
func TestSensorsSideBySide(t *testing.T) {
	version := func(format, file, channel string) *db.Version {
		v := &db.Version{Siting: "structure"}
		v.SourceFormat, v.SourceSHA256, v.Channel = format, file, channel
		return v
	}
	all := []*db.Version{version("a", "1", "5"), version("a", "2", "6"), version("b", "3", "X"), version("b", "4", "Y"), version("c", "5", "")}
	likes := []like{{2, 0, 0.999}, {2, 1, 0.995}, {3, 0, 0.994}, {3, 1, 0.998}, {4, 0, 0.996}, {4, 2, 0.997}, {4, 1, 0.993}}
	want := []bool{false, true, true, false, false, false, true}
	for range 6 {
		for i, l := range likes {
			if got := hasRival(all, likes, l); got != want[i] {
				t.Errorf("%v has a rival: %v, want %v", l, got, want[i])
			}
		}
		rand.Shuffle(len(likes), func(i, j int) {
			likes[i], likes[j] = likes[j], likes[i]
			want[i], want[j] = want[j], want[i]
		})
	}
}

// Motions that are near to each other only are versions where all that is said speaks
// for one sensor.
func TestOneSensorProcessed(t *testing.T) {
	full := func() *db.Version {
		v := &db.Version{EventID: 1, Network: "XX", StationCode: "AAA", Instrument: "00", Siting: "structure"}
		v.Start, v.Processing, v.Channel, v.SourceFormat = quakeTime, "raw", "HNE", "a"
		return v
	}
	for _, test := range []struct {
		name   string
		change func(v *db.Version)
		want   bool
	}{
		{"nothing else", func(*db.Version) {}, true},
		{"another format", func(v *db.Version) { v.SourceFormat = "b" }, true},
		{"no network", func(v *db.Version) { v.Network = "" }, true},
		{"no instrument", func(v *db.Version) { v.Instrument = "" }, true},
		{"no channel, in a structure", func(v *db.Version) { v.Channel = "" }, false},
		{"another channel", func(v *db.Version) { v.Channel, v.SourceFormat = "HNN", "b" }, false},
		{"another instrument", func(v *db.Version) { v.Instrument, v.SourceFormat = "10", "b" }, false},
		{"another network", func(v *db.Version) { v.Network = "YY" }, false},
		{"another siting", func(v *db.Version) { v.Siting = "free-field" }, false},
		{"raw as well", func(v *db.Version) { v.Processing = "raw" }, false},
		{"no time", func(v *db.Version) { v.Start = time.Time{} }, false},
		{"no event", func(v *db.Version) { v.EventID = 0 }, false},
		{"no station", func(v *db.Version) { v.StationCode = "" }, false},
		{"another file", func(v *db.Version) { v.SourceSHA256 = "other" }, true},
	} {
		a, b := full(), full()
		a.SourceSHA256, b.SourceSHA256, b.Processing = "a", "b", "corrected"
		test.change(b)
		if got := isOneSensorProcessed(a, b); got != test.want || isOneSensorProcessed(b, a) != got {
			t.Errorf("%s: %v, want %v", test.name, got, test.want)
		}
	}
	a, b := full(), full()
	a.SourceSHA256, b.SourceSHA256, b.Processing = "a", "b", "corrected"
	a.Siting, b.Siting, a.Channel = "unknown", "free-field", ""
	if !isOneSensorProcessed(a, b) {
		t.Error("no channel, not known to be in a structure: not one sensor")
	}
}
