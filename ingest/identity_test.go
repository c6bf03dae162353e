package ingest

import (
	"strings"
	"testing"
	"time"
	"unicode/utf8"
)

func TestRecordID(t *testing.T) {
	origin := time.Date(2041, 3, 4, 8, 12, 0, 0, time.FixedZone("JST", 9*3600))
	cases := []struct {
		name    string
		channel Channel
		want    string
		header  bool
	}{
		{"codes", Channel{Event: Event{ID: "nw2041abc", Origin: origin}, Station: Station{Network: "CE", Code: "54730", Name: "Mill"}}, "nw2041abc_CE.54730", true},
		{"origin", Channel{Event: Event{Origin: origin}, Station: Station{Code: "ABC001"}}, "20410303T231200_ABC001", true},
		{"instrument", Channel{Event: Event{Origin: origin}, Station: Station{Network: "CE", Code: "54730"}, Instrument: "Freefield"}, "20410303T231200_CE.54730_freefield", true},
		{"names", Channel{Event: Event{Name: "North Water, M. 5"}, Station: Station{Name: "Cañon del Río (upper)"}}, "north-water-m-5_canon-del-rio-upper", true},
		{"name and day", Channel{Event: Event{Name: "Northwater", Date: time.Date(2041, 3, 4, 0, 0, 0, 0, time.UTC)}, Station: Station{Code: "A"}}, "northwater-20410304_A", true},
		{"start", Channel{Start: origin, Station: Station{Code: "A.1"}}, "20410303T231200_A.1", true},
		{"no event", Channel{Station: Station{Code: "A"}}, "quake_12", false},
		{"no station", Channel{Event: Event{ID: "x"}}, "quake_12", false},
		{"illegal characters", Channel{Event: Event{ID: "us/70_00 b"}, Station: Station{Code: "_1_"}}, "us-70-00-b_1", true},
		{"nothing legal", Channel{Event: Event{ID: "//"}, Station: Station{Code: "A"}}, "quake_12", false},
		{"other letters", Channel{Event: Event{ID: "e"}, Station: Station{Name: "東京"}}, "e_68dea76f", true},
	}
	for _, k := range cases {
		if got, header := RecordID(&k.channel, "quake_12_NS"); got != k.want || header != k.header {
			t.Errorf("%s: RecordID = %s, %v, want %s, %v", k.name, got, header, k.want, k.header)
		}
	}
	if got, _ := RecordID(&Channel{}, "///"); got != "record" {
		t.Errorf("RecordID without anything = %q, want record", got)
	}
}

// TestRecordIDBounds holds ids of long and odd texts to the characters and the
// length that RecordID promises, and apart from each other.
func TestRecordIDBounds(t *testing.T) {
	seen := map[string]string{}
	for _, s := range []string{strings.Repeat("long name ", 40), strings.Repeat("long name ", 41), "\xff\xfe", "日本", "日本国", "…", "a_b", "-", ".."} {
		c := Channel{Event: Event{Name: s, Date: time.Date(2041, 1, 1, 0, 0, 0, 0, time.UTC)}, Station: Station{Network: s, Code: s}, Instrument: s}
		for _, id := range []string{first(RecordID(&c, s)), first(RecordID(&Channel{}, s))} {
			if id == "" || len(id) > 160 || strings.Trim(id, "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789.-_") != "" {
				t.Errorf("RecordID for %q = %q", s, id)
			}
			if other, ok := seen[id]; ok && other != s && id != "record" {
				t.Errorf("%q and %q share the id %s", s, other, id)
			}
			seen[id] = s
		}
	}
}

func first[A, B any](a A, _ B) A { return a }

