package pipeline

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"math/rand/v2"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline/likeness"
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
		{"small letters", csvOf(1, 1, 2), "zcopy.csv,invented-20260312,SITE-00,000\n", "invented-20260312_SITE-00 h1 invented-20260312_site-00, invented-20260312_site-00 h1 -"},
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
			if len(found) > 0 && found[0].MotionID != found[0].ComponentID { // in the order of ids
				t.Errorf("%v: motion %d of component %d, want the least", files, found[0].MotionID, found[0].ComponentID)
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

// Records are related by way of others, from whichever one starts: by event and station,
// by equal samples that nothing forbids, and whatever the network.
func TestRelatedByWayOfOthers(t *testing.T) {
	dir := t.TempDir()
	for name, text := range map[string]string{
		"a.csv": csvOf(1, 1, 2), "b.csv": csvOf(2, 1, 2), "c/copy.csv": "# again\n" + csvOf(2, 1, 2), "d/copy.csv": "# and again\n" + csvOf(2, 1, 2),
		"e.csv": csvOf(3, 1, 2), "f.csv": "# of another station\n" + csvOf(1, 1, 2),
	} {
		put(t, dir, name, text)
	}
	store, opts := newStore(t), options(dir)
	opts.Catalogue = catalogue(t, "file,event,station,network,component\na.csv,EV1,S1,AA,000\nb.csv,EV1,S1,AA,000\nc/copy.csv,,,,000\nd/copy.csv,,,,000\n"+
		"e.csv,EV1,S1,,000\nf.csv,EV1,S2,AA,000\n")
	run(t, store, opts)
	var records []int64
	of := map[int64]string{}
	for _, c := range componentsOf(t, store) {
		records = append(records, c.RecordID)
		of[c.RecordID] = strings.TrimPrefix(filepath.ToSlash(c.SourcePath), filepath.ToSlash(dir)+"/")
	}
	err := change(t.Context(), store, func(tx *db.Tx) error {
		for id := range of { // which would relate them, too
			held, err := tx.VersionsOf(t.Context(), id)
			if err != nil {
				return err
			}
			if err := tx.SetMotion(t.Context(), held[0].ComponentID, 0); err != nil {
				return err
			}
		}
		for _, id := range records {
			found, err := newSettler(tx, nil, nil).related(t.Context(), id)
			if err != nil {
				return err
			}
			var names []string
			for _, r := range found {
				names = append(names, of[r])
			}
			slices.Sort(names)
			want := "a.csv b.csv c/copy.csv d/copy.csv e.csv"
			if of[id] == "f.csv" {
				want = "f.csv"
			}
			if got := strings.Join(names, " "); got != want {
				t.Errorf("%s is related to %s, want %s", of[id], got, want)
			}
		}
		return nil
	})
	if err != nil || len(records) != 6 {
		t.Fatalf("%d records, %v", len(records), err)
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

// versionsOf numbers invented components, each of a record, a file and samples of its
// own unless they are given.
func versionsOf(of ...db.Version) []*db.Version {
	all := make([]*db.Version, len(of))
	for i := range of {
		v := of[i]
		v.ComponentID, v.RecordID = int64(i+1), int64(i+1)
		v.Digest, v.SourceSHA256 = cmp.Or(v.Digest, fmt.Sprint(i)), cmp.Or(v.SourceSHA256, fmt.Sprint(i))
		all[i] = &v
	}
	return all
}

// sensor is a component of this format and channel in a structure.
func sensor(format, channel string) db.Version {
	v := db.Version{Siting: "structure", EventID: 1, StationCode: "AAA"}
	v.SourceFormat, v.Channel, v.Axis = format, channel, "vertical"
	return v
}

// components stores so many that have nothing to do with each other, with
// the ids from 1 on.
func components(t *testing.T, n int) *db.Store {
	t.Helper()
	dir, table := t.TempDir(), "file,event,station,component\n"
	for i := range n {
		put(t, dir, fmt.Sprintf("%02d.csv", i), csvOf(uint64(i), 1, 2))
		table += fmt.Sprintf("%02d.csv,EV%d,S%d,000\n", i, i, i)
	}
	store, opts := newStore(t), options(dir)
	opts.Catalogue = catalogue(t, table)
	run(t, store, opts)
	return store
}

// motionsOf returns the motion of each component with these likenesses, and leaves the
// store as it was.
func motionsOf(t *testing.T, store *db.Store, all []*db.Version, likes []db.Likeness) []int64 {
	t.Helper()
	var motions []int64
	back := errors.New("as it was")
	err := change(t.Context(), store, func(tx *db.Tx) error {
		for _, l := range likes {
			if err := tx.PutLikeness(t.Context(), l); err != nil {
				return err
			}
		}
		var err error
		motions, err = newSettler(tx, nil, nil).motions(t.Context(), all)
		return cmp.Or(err, back)
	})
	if err != back {
		t.Fatal(err)
	}
	return motions
}

// What one sensor gave is one motion with what it is most like, not with that of the
// sensor beside it, which it is like, too; and no third one makes one of two sensors.
func TestSensorsSideBySide(t *testing.T) {
	type pair struct {
		a, b     int
		strength float64
	}
	store := components(t, 5)
	for _, test := range []struct {
		name  string
		all   []*db.Version
		likes []pair
		want  []int64
	}{
		{
			"each its own",
			versionsOf(sensor("a", "5"), sensor("a", "6"), sensor("b", "X"), sensor("b", "Y"), sensor("c", "")),
			[]pair{{2, 0, 0.999}, {2, 1, 0.995}, {3, 0, 0.994}, {3, 1, 0.998}, {4, 0, 0.996}, {4, 2, 0.997}, {4, 1, 0.993}},
			[]int64{1, 2, 1, 2, 1},
		},
		{
			"what is most like a sensor that another one is nearer to is not of the next",
			versionsOf(sensor("a", "5"), sensor("a", "6"), sensor("b", "X"), sensor("b", "Y")),
			[]pair{{3, 0, 0.999}, {2, 0, 0.998}, {2, 1, 0.995}},
			[]int64{1, 0, 0, 1},
		},
		{
			"two that are most like each other, beside two sensors",
			versionsOf(sensor("a", "5"), sensor("a", "6"), sensor("b", ""), sensor("c", "")),
			[]pair{{2, 0, 0.996}, {2, 1, 0.995}, {3, 1, 0.9961}, {3, 0, 0.995}, {3, 2, 0.9999}},
			[]int64{0, 2, 2, 2},
		},
		{
			"the same, as much alike",
			versionsOf(sensor("a", "5"), sensor("a", "6"), sensor("b", ""), sensor("c", "")),
			[]pair{{2, 0, 0.996}, {2, 1, 0.995}, {3, 1, 0.996}, {3, 0, 0.995}, {3, 2, 0.9999}},
			[]int64{1, 0, 1, 1},
		},
		{
			"two sensors with the same samples but for a factor",
			versionsOf(sensor("a", "5"), sensor("a", "6"), sensor("b", "")),
			[]pair{{1, 0, 1}, {2, 0, 0.996}, {2, 1, 0.996}},
			[]int64{1, 1, 1},
		},
		{
			"what is apart stays so in a greater group",
			versionsOf(sensor("a", "5"), sensor("b", ""), sensor("a", "6"), sensor("c", ""), sensor("d", "")),
			[]pair{{1, 0, 0.999}, {3, 2, 0.998}, {4, 3, 0.997}, {3, 1, 0.996}, {4, 1, 0.995}, {4, 0, 0.994}},
			[]int64{1, 1, 3, 3, 3},
		},
	} {
		t.Run(test.name, func(t *testing.T) {
			var likes []db.Likeness
			for i := range test.all {
				for j := range i {
					l := db.Likeness{FirstID: int64(j + 1), SecondID: int64(i + 1), Kind: "different"}
					for _, p := range test.likes {
						if p.a == i && p.b == j {
							l.Kind, l.Correlation = "similar", p.strength
							if p.strength == 1 {
								l.Kind = "scaled"
							}
						}
					}
					likes = append(likes, l)
				}
			}
			if got := motionsOf(t, store, test.all, likes); !slices.Equal(got, test.want) {
				t.Errorf("motions %v, want %v", got, test.want)
			}
		})
	}
}

// Equal samples are one motion whatever the rest, unless what is said forbids it, and
// never within a record.
func TestEqualSamples(t *testing.T) {
	equal := func(change func(v *db.Version)) db.Version {
		v := sensor("a", "")
		v.Digest = "equal"
		change(&v)
		return v
	}
	all := versionsOf(
		equal(func(*db.Version) {}),
		equal(func(*db.Version) {}),
		equal(func(v *db.Version) { v.Channel = "5" }),
		equal(func(v *db.Version) { v.StationCode = "BBB" }),
		equal(func(v *db.Version) { v.StationCode, v.Channel = "BBB", "6" }),
		equal(func(v *db.Version) { v.StationCode = "CCC" }),
		equal(func(v *db.Version) { v.StationCode = "CCC" }),
		equal(func(v *db.Version) { v.StationCode, v.Channel = "CCC", "7" }),
		equal(func(v *db.Version) { v.StationCode = "DDD" }),
		equal(func(v *db.Version) { v.StationCode = "DDD" }),
		equal(func(v *db.Version) { v.StationCode, v.Channel = "DDD", "8" }),
	)
	for _, v := range all[5:8] {
		v.RecordID = 6
	}
	all[10].RecordID = all[8].RecordID // one with the record between them
	got, err := (&settler{}).motions(t.Context(), all)
	if want := []int64{1, 1, 1, 4, 4, 0, 0, 0, 9, 9, 9}; err != nil || !slices.Equal(got, want) {
		t.Errorf("motions %v, %v, want %v", got, err, want)
	}
	stopped, stop := context.WithCancel(t.Context())
	stop()
	if _, err := (&settler{}).motions(stopped, all); !errors.Is(err, context.Canceled) {
		t.Errorf("stopped: %v", err)
	}
}

// One sensor has what is near to each other only at the times that are stated.
func TestNearAtStatedTimes(t *testing.T) {
	store := components(t, 2)
	for _, test := range []struct {
		startsAfterS, lagS float64 // of the corrected one, as stated and by the samples
		want               bool
	}{
		{0, 0, true}, {0, 1.5, true}, {0, -1.5, true}, {0, 1.51, false}, {0, -1.51, false},
		{20, 20.4, true}, {-20, -19.6, true}, {20, 0, false}, {20, -20, false}, {-20, 20, false},
	} {
		raw, corrected := sensor("a", "5"), sensor("b", "5")
		raw.Processing, corrected.Processing = "raw", "corrected"
		raw.Samples, raw.StepS, corrected.Samples, corrected.StepS = 10000, 0.01, 10000, 0.01
		raw.Start, corrected.Start = quakeTime, quakeTime.Add(time.Duration(test.startsAfterS*float64(time.Second)))
		for _, all := range [][]*db.Version{versionsOf(raw, corrected), versionsOf(corrected, raw)} {
			l := db.Likeness{FirstID: 1, SecondID: 2, Kind: "near", BandCorrelation: 0.9, LagS: test.lagS} // of the first after the second
			if all[0].Processing == "raw" {
				l.LagS = -test.lagS
			}
			if got := motionsOf(t, store, all, []db.Likeness{l}); slices.Equal(got, []int64{1, 1}) != test.want {
				t.Errorf("%+v, %s first: motions %v", test, all[0].Processing, got)
			}
		}
	}
}

// The lag is that of the one asked for after the other, whichever is stored first, and
// of equal samples the same.
func TestLagOfComponents(t *testing.T) {
	dir := t.TempDir()
	text := csvOf(1, 1, 2)
	lines := strings.SplitAfter(text, "\n")
	put(t, dir, "a.csv", text)
	put(t, dir, "b.csv", strings.Join(append(slices.Clone(lines[:2]), lines[2+80:]...), ""))
	put(t, dir, "c.csv", "# again\n"+text)
	store, opts := newStore(t), options(dir)
	opts.Catalogue = catalogue(t, "file,event,station,component\na.csv,EV1,S1,000\nb.csv,EV2,S2,000\nc.csv,EV3,S3,000\n")
	run(t, store, opts)
	err := change(t.Context(), store, func(tx *db.Tx) error {
		c := newComparison(tx, &likeness.Comparer{}, mostSamples)
		var all []*db.Version
		for id := range int64(3) {
			found, err := tx.VersionsOf(t.Context(), id+1)
			if err != nil || len(found) != 1 {
				t.Fatalf("record %d: %v, %v", id+1, found, err)
			}
			all = append(all, &found[0])
			c.add(all[id])
		}
		for range 2 { // compared, then read
			for _, of := range []struct {
				a, b int
				want float64
			}{{0, 1, -0.8}, {1, 0, 0.8}, {2, 1, -0.8}, {1, 2, 0.8}} {
				l, err := c.of(t.Context(), all[of.a], all[of.b])
				if err != nil || l.Kind != "identical" || l.LagS != of.want || l.FirstID != 1 || l.SecondID != 2 {
					t.Errorf("%+v: %+v, %v", of, l, err)
				}
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
}

// What is held of motions stays within its bound, and nothing that is said of them
// depends on it.
func TestHeldMotions(t *testing.T) {
	const n, samples = 7, 600
	store := components(t, n)
	var want []db.Likeness
	for _, test := range []struct{ most, held int }{{n * samples, n}, {4 * samples, 4}, {3*samples - 1, 2}, {0, 2}} {
		back := errors.New("as it was")
		err := change(t.Context(), store, func(tx *db.Tx) error {
			c := newComparison(tx, &likeness.Comparer{}, test.most)
			var got []db.Likeness
			var all []*db.Version
			for id := range int64(n) {
				found, err := tx.VersionsOf(t.Context(), id+1)
				if err != nil {
					return err
				}
				all = append(all, &found[0])
				c.add(all[id])
				for j := range id {
					l, err := c.of(t.Context(), all[id], all[j])
					if err != nil {
						return err
					}
					got = append(got, l)
					if len(c.held.of) > test.held || len(c.held.order) != len(c.held.of) || c.held.samples != samples*len(c.held.of) {
						t.Fatalf("at most %d samples: %d in %d motions, %v", test.most, c.held.samples, len(c.held.of), c.held.order)
					}
				}
			}
			if len(c.held.of) != test.held {
				t.Errorf("at most %d samples: %d motions, want %d", test.most, len(c.held.of), test.held)
			}
			if want == nil {
				want = got
			}
			if !slices.Equal(got, want) {
				t.Errorf("at most %d samples: %v, want %v", test.most, got, want)
			}
			return back
		})
		if err != back {
			t.Fatal(err)
		}
	}
}

// BenchmarkMotions has components of one event, station and direction with equal
// samples: of which the same is said, and of which each has a channel of its own.
func BenchmarkMotions(b *testing.B) {
	for _, said := range []string{"same", "other"} {
		for _, n := range []int{100, 400, 1600} {
			b.Run(fmt.Sprintf("said=%s/equal=%d", said, n), func(b *testing.B) {
				of := make([]db.Version, n)
				for i := range of {
					of[i] = sensor("a", "")
					if of[i].Digest = "equal"; said == "other" {
						of[i].Channel = fmt.Sprint(i)
					}
				}
				all := versionsOf(of...)
				for b.Loop() {
					if _, err := (&settler{}).motions(b.Context(), all); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
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
		{"raw but for the mean", func(v *db.Version) { v.Processing = "mean-removed" }, false},
		{"unknown state", func(v *db.Version) { v.Processing = "unknown" }, false},
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
	for _, test := range []struct {
		a, b string
		want bool
	}{
		{"mean-removed", "corrected", true}, {"mean-removed", "unknown", false}, {"corrected", "unknown", false}, {"corrected", "corrected", false},
		{"unknown", "unknown", false}, {"mean-removed", "mean-removed", false},
	} {
		a, b := full(), full()
		a.Processing, b.Processing = test.a, test.b
		a.SourceSHA256, b.SourceSHA256 = "a", "b"
		if got := isOneSensorProcessed(a, b); got != test.want || isOneSensorProcessed(b, a) != got {
			t.Errorf("%s and %s: %v, want %v", test.a, test.b, got, test.want)
		}
	}
	a, b := full(), full()
	a.SourceSHA256, b.SourceSHA256, b.Processing = "a", "b", "corrected"
	a.Siting, b.Siting, a.Channel = "unknown", "free-field", ""
	if !isOneSensorProcessed(a, b) {
		t.Error("no channel, not known to be in a structure: not one sensor")
	}
}
