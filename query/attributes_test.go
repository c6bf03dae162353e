package query

import (
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
