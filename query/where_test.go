package query

import (
	"errors"
	"fmt"
	"math"
	"reflect"
	"strings"
	"testing"

	"swaybook/db"
)

func whereSample() attributes {
	held := &db.HeldComponent{
		Record: &db.Record{Code: "R1", Siting: "free-field", Event: quakeA, Station: stationA, Distances: db.Distances{BestKM: ptr(12.5)}},
		Peaks:  db.Peaks{PGA: 0.3 * StandardGravity, PGV: 0.2, PGD: 0.1},
	}
	held.Role, held.StepS, held.Samples, held.LowCutHz = "h1", 0.01, 4001, ptr(0.1)
	held.SourceFormat, held.SourcePath, held.Processing = "knet", "a/R1.EW", "corrected"
	return componentAttributes(held)
}

func TestWhereTrueAndFalse(t *testing.T) {
	a := whereSample()
	cases := []struct {
		text string
		want bool
	}{
		{"magnitude >= 6.5", true},
		{"magnitude > 6.5", false},
		{"6 < magnitude and distance_km < 20", true},
		{"magnitude > 7 or vs30_m_s == 310", true},
		{"not (siting == 'structure')", true},
		{`event == "QA" && event_name contains "Ardmoor"`, true},
		{`lower(station_name) startsWith "ardmoor"`, true},
		{`record matches "^R[0-9]+$"`, true},
		{`station in ["AAA", "BBB"]`, true},
		{`station in ["BBB"]`, false},
		{"year in 2020..2025", true},
		{"year == 2024 and samples == 4001", true},
		{"samples in [4001, 5000]", true},
		{"duration_s == 40", true},
		{"pga_g > 0.29 and pga_g < 0.31 and pgv_m_s == 0.2 and pgd_m == 0.1", true},
		{"dt_s <= 0.01 and low_cut_hz <= 0.1", true},
		{"depth_km / 2 == 4.5", true},
		{"abs(station_latitude) + abs(station_longitude) == 4", true},
		{`network == "ZX" and component == "h1" and format == "knet" and processing == "corrected"`, true},
		{`source endsWith ".EW" and magnitude_type == "Mw" and instrument == ""`, true},
		{"magnitude > 6 ? distance_km < 20 : distance_km < 10", true},
		{"true", true},
		{"false", false},
	}
	for _, c := range cases {
		w, err := compileWhere(c.text)
		if err != nil {
			t.Errorf("%s: %v", c.text, err)
			continue
		}
		if got, err := w.met(&a); err != nil || got != c.want {
			t.Errorf("%s = %v, %v, want %v", c.text, got, err, c.want)
		}
		if name := w.unknown(&a); name != "" {
			t.Errorf("%s: %s unknown", c.text, name)
		}
	}
}

// TestWhereMistakes: each error is a UsageError, starts with these words and
// lists the attributes.
func TestWhereMistakes(t *testing.T) {
	cases := []struct{ text, want string }{
		{"magnitud > 6", "where: unknown name magnitud (at character 1)"},
		{"magnitude > 'six'", "where: invalid operation: > (mismatched types number and string) (at character 11)"},
		{"magnitude", "where: expected true-or-false, but got number"},
		{"magnitude = 3", `where: "=" is no comparison, write "==" (at character 11)`},
		{"samples > 'many'", "where: invalid operation: > (mismatched types whole number and string) (at character 9)"},
		{"record", "where: expected true-or-false, but got string"},
		{"magnitude >", "where: unexpected token EOF (at character 11)"},
		{"magnitude > 6 and", "where: unexpected token EOF (at character 17)"},
		{"station.code == 'A'", "where: type string has no field code"},
		{"quality.torn", `where: there is no finding "torn"`},
		{"now() > magnitude", "where: unknown name now"},
		{"repeat(record, 1000000) == ''", "where: unknown name repeat"},
		{"fromJSON(record) == 1", "where: unknown name fromJSON"},
		{strings.Repeat("true and ", 1000) + "true", "where: compilation failed: expression exceeds maximum allowed nodes"},
	}
	for _, c := range cases {
		_, err := compileWhere(c.text)
		var mistake *UsageError
		if !errors.As(err, &mistake) {
			t.Errorf("%.40s: error %v is no UsageError", c.text, err)
			continue
		}
		if !strings.HasPrefix(err.Error(), c.want) || !strings.HasSuffix(err.Error(), "; known attributes: "+WhereAttributes()) {
			t.Errorf("%.40s: error %q, want %q", c.text, err, c.want)
		}
	}
}

