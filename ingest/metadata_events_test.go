package ingest

import (
	"fmt"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/ingest/fdsnxml"
)

// Events are held to the limits that headers are, and what is doubtful is noted.
func TestEventsWithinLimits(t *testing.T) {
	magnitude := func(v string) string {
		return "<magnitude><mag><value>" + v + "</value></mag><type>Mw</type></magnitude>"
	}
	m, notes := readDocument(t, quakeML(
		[4]string{` publicID="a"`, "2041-03-04T08:12:00Z", "41", magnitude("10")},
		[4]string{` publicID="b"`, "2041-03-04T08:13:00Z", "41", magnitude("10.5")},
		[4]string{` publicID="c"`, "2041-03-04T08:14:00Z", "41", magnitude("-2.5") + magnitude("3")},
		[4]string{` publicID="d"`, "2041-03-04T08:15:00Z", "0.5", "<type>not existing</type>"},
		[4]string{` publicID="e"`, "2041-03-04T08:16:00Z", "", ""},
	))
	const want = `doc.xml:5: event d: its type is "not existing": left out
doc.xml:6: event e: no latitude or no longitude: left out
doc.xml:3: event b: magnitude 10.5 is outside -2 to 10: taken as unknown
doc.xml:4: event c: of 2 magnitudes none is preferred: a moment magnitude taken, else the first
doc.xml:4: event c: magnitude -2.5 is outside -2 to 10: taken as unknown`
	if notes != want {
		t.Errorf("notes\n%s\nwant\n%s", notes, want)
	}
	var got []string
	for _, e := range m.Events() {
		got = append(got, fmt.Sprint(e.PublicID, e.Magnitude, e.MagnitudeType))
	}
	if want := "[a{10 true}Mw b{0 false} c{0 false}]"; fmt.Sprint(got) != want {
		t.Errorf("events %v, want %s", got, want)
	}
}

// Events without an identifier are told apart by time and place, in one document
// and in several.
func TestEventsWithoutIdentifier(t *testing.T) {
	document := quakeML([4]string{"", "2041-03-04T09:00:00Z", "41.5", ""}, [4]string{"", "2041-03-04T08:00:00.25Z", "41", ""}, [4]string{"", "2041-03-04T08:00:00.25Z", "42", ""})
	m, _ := readDocument(t, document)
	if _, err := m.Add(t.Context(), "copy.xml", []byte(document)); err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, e := range m.Events() {
		got = append(got, e.PublicID+" "+e.ID)
	}
	want := []string{
		"20410304T080000.25Z_41_14 20410304T080000.25Z_41_14", "20410304T080000.25Z_42_14 20410304T080000.25Z_42_14",
		"20410304T090000Z_41.5_14 20410304T090000Z_41.5_14",
	}
	if !slices.Equal(got, want) {
		t.Errorf("events %q, want %q", got, want)
	}
}

// Events come in the order of their times, however they are spread over documents,
// and of two with one identifier the last read stays, or the later one by what both say.
func TestEventsAreInOrder(t *testing.T) {
	var m Metadata
	for document, minutes := range [][]int{{5, 1}, {}, {3, 9, 1, 0}, {7}, {2, 4}} {
		var events []fdsnxml.Event
		for _, at := range minutes {
			events = append(events, fdsnxml.Event{PublicID: fmt.Sprint("smi:invented/", at), Origin: mseedStart.Add(time.Duration(at) * time.Minute), Name: fmt.Sprint(document)})
		}
		m.addEvents("doc.xml", events)
		m.Events() // one that was asked for before is no more in order
	}
	var got []string
	for _, e := range m.Events() {
		got = append(got, e.ID+"/"+e.Name)
	}
	if want := "0/2 1/2 2/4 3/2 4/4 5/0 7/3 9/2"; strings.Join(got, " ") != want {
		t.Errorf("events %v, want %s", got, want)
	}
	for i, days := range []int{2, 3, 1} { // when the versions came about
		m.addEvents("doc.xml", []fdsnxml.Event{{PublicID: "smi:invented/3", Origin: mseedStart, Created: mseedStart.AddDate(0, 0, days), Name: fmt.Sprint(i)}})
	}
	if e, ok := m.Event("smi:invented/3"); !ok || e.Name != "1" || !e.Origin.Equal(mseedStart) {
		t.Errorf("of three versions %+v, want the second", e)
	}
	if _, ok := m.Event("smi:invented/8"); ok || len(m.Events()) != 8 {
		t.Errorf("%d events", len(m.Events()))
	}
}

// A document that says that there was no such event takes away what others say of it,
// unless one of these says that it is later; whichever is read first.
func TestWithdrawnEvents(t *testing.T) {
	made := func(day int) string {
		if day == 0 {
			return ""
		}
		return fmt.Sprintf("<creationInfo><creationTime>2041-03-%02dT00:00:00Z</creationTime></creationInfo>", day)
	}
	for _, tt := range []struct {
		event, withdrawal int // days, 0 for none
		kind              string
		stands            bool
	}{
		{5, 6, "not existing", false}, {5, 6, "not locatable", false},
		{5, 5, "not existing", false}, {6, 5, "not existing", true}, {6, 5, "not locatable", true},
		{0, 5, "not existing", false}, {5, 0, "not existing", false}, {0, 0, "not existing", false},
		{5, 6, "earthquake", true}, {5, 6, "not reported", true},
	} {
		said := quakeML([4]string{` publicID="a"`, "2041-03-04T08:12:00Z", "41", made(tt.event)}, [4]string{` publicID="b"`, "2041-03-04T08:13:00Z", "41", ""})
		withdrawal := quakeML([4]string{` publicID="a"`, "2041-03-04T08:12:00Z", "41", made(tt.withdrawal) + "<type>" + tt.kind + "</type>"})
		for _, documents := range [][]string{{said, withdrawal}, {withdrawal, said}, {withdrawal, said, withdrawal}} {
			m := &Metadata{}
			for _, d := range documents {
				if _, err := m.Add(t.Context(), "doc.xml", []byte(d)); err != nil {
					t.Fatal(err)
				}
				m.Events()
			}
			_, stands := m.Event("a")
			if listed := len(m.Events()) == 2; stands != tt.stands || listed != tt.stands {
				t.Errorf("%+v, %d documents: stands %v, listed %v", tt, len(documents), stands, listed)
			}
		}
	}
	m := &Metadata{}
	if _, err := m.Add(t.Context(), "doc.xml", []byte(quakeML([4]string{` publicID="a"`, "", "", made(5) + "<type>not existing</type>"}))); err != nil || m.IsEmpty() {
		t.Errorf("a withdrawal alone: empty %v, %v", m.IsEmpty(), err)
	}
	for day, want := range map[int]bool{4: true, 5: true, 6: false} {
		if got := m.Withdraws("a", time.Date(2041, 3, day, 0, 0, 0, 0, time.UTC)); got != want {
			t.Errorf("a version of day %d is withdrawn: %v, want %v", day, got, want)
		}
	}
	if !m.Withdraws("a", time.Time{}) || m.Withdraws("b", time.Time{}) {
		t.Error("a version of no time is not withdrawn, or one of another event is")
	}
}
