package study

import (
	"fmt"
	"reflect"
	"slices"
	"strings"
	"testing"
)

// words is a small vocabulary, of every form of flag.
var words = Vocabulary{
	Ingest: []Flag{
		{Name: "recipe", IsFile: true, Words: []string{"standard"}, IsNeeded: true},
		{Name: "catalogue", IsFile: true}, {Name: "metadata", Form: Repeated, IsFile: true},
		{Name: "periods", Form: List}, {Name: "dt"},
	},
	Selection: []Flag{{Name: "where"}, {Name: "since"}, {Name: "near", Form: List}, {Name: "screen"}},
	Products: map[Kind][]Flag{
		Spectrum: {{Name: "where"}, {Name: "since"}, {Name: "near", Form: List}, {Name: "screen"}, {Name: "damping"}, {Name: "percentiles", Form: List}, {Name: "raw", Form: Switch}},
		Demand:   {{Name: "where"}, {Name: "since"}, {Name: "near", Form: List}, {Name: "screen"}, {Name: "structures", IsFile: true}},
		Records:  {{Name: "where"}, {Name: "since"}, {Name: "near", Form: List}, {Name: "rejected", Form: Switch}},
	},
}

const coast = `name = "Coast of Ardmoor"
store = "coast.db"
sources = [
  "records",
  "/data/more.zip",
]
include = ["*.V2", "2041/**/*.mseed"]
exclude = "old"
catalogue = "catalogue.csv"
metadata = ["a.xml", "b.xml"]
recipe = "standard"
periods = [0.02, "0.05", 1]
dt = 0.005
max-drift = "5%"
keep = 5
state = "out/last-run.json"

[selection.rock]
where = "vs30_m_s >= 600"
since = 2041-07-06

[records.held]
files = ["out/records.CSV"]

[spectrum.rock-5]
selection = "rock"
damping = 0.05
percentiles = [16, 50]
raw = true
files = ["out/rock.csv", "out/rock.json"]

[spectrum.watched]
raw = false

[demand.bridges]
structures = "bridges.csv"
files = "out/bridges.txt"
`

func TestStudy(t *testing.T) {
	s, err := Parse("coast.toml", "/region", []byte(coast), words)
	if err != nil {
		t.Fatal(err)
	}
	five := 0.05
	where, since := Setting{"where", Text{"vs30_m_s >= 600", 19}}, Setting{"since", Text{"2041-07-06", 20}}
	want := &Study{
		File: "coast.toml", Dir: "/region",
		Name: Text{"Coast of Ardmoor", 1}, Store: Text{"/region/coast.db", 2},
		Sources:  []Text{{"/region/records", 4}, {"/data/more.zip", 5}},
		Include:  s.Include,
		Exclude:  s.Exclude,
		MaxDrift: &five, Keep: 5, State: Text{"/region/out/last-run.json", 16},
		Ingest: []Setting{
			{"catalogue", Text{"/region/catalogue.csv", 9}}, {"metadata", Text{"/region/a.xml", 10}}, {"metadata", Text{"/region/b.xml", 10}},
			{"recipe", Text{"standard", 11}}, {"periods", Text{"0.02,0.05,1", 12}}, {"dt", Text{"0.005", 13}},
		},
		Reads: []Setting{
			{"sources", Text{"/region/records", 4}}, {"sources", Text{"/data/more.zip", 5}}, {"catalogue", Text{"/region/catalogue.csv", 9}},
			{"metadata", Text{"/region/a.xml", 10}}, {"metadata", Text{"/region/b.xml", 10}}, {"demand.bridges.structures", Text{"/region/bridges.csv", 36}},
		},
		Writes: []Setting{
			{"store", Text{"/region/coast.db", 2}}, {"state", Text{"/region/out/last-run.json", 16}}, {"records.held.files", Text{"/region/out/records.CSV", 23}},
			{"spectrum.rock-5.files", Text{"/region/out/rock.csv", 30}}, {"spectrum.rock-5.files", Text{"/region/out/rock.json", 30}},
			{"demand.bridges.files", Text{"/region/out/bridges.txt", 37}},
		},
		Selections: []Selection{{"rock", 18, []Setting{where, since}}},
		Products: []Product{
			{Kind: Records, Name: "held", Line: 22, Files: []File{{Text{"/region/out/records.CSV", 23}, CSV}}},
			{
				Kind: Spectrum, Name: "rock-5", Line: 25, Selection: "rock",
				Settings: []Setting{where, since, {"damping", Text{"0.05", 27}}, {"percentiles", Text{"16,50", 28}}, {"raw", Text{"true", 29}}},
				Files:    []File{{Text{"/region/out/rock.csv", 30}, CSV}, {Text{"/region/out/rock.json", 30}, JSON}},
				own:      []Setting{{"damping", Text{"0.05", 27}}, {"percentiles", Text{"16,50", 28}}, {"raw", Text{"true", 29}}},
			},
			{Kind: Spectrum, Name: "watched", Line: 32},
			{
				Kind: Demand, Name: "bridges", Line: 35, Settings: []Setting{{"structures", Text{"/region/bridges.csv", 36}}},
				Files: []File{{Text{"/region/out/bridges.txt", 37}, TXT}}, own: []Setting{{"structures", Text{"/region/bridges.csv", 36}}},
			},
		},
	}
	if !reflect.DeepEqual(s, want) {
		t.Errorf("Parse:\n%+v, want\n%+v", s, want)
	}
	if got := []string{s.Include[0].Value, s.Include[1].Value, s.Exclude[0].Value}; !slices.Equal(got, []string{"*.V2", "2041/**/*.mseed", "old"}) {
		t.Errorf("patterns %q", got)
	}
	for path, short := range map[string]string{"/region/out/a.csv": "out/a.csv", "/data/more.zip": "/data/more.zip", "/region": ".", "/regional/x": "/regional/x", "standard": "standard"} {
		if got := s.Short(path); got != short {
			t.Errorf("Short(%s) = %s, want %s", path, got, short)
		}
	}
}