// TestWhereRefuses guards against expressions that could loop, grow without
// bound or get round the check of what is known.
func TestWhereRefuses(t *testing.T) {
	cases := []struct{ text, want string }{
		{"let a = record + record; len(a) > 1", "where: let is not accepted in an expression"},
		{"all(1..1000, all(1..1000, # > 0))", "where: a function over the elements of a list is not accepted in an expression"},
		{"len(filter([1, 2], # > 1)) == 1", "where: a function over the elements of a list is not accepted in an expression"},
		{"$env['magnitude'] > 1", "where: $env is not accepted in an expression"},
		{strings.Repeat("(", 6000) + "true" + strings.Repeat(")", 6000), "where: the expression is longer than 10000 bytes"},
		{"{a: magnitude}.a > 1", "where: a map is not accepted in an expression"},
	}
	for _, c := range cases {
		_, err := compileWhere(c.text)
		checkUsage(t, c.text, err, c.want)
	}
}

// TestWhereRuntimeMistake: what shows only when an expression is asked of a
// motion is the user's mistake all the same.
func TestWhereRuntimeMistake(t *testing.T) {
	cases := []struct{ text, want string }{
		{"samples % (year - 2024) == 0", "where: runtime error: integer divide by zero (at character 9)"},
		{"int(record) == 1", "where: invalid operation: "},
		{"[1][4] > 1", "where: index out of range: 4"},
		{"record matches ('(' + event)", "where: error parsing regexp: missing closing )"},
		{"magnitude in 1..100000000", "where: memory budget exceeded"},
	}
	a := whereSample()
	for _, c := range cases {
		w, err := compileWhere(c.text)
		if err != nil {
			t.Errorf("%s: refused when compiled: %v", c.text, err)
			continue
		}
		_, err = w.met(&a)
		var mistake *UsageError
		if !errors.As(err, &mistake) || !strings.HasPrefix(err.Error(), c.want) {
			t.Errorf("%s: error %v, want a UsageError %q", c.text, err, c.want)
		}
		if met, err := w.met(&a); err == nil {
			t.Errorf("%s: asked again: %v", c.text, met)
		}
	}
}

// TestWhereUnknown: the first unknown number in the order of the list is named,
// if the expression uses it, even where another part would decide.
func TestWhereUnknown(t *testing.T) {
	a := componentAttributes(&db.HeldComponent{Record: &db.Record{Code: "R", Siting: "ground"}})
	for _, n := range numbers {
		if n.name == "dt_s" || n.name == "samples" || n.name == "duration_s" || strings.HasPrefix(n.name, "pg") || strings.HasPrefix(n.name, "usable_") {
			continue // every component has these
		}
		w, err := compileWhere(n.name + " > 0 or true")
		if err != nil {
			t.Fatal(err)
		}
		if got := w.unknown(&a); got != n.name {
			t.Errorf("%s: unknown = %q", n.name, got)
		}
	}
	w, err := compileWhere("vs30_m_s > 1 and magnitude > 1 and record == 'R'")
	if err != nil {
		t.Fatal(err)
	}
	if got := w.unknown(&a); got != "magnitude" {
		t.Errorf("unknown = %q, want magnitude", got)
	}
	w, err = compileWhere(`event == "" and station == "" and event_name == ""`)
	if err != nil {
		t.Fatal(err)
	}
	if met, err := w.met(&a); w.unknown(&a) != "" || err != nil || !met {
		t.Error("unknown strings are not empty")
	}
}

// TestAttributeTables: the lists that people see and the fields that the
// compiler sees name the same attributes, by type.
func TestAttributeTables(t *testing.T) {
	listed := map[string]string{}
	for _, n := range numbers {
		listed[n.name] = "number"
	}
	for _, s := range texts {
		listed[s.name] = "string"
	}
	fields := reflect.TypeFor[attributes]()
	if fields.NumMethod() > 0 || reflect.PointerTo(fields).NumMethod() > 0 {
		t.Error("attributes has methods, which expressions could call")
	}
	for _, f := range flags {
		listed["quality."+f.name] = "truth"
	}
	for _, f := range reflect.VisibleFields(fields) {
		name, kind := f.Tag.Get("expr"), "number"
		switch f.Type.Kind() {
		case reflect.String:
			kind = "string"
		case reflect.Struct:
			for _, inner := range reflect.VisibleFields(f.Type) {
				key := name + "." + inner.Tag.Get("expr")
				if listed[key] != "truth" || inner.Type.Kind() != reflect.Bool {
					t.Errorf("%s: listed as %q", key, listed[key])
				}
				delete(listed, key)
			}
			continue
		}
		if listed[name] != kind {
			t.Errorf("%s is a %s, listed as %q", name, kind, listed[name])
		}
		delete(listed, name)
	}
	if len(listed) > 0 {
		t.Errorf("listed but no field: %v", listed)
	}
}