func TestSplitStem(t *testing.T) {
	cases := []struct {
		stem, base string
		want       string // axis, azimuth and rank in short
	}{
		{"quake_H1", "quake", "h #1"}, {"quake-h2", "quake", "h #2"}, {"quake.V", "quake", "v"},
		{"quake_N", "quake", "h 0"}, {"quake_E", "quake", "h 90"}, {"quake Z", "quake", "v"}, {"quake_S", "quake", "h 180"}, {"quake_W", "quake", "h 270"},
		{"quake_NS", "quake", "h 0"}, {"quake_ew", "quake", "h 90"}, {"quake_UD", "quake", "v"}, {"quake_N-S", "quake", "h 0"}, {"quake-E-W", "quake", "h 90"},
		{"ABC_HNE", "ABC_HN", "h 90"}, {"XX.ABC.00.BNZ", "XX.ABC.00_BN", "v"}, {"HNN", "HNN", "h 0"}, {"EQ1_HGN", "EQ1_HGN", ""}, {"EQ1_BGE", "EQ1_BGE", ""}, {"EQ1_FNE", "EQ1_FNE", ""}, {"EQ1_BLN", "EQ1_BLN", ""}, {"ABC_HN1", "ABC_HN1", ""}, {"ABC_HHZ", "ABC_HHZ", ""}, {"2041_ene", "2041_ene", ""},
		{"XYZ_NS1", "XYZ_1", "h 0"}, {"XYZ_EW2", "XYZ_2", "h 90"}, {"ABC0014103040812NS2", "ABC0014103040812_2", "h 0"}, {"ABC001EW", "ABC001", "h 90"},
		{"XYZ000", "XYZ", "h 0"}, {"XYZ090", "XYZ", "h 90"}, {"XYZ360", "XYZ", "h 0"}, {"XYZ-UP", "XYZ", "v"}, {"XYZ-DWN", "XYZ", "v"}, {"quake_230", "quake", "h 230"},
		{"RSN123_NORTHWATER_CDH090", "RSN123_NORTHWATER_CDH", "h 90"}, {"RSN123_NORTHWATER_CDHUP", "RSN123_NORTHWATER_CDH", "v"}, {"RSN9_NW_RIVERVER", "RSN9_NW_RIVER", "v"},
		{"quake_L", "quake", "h #1"}, {"quake_T", "quake", "h #2"}, {"quake_long", "quake", "h #1"}, {"quake_TRAN", "quake", "h #2"}, {"quake_VERT", "quake", "v"},
		{"NS", "NS", "h 0"}, {"090", "090", "h 90"}, {"_NS", "_NS", ""},
		// What only looks like a direction.
		{"motion_1", "motion_1", ""}, {"motion_2", "motion_2", ""}, {"quake-1", "quake-1", ""}, {"1", "1", ""}, {"2", "2", ""},
		{"CHAN006", "CHAN006", ""}, {"rec_001", "rec_001", ""}, {"rec_361", "rec_361", ""}, {"ST01090", "ST01090", ""}, {"20410304", "20410304", ""},
		{"RIVER", "RIVER", ""}, {"PLAINS", "PLAINS", ""}, {"GROUP", "GROUP", ""}, {"rec_3", "rec_3", ""}, {"rec_12", "rec_12", ""}, {"", "", ""}, {"quake", "quake", ""},
	}
	for _, k := range cases {
		base, o := SplitStem(k.stem)
		if base != k.base || short(o) != k.want {
			t.Errorf("SplitStem(%q) = %q, %q, want %q, %q", k.stem, base, short(o), k.base, k.want)
		}
	}
}

// A number of three digits may count files: it is taken, and that is said.
func TestCheckStem(t *testing.T) {
	for stem, want := range map[string]string{
		"motion_050": "direction 50° taken from the file's name", "CDH230": "direction 230° taken from the file's name",
		"motion_000": "", "motion_090": "", "motion_180": "", "motion_270": "", "motion_360": "", "motion_HNE": "direction of channel HNE taken from the file's name", "HNZ": "direction of channel HNZ taken from the file's name", "motion_N": "", "motion_1": "", "motion": "",
	} {
		_, o := SplitStem(stem)
		c := Channel{Orientation: o}
		if c.CheckStem(stem); strings.Join(c.Warnings, "; ") != want {
			t.Errorf("%s: warnings %q, want %q", stem, c.Warnings, want)
		}
	}
	other := Channel{Orientation: azimuth(20)}
	if other.CheckStem("motion_050"); len(other.Warnings) > 0 {
		t.Errorf("the catalogue's azimuth: warnings %q", other.Warnings)
	}
	for _, station := range []Station{{Code: "HNN"}, {Code: "hnn"}, {Name: "HNN"}} {
		_, o := SplitStem("EQ1_HNN")
		c := Channel{Station: station, Orientation: o}
		c.CheckStem("EQ1_HNN")
		if id, _ := RecordID(&c, "EQ1_HNN"); c.Orientation != (Orientation{}) || len(c.Warnings) > 0 || id != "EQ1_HNN" {
			t.Errorf("station %+v in the name: %+v, warnings %q, record %s", station, c.Orientation, c.Warnings, id)
		}
	}
}

func FuzzIdentity(f *testing.F) {
	f.Add("RSN123_NORTHWATER_CDH090")
	f.Add("ABC001NS2")
	f.Fuzz(func(t *testing.T, stem string) {
		base, o := SplitStem(stem)
		if base == "" && stem != "" || o.AzimuthDeg.Known && !(o.AzimuthDeg.Value >= 0 && o.AzimuthDeg.Value < 360) {
			t.Errorf("SplitStem(%q) = %q, %+v", stem, base, o)
		}
		id, _ := RecordID(&Channel{Event: Event{ID: stem}, Station: Station{Name: stem}}, stem)
		if id == "" || len(id) > 160 || !utf8.ValidString(id) || strings.ContainsAny(id, " /\\:") {
			t.Errorf("RecordID for %q = %q", stem, id)
		}
	})
}