// least is a right study of four lines, so that what a case appends begins at line 5.
const least = "name = \"n\"\nstore = \"s.db\"\nsources = [\"r\"]\nrecipe = \"standard\"\n"

func TestMistakes(t *testing.T) {
	for _, c := range []struct{ name, text, want string }{
		{"nothing", "", "x.toml: name: is missing\nx.toml: store: is missing\nx.toml: sources: is missing\nx.toml: recipe: is missing"},
		{"no TOML", least + "keep = \n", "x.toml:5: unexpected character U+000A at start of value"},
		{"given twice", least + "keep = 1\nkeep = 2\n", "x.toml:6: keep is given twice, first in line 5"},
		{"a selection twice", least + "[selection.a]\n[selection.b]\n[selection.a]\n", "x.toml:7: selection.a is given twice, first in line 5"},
		{"a product twice", least + "[spectrum.a]\n\n[demand.a]\n", "x.toml:7: demand.a: spectrum.a is called so too, in line 5; every product needs a name of its own"},
		{"not UTF-8", least + "# \xff\n", "x.toml: is not UTF-8"},
		{"UTF-16", "\xff\xfen\x00", "x.toml: is UTF-16; save it as UTF-8"},
		{"too large", strings.Repeat("#", maxText+1), "x.toml: is larger than 1048576 bytes"},
		{"unknown key, a near one", least + "catalog = \"c.csv\"\n", "x.toml:5: catalog: unknown key (did you mean catalogue?)"},
		{"unknown key, none near", least + "[records.a]\nspeed = 1\n", "x.toml:6: records.a.speed: unknown key; known here are files, near, rejected, selection, since, where"},
		{"unknown table, a near one", least + "[spectra.a]\n", "x.toml:5: spectra: unknown key (did you mean spectrum?)"},
		{"unknown table", least + "[figure.a]\n", "x.toml:5: figure: unknown key; known here are catalogue, demand, dt, exclude, include, keep, max-drift, metadata, metrics, name, periods, purpose, recipe, records, report, selection, sources, spectrum, state, store"},
		{"a key of a product in a selection", least + "[selection.a]\ndamping = 1\n", "x.toml:6: selection.a.damping: unknown key; known here are near, screen, since, where"},
		{"text wanted", "name = 3\n" + least[len("name = \"n\"\n"):], "x.toml:1: name: want a text in quotes, found a number"},
		{"text empty", "name = \" \"\n" + least[len("name = \"n\"\n"):], "x.toml:1: name: is empty"},
		{"name of two lines", "name = \"a\\nb\"\n" + least[len("name = \"n\"\n"):], "x.toml:1: name: want at most 80 characters that can be printed, on one line"},
		{"zero byte", least + "state = \"a\\u0000b\"\n", "x.toml:5: state: holds a zero byte"},
		{"whole number wanted", least + "keep = 1.5\n", "x.toml:5: keep: want a whole number, found a number"},
		{"keep nothing", least + "keep = 0\n", "x.toml:5: keep: 0 is outside 1 to 1000000"},
		{"drift in words", least + "max-drift = \"little\"\n", "x.toml:5: max-drift: want a ratio such as \"5%\" or 0.05, from 0 to 10"},
		{"drift negative", least + "max-drift = -0.01\n", "x.toml:5: max-drift: want a ratio such as \"5%\" or 0.05, from 0 to 10"},
		{"drift no number", least + "max-drift = nan\n", "x.toml:5: max-drift: want a ratio such as \"5%\" or 0.05, from 0 to 10"},
		{"no sources", "name = \"n\"\nstore = \"s.db\"\nrecipe = \"standard\"\nsources = []\n", "x.toml:4: sources: is empty"},
		{"a source that is no text", "name = \"n\"\nstore = \"s.db\"\nrecipe = \"standard\"\nsources = [\n\"r\",\n4]\n", "x.toml:6: sources: want a text in quotes, found a number"},
		{"a source twice", "name = \"n\"\nstore = \"s.db\"\nrecipe = \"standard\"\nsources = [\"r\",\n\"./r/\"]\n", "x.toml:5: sources: r is given twice"},
		{"a pattern that is none", least + "include = [\"a\",\n\"[b\"]\n", "x.toml:6: include: \"[b\": no pattern, a [ without ] or a lone \\"},
		{"a pattern from the root", least + "exclude = \"/data/*\"\n", "x.toml:5: exclude: \"/data/*\": want a path below a source, such as 2041/**/*.V2"},
		{"a table wanted", least + "selection = 3\n", "x.toml:5: selection: want tables with names, [selection.NAME], found a number"},
		{"a name wanted", least + "[selection]\nwhere = \"x\"\n", "x.toml:6: selection.where: want a table with a name, [selection.NAME], found the text \"x\""},
		{"a list of tables", least + "[[spectrum]]\n", "x.toml:5: spectrum: want tables with names, [spectrum.NAME], found a list"},
		{"a name with a blank", least + "[spectrum.\"a b\"]\n", "x.toml:5: spectrum: \"a b\" is no name: want letters, digits, - and _, at most 80"},
		{"selection not defined", least + "[selection.rock]\n[spectrum.a]\nselection = \"rok\"\n", "x.toml:7: spectrum.a.selection: there is no [selection.rok] (did you mean rock?)"},
		{"selection is no text", least + "[spectrum.a]\nselection = 1\n", "x.toml:6: spectrum.a.selection: want a text in quotes, found a number"},
		{"said by both", least + "[selection.rock]\nwhere = \"x\"\n[spectrum.a]\nselection = \"rock\"\nwhere = \"y\"\n", "x.toml:9: spectrum.a.where: is said by the selection rock too, in line 6"},
		{"not of that product", least + "[selection.rock]\nscreen = \"none\"\n[records.a]\nselection = \"rock\"\n", "x.toml:8: records.a.selection: rock says screen, in line 6, which records does not take"},
		{"a switch in quotes", least + "[spectrum.a]\nraw = \"true\"\n", "x.toml:6: spectrum.a.raw: want true or false, without quotes, found the text \"true\""},
		{"one value wanted", least + "[spectrum.a]\nwhere = [\"a\", \"b\"]\n", "x.toml:6: spectrum.a.where: takes one value, found a list"},
		{"a truth value for a text", least + "[spectrum.a]\nwhere = true\n", "x.toml:6: spectrum.a.where: want a text or a number, found true or false"},
		{"a list within a list", least + "periods = [1,\n[2]]\n", "x.toml:5: periods: want a text or a number, found a list"},
		{"a number without end", least + "periods = [1,\ninf]\n", "x.toml:6: periods: want a finite number"},
		{"an empty list", least + "periods = []\n", "x.toml:5: periods: is empty"},
		{"another extension", least + "[spectrum.a]\nfiles = [\n\"a.csv\",\n\"a.pdf\"]\n", "x.toml:8: spectrum.a.files: \"a.pdf\": want a name that ends in .csv, .json, .txt, .svg or .png"},
		{"format", least + "[spectrum.a]\nformat = \"csv\"\n", "x.toml:6: spectrum.a.format: follows from the names of the files"},
		{"a report of another extension", least + "report = \"a.pdf\"\n", "x.toml:5: report: \"a.pdf\": want a name that ends in .html"},
		{"a report that is a product", least + "report = \"a.html\"\nstate = \"./a.html\"\n", "x.toml:6: state: a.html is the path of report in line 5 too"},
		{"a purpose that is a book", least + "purpose = \"" + strings.Repeat("x", 2001) + "\"\n", "x.toml:5: purpose: is longer than 2000 bytes"},
		{"an output twice", least + "[spectrum.a]\nfiles = \"out/a.csv\"\n[records.b]\nfiles = \"./out/../out/a.csv\"\n", "x.toml:8: records.b.files: out/a.csv is the path of spectrum.a.files in line 6 too"},
		{"an output that is the state", least + "state = \"a.json\"\n[spectrum.a]\nfiles = \"a.json\"\n", "x.toml:7: spectrum.a.files: a.json is the path of state in line 5 too"},
		{"an output that is read", least + "catalogue = \"c.csv\"\n[spectrum.a]\nfiles = \"/region/c.csv\"\n", "x.toml:7: spectrum.a.files: c.csv is the path of catalogue in line 5 too"},
		{"an output that another product reads", least + "[spectrum.a]\nfiles = \"b.csv\"\n[demand.b]\nstructures = \"b.csv\"\n", "x.toml:6: spectrum.a.files: b.csv is the path of demand.b.structures in line 8 too"},
		{"a list that is an output", least + "periods = \"@p.txt\"\n[spectrum.a]\nfiles = \"p.txt\"\n", "x.toml:7: spectrum.a.files: p.txt is the path of periods in line 5 too"},
		{"the study itself", least + "metrics = \"x.toml\"\n", "x.toml:5: metrics: x.toml is the path of the study itself too"},
		{"the store's log", least + "metrics = \"s.db-wal\"\n", "x.toml:5: metrics: s.db-wal is the path of the store's log too"},
		{"the store's lock", least + "metrics = \"s.db.lock\"\n", "x.toml:5: metrics: s.db.lock is the path of the store's lock too"},
		{"a store that is a source", "name = \"n\"\nstore = \"r\"\nsources = [\"r\"]\nrecipe = \"standard\"\n", "x.toml:2: store: r is the path of sources in line 3 too"},
		{"several, by line", "keep = 0\nname = 1\nstore = \"s.db\"\nsources = [\"r\"]\nrecpie = \"standard\"\n", "x.toml: recipe: is missing\nx.toml:1: keep: 0 is outside 1 to 1000000\nx.toml:2: name: want a text in quotes, found a number\nx.toml:5: recpie: unknown key (did you mean recipe?)"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := Parse("x.toml", "/region", []byte(c.text), words)
			if err == nil || err.Error() != c.want {
				t.Errorf("Parse(%q):\n%v, want\n%s", c.text, err, c.want)
			}
		})
	}
	if _, err := Parse("x.toml", "/region", []byte(least), words); err != nil {
		t.Errorf("the least study: %v", err)
	}
}

// TestMistakesAreSaidOnce: a selection's mistake comes up in every product that uses it.
func TestMistakesAreSaidOnce(t *testing.T) {
	s := &Study{File: "x.toml"}
	cause := func(text string) error { return fmt.Errorf("%s", text) }
	m := Mistakes{
		s.Mistake(9, "spectrum.b.near", cause("near: no point")), s.Mistake(4, "selection.a.near", cause("near: no point")),
		s.Mistake(4, "selection.a.near", cause("near: no point")), s.Mistake(4, "unit", cause("--unit: unknown")),
	}
	want := "x.toml:4: selection.a.near: no point\nx.toml:4: unit: unknown\nx.toml:9: spectrum.b.near: no point"
	if got := m.Sorted().Error(); got != want {
		t.Errorf("Sorted:\n%s, want\n%s", got, want)
	}
}