// TestPairAttributes: of what both components do not share, the less favourable
// stands for the pair.
func TestPairAttributes(t *testing.T) {
	first := &db.HeldComponent{Record: &db.Record{Code: "R", Siting: "ground"}, Peaks: db.Peaks{PGA: 0.1 * StandardGravity, PGV: 0.2, PGD: 0.02}}
	second := &db.HeldComponent{Record: first.Record, Peaks: db.Peaks{PGA: 0.4 * StandardGravity, PGV: 0.8, PGD: 0.08}}
	first.StepS, second.StepS = 0.01, 0.005
	first.Samples, second.Samples = 1001, 1501
	first.LowCutHz, second.LowCutHz = ptr(0.1), ptr(0.2)
	first.HighCutHz = ptr(30.0)
	first.SourceFormat, second.SourceFormat = "at2", "at2"
	first.SourcePath, second.SourcePath = "a", "b"
	first.AzimuthDeg, second.AzimuthDeg = ptr(0.0), ptr(90.0)
	a := pairAttributes(&motion{members: []*db.HeldComponent{first, second}, role: string(ComponentGeomean)})
	numbers := []struct {
		name      string
		got, want float64
	}{
		{"pga_g", a.PGA, 0.2}, {"pgv_m_s", a.PGV, 0.4}, {"pgd_m", a.PGD, 0.04},
		{"dt_s", a.StepS, 0.01}, {"samples", float64(a.Samples), 1001}, {"duration_s", a.DurationS, 7.5},
		{"low_cut_hz", a.LowCutHz, 0.2}, {"high_cut_hz", a.HighCutHz, math.NaN()}, {"azimuth_deg", a.AzimuthDeg, math.NaN()},
	}
	for _, n := range numbers {
		if !near(n.got, n.want) {
			t.Errorf("%s = %v, want %v", n.name, n.got, n.want)
		}
	}
	if a.Component != "geomean" || a.Format != "at2" || a.Source != "a + b" {
		t.Errorf("strings %q %q %q", a.Component, a.Format, a.Source)
	}
	if b := pairAttributes(&motion{members: []*db.HeldComponent{first, second}, role: string(ComponentLarger)}); !near(b.PGA, 0.4) || b.PGV != 0.8 || b.Component != "larger" {
		t.Errorf("larger: %v %v %q", b.PGA, b.PGV, b.Component)
	}
}

func BenchmarkWhere(b *testing.B) {
	w, err := compileWhere(`magnitude > 6 and distance_km < 50 and siting != "structure"`)
	if err != nil {
		b.Fatal(err)
	}
	a := whereSample()
	for b.Loop() {
		if _, err := w.met(&a); err != nil {
			b.Fatal(err)
		}
	}
}

// FuzzWhere: no expression makes a panic, an error of another type, or a long
// evaluation.
func FuzzWhere(f *testing.F) {
	for _, seed := range []string{
		"magnitude > 6", "year in 1990..1999", `station in ["A", "B"] and not (siting == 'x')`, "record matches '^R'", "len(record[1:2]) > 0",
		"magnitude > 6 ? true : false", "let a = 1; a > 0", "$env", "record?.x", "min(1, 2) in [1]", "1..9 == 3", "-1 ** 9 > 0", "'a' + record > 'b' | trim()",
	} {
		f.Add(seed)
	}
	a := whereSample()
	f.Fuzz(func(t *testing.T, text string) {
		w, err := compileWhere(text)
		if err == nil && w != nil {
			_, err = w.met(&a)
			w.unknown(&a)
		}
		var mistake *UsageError
		if err != nil && !errors.As(err, &mistake) {
			t.Errorf("%q: %v", text, err)
		}
	})
}

// TestAttributeDetails: what is read for an attribute is enough for it, of a
// component and of a pair.
func TestAttributeDetails(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	fields := reflect.VisibleFields(reflect.TypeFor[attributes]())
	err := store.View(t.Context(), func(s *db.Snapshot) error {
		for _, field := range fields {
			name := field.Tag.Get("expr")
			w, err := compileWhere(name + " == " + name)
			if err != nil {
				return err
			}
			whole, err := s.Components(t.Context(), db.AllDetails)
			if err != nil {
				return err
			}
			read, err := s.Components(t.Context(), w.details())
			if err != nil {
				return err
			}
			for i := range whole[1:] {
				for kind, of := range map[string]func(c []db.HeldComponent) attributes{
					"component": func(c []db.HeldComponent) attributes { return componentAttributes(&c[i]) },
					"pair": func(c []db.HeldComponent) attributes {
						return pairAttributes(&motion{members: []*db.HeldComponent{&c[i], &c[i+1]}, role: string(ComponentLarger)})
					},
				} {
					want := reflect.ValueOf(of(whole)).FieldByIndex(field.Index)
					got := reflect.ValueOf(of(read)).FieldByIndex(field.Index)
					if fmt.Sprint(got) != fmt.Sprint(want) {
						t.Errorf("%s of a %s = %v, want %v", name, kind, got, want)
					}
				}
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
}
