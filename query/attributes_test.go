package query

import (
	"math"
	"reflect"
	"testing"

	"swaybook/db"
)

// A stated E, S1 or S2 is more than Vs30 says and stands; a stated letter of A to D
// gives way to it.
func TestSiteClasses(t *testing.T) {
	mps := func(v float64) *float64 { return &v }
	for _, k := range []struct {
		stated        string
		vs30          *float64
		en1998, nehrp string
	}{
		{"", nil, "", ""},
		{"B", nil, "B", ""},
		{"S1", nil, "S1", ""},
		{"", mps(300), "C", "D"},
		{"B", mps(300), "C", "D"},
		{"E", mps(300), "E", "D"},
		{"S1", mps(90), "S1", "E"},
		{"S2", mps(810), "S2", "B"},
		{"B", mps(-1), "B", ""},
	} {
		en1998, nehrp := siteClasses(&db.Station{SiteClass: k.stated, Vs30MPS: k.vs30})
		if en1998 != k.en1998 || nehrp != k.nehrp {
			t.Errorf("%q at %v: %q, %q, want %q, %q", k.stated, orNaN(k.vs30), en1998, nehrp, k.en1998, k.nehrp)
		}
	}
}

// Each name in the lists gives the field of that name.
func TestAttributesByName(t *testing.T) {
	var a attributes
	v := reflect.ValueOf(&a).Elem()
	at := map[string]int{}
	for i, f := range reflect.VisibleFields(v.Type()) {
		at[f.Tag.Get("expr")] = i
		switch f.Type.Kind() {
		case reflect.Float64:
			v.Field(i).SetFloat(float64(i))
		case reflect.Int:
			v.Field(i).SetInt(int64(i))
		case reflect.String:
			v.Field(i).SetString(f.Tag.Get("expr"))
		}
	}
	for _, n := range numbers {
		if got := n.of(&a); got != float64(at[n.name]) {
			t.Errorf("%s gives field %v, want %d", n.name, got, at[n.name])
		}
	}
	for _, n := range texts {
		if got := n.of(&a); got != n.name {
			t.Errorf("%s gives the field of %s", n.name, got)
		}
	}
	a.Year = noYear
	if !math.IsNaN(yearOf(&a)) {
		t.Error("no year is a year")
	}
}
