package ingest

import "testing"

func TestSitingFromWords(t *testing.T) {
	cases := map[Siting][]string{
		SitingUnknown: {"", "   ", "North", "Instrument Shelter", "Center", "Downstream", "Playground", "Foreground"},
		SitingFreeField: {
			"Freefield", "FREE FIELD", "Free-Field", "free_field", "Free Field: Near North Abutment",
			"Freefield, 30 m from building", "Geotechnical Array: free field",
		},
		SitingGround: {
			"Ground", "Ground Level", "Grnd Level", "GND LEVEL", "Ground surface", "At grade", "Surface",
			"On Ground: Near East Abutment", "On the ground, near Pier 4", "On Grnd near Bent 2",
			"Ground: South of Building", "Grnd: Near Deck", "On Ground Level",
		},
		SitingStructure: {
			"Bent 3: South Column, Grnd Level", "Bent 3, on Ground Level", "Roof: North Edge", "1st Floor", "Ground Floor",
			"On ground floor", "On the ground slab", "Basement", "Basement, below grade", "Deck Level", "Abutment 1",
			"Pier 5 Footing", "Pile Cap", "Pilecap", "Dam: Left Crest", "Crest", "Tunnel invert", "West Wall", "Tower Top",
			"Main Span: Girder", "Midspan", "3rd Level", "Level 7", "Upper level", "Bldg. 4, grnd level",
			"Ground level near column", "Truss", "Left abutment gallery", "2nd Storey", "Parking Level",
		},
		SitingBorehole: {
			"Borehole 30 m", "Downhole", "Down-hole sensor", "Depth 12 m", "Ground: depth 10m", "Geotechnical Array",
			"Geotech. array surface", "Free field borehole", "15 m below ground surface", "Underground",
		},
	}
	for want, texts := range cases {
		for _, s := range texts {
			if got := SitingFromWords(s); got != want {
				t.Errorf("SitingFromWords(%q) = %s, want %s", s, got, want)
			}
		}
	}
}

// TestSitingRulesAllDecide guards the table against a rule that an earlier one
// always shadows.
func TestSitingRulesAllDecide(t *testing.T) {
	texts := []string{
		"borehole", "free field", "geotechnical array", "on ground", "ground: north", "roof", "3rd level", "below grade", "ground level",
	}
	if len(texts) != len(sitingRules) {
		t.Fatalf("%d texts for %d rules", len(texts), len(sitingRules))
	}
	for i, s := range texts {
		for j, r := range sitingRules {
			if r.match.MatchString(s) && (r.unless == nil || !r.unless.MatchString(s)) {
				if j != i {
					t.Errorf("%q is decided by rule %d (%s), want %d (%s)", s, j, r.why, i, sitingRules[i].why)
				}
				break
			}
		}
	}
}
