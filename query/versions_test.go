package query

import (
	"fmt"
	"math"
	"testing"
	"time"

	"swaybook/db"
)

// version is an invented component that holds motion 1.
func version(id int64, edit func(*db.Version)) db.Version {
	v := db.Version{ComponentID: id, RecordID: id, RecordCode: fmt.Sprint("R", id), MotionID: 1, Component: db.Component{
		Role: db.RoleH1, Processing: "raw", StepS: 0.01, Samples: 1000, SourcePath: fmt.Sprint("p", id)}}
	edit(&v)
	return v
}

func TestByPreference(t *testing.T) {
	second := version(5, func(v *db.Version) { v.Role = db.RoleH2 })
	found := []db.Version{
		version(1, func(*db.Version) {}),
		version(2, func(v *db.Version) { v.Samples = 2000 }),
		version(3, func(v *db.Version) { v.Processing, v.LowCutHz, v.HighCutHz = "corrected", ptr(0.2), ptr(20.0) }),
		version(4, func(v *db.Version) { v.Processing, v.LowCutHz, v.HighCutHz = "corrected", ptr(0.1), ptr(20.0) }),
		version(5, func(*db.Version) {}), second,
		version(6, func(v *db.Version) { v.Processing = "mean-removed" }),
		version(7, func(v *db.Version) { v.Start = time.Now() }),
		version(8, func(v *db.Version) { v.StepS, v.Samples = 0.02, 500 }), // 9.98 s of 9.99
		version(9, func(v *db.Version) { v.StepS, v.Samples = 0.005, 1999 }),
		version(10, func(v *db.Version) { v.Processing, v.LowCutHz, v.HighCutHz = "corrected", ptr(0.05), ptr(20.0) }),
		version(10, func(v *db.Version) { // as good as its worse component, whichever was read first
			v.Role, v.Processing, v.LowCutHz, v.HighCutHz = db.RoleV, "corrected", ptr(0.3), ptr(20.0)
		}),
	}
	byRecord := map[int64][]*db.Version{}
	for i := range found {
		byRecord[found[i].RecordID] = append(byRecord[found[i].RecordID], &found[i])
	}
	if got, want := fmt.Sprint(byPreference(byRecord)), "[5 4 3 10 6 2 9 1 7 8]"; got != want {
		t.Errorf("got %s, want %s", got, want)
	}
}

// A version stands in at the periods at which the better one cannot be believed, and
// nowhere else.
func TestVersionsCompleteOneAnother(t *testing.T) {
	versions := []motion{motionOf(1, "A"), motionOf(2, "B"), motionOf(3, "C"), motionOf(4, "D")}
	v := versions4()
	nan := math.NaN()
	o := &ordinates{oscillators: dampedBy(0.05, []float64{1, 2, 3}), motions: 4, sd: []float64{
		1, 2, 3, 4,
		nan, 2, 3, 4,
		nan, nan, 3, nan,
	}}
	without, standIns := o.keepBest(v.rivals(versions), -1, map[int]string{})
	want := []float64{1, nan, nan, 4, nan, 2, nan, 4, nan, nan, 3, nan}
	if fmt.Sprint(o.sd) != fmt.Sprint(want) || standIns != 2 || len(without) != 0 {
		t.Errorf("%v, %d stand in, without %v; want %v, 2, none", o.sd, standIns, without, want)
	}
}

// motionOf is a motion of one component of the record.
func motionOf(record int64, code string) motion {
	return motion{role: db.RoleH1, members: []*db.HeldComponent{{RecordID: record, Record: &db.Record{Code: code}, Component: db.Component{Role: db.RoleH1}}}}
}

// versions4 says that records 1, 2 and 3, preferred in this order, hold one motion.
func versions4() *versions {
	key := func(record int64) componentKey { return componentKey{record, db.RoleH1} }
	return &versions{motion: map[componentKey]int64{key(1): 7, key(2): 7, key(3): 7}, rank: map[int64]int{1: 0, 2: 1, 3: 2}}
}

// Of versions statistics take the best of those that a question is about: one that
// is left out for its siting stands in nobody's way.
func TestVersionsInStatistics(t *testing.T) {
	records := []inventedRecord{
		{code: "A", siting: "structure", components: pair(1, 1)},
		{code: "B", siting: "free-field", components: pair(2, 2)},
		{code: "C", siting: "free-field", components: pair(3, 3)},
		{code: "D", siting: "free-field", components: pair(4, 4)},
	}
	store := newStore(t, handGrid, records)
	err := change(t.Context(), store, func(tx *db.Tx) error {
		var first []db.Version
		for _, code := range []string{"A", "B", "C"} { // D is another motion
			r, _, err := tx.FindRecord(t.Context(), code)
			if err != nil {
				return err
			}
			found, err := tx.VersionsOf(t.Context(), r.ID)
			if err != nil {
				return err
			}
			if first == nil {
				first = found
			}
			for i, v := range found {
				if err := tx.SetMotion(t.Context(), v.ComponentID, first[i].ComponentID); err != nil {
					return err
				}
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	for _, test := range []struct {
		selection Selection
		records   int
		reasons   string
	}{
		{Selection{}, 2, "[1 record left out: another version of the motion is taken 1 record left out: siting structure]"},
		{Selection{Siting: SitingAll}, 2, "[2 records left out: another version of the motion is taken]"},
		{Selection{Siting: SitingAll, IncludeDuplicates: true}, 4, "[]"},
		{Selection{Siting: SitingAll, Component: ComponentEach}, 2, "[2 records left out: another version of the motion is taken]"},
		{Selection{Where: `record != "B"`}, 2, "[1 record left out: siting structure]"},
	} {
		answer, err := SpectrumQuestion{Selection: test.selection, Damping: 0.02}.Ask(t.Context(), store)
		if err != nil {
			t.Fatal(err)
		}
		if got := fmt.Sprint(answer.Selection.LeftOut); answer.Selection.Records != test.records || got != test.reasons {
			t.Errorf("%+v: %d records, left out %s; want %d, %s", test.selection, answer.Selection.Records, got, test.records, test.reasons)
		}
	}
	list, err := RecordsQuestion{Selection: Selection{Component: ComponentH1}}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, row := range list.Rows {
		got = append(got, row.Record+":"+orEmpty(row.DuplicateOf))
	}
	if fmt.Sprint(got) != "[A: B:A C:A D:]" {
		t.Errorf("duplicates %v", got)
	}
}
