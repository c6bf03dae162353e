package ingest

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// short writes an orientation as "h 90", "h #1", "v" or "".
func short(o Orientation) string {
	switch {
	case o.Axis == AxisVertical:
		return "v"
	case o.Axis == AxisUnknown:
		return ""
	case o.AzimuthDeg.Known:
		return fmt.Sprintf("h %g", o.AzimuthDeg.Value)
	case o.Order != 0:
		return fmt.Sprintf("h #%d", o.Order)
	}
	return "h"
}

func TestAssignRoles(t *testing.T) {
	h := func(deg float64) Orientation { return azimuth(deg) }
	named := func(label string) Orientation { return Orientation{Axis: AxisHorizontal, Label: label} }
	cases := []struct {
		name     string
		channels []Orientation
		want     string
	}{
		{"three", []Orientation{h(0), h(90), vertical}, "h1 h2 v"},
		{"bounds of h1", []Orientation{h(315), h(45)}, "h1 h2"},
		{"bounds of h2", []Orientation{h(134.9), h(135)}, "h2 h1"},
		{"opposite", []Orientation{h(270), h(180)}, "h2 h1"},
		{"east alone", []Orientation{h(90)}, "h2"},
		{"ranked", []Orientation{ranked(2), ranked(1), vertical}, "h2 h1 v"},
		{"both near north", []Orientation{h(20), h(10)}, "h2 h1"},
		{"both near east", []Orientation{h(100), h(120)}, "h1 h2"},
		{"either side of north", []Orientation{h(350), h(10)}, "h2 h1"},
		{"azimuth and rank", []Orientation{ranked(1), h(90)}, "h1 h2"},
		{"azimuth and rank collide", []Orientation{ranked(1), h(0)}, "h2 h1"},
		{"azimuth and nothing", []Orientation{named("X"), h(90)}, "h1 h2"},
		{"nothing, by label", []Orientation{named("Y"), named("X")}, "h2 h1"},
		{"nothing, alone", []Orientation{named("X")}, "h1"},
		{"third horizontal", []Orientation{h(0), h(90), h(180), vertical}, "h1 h2  v"},
		{"third of one kind", []Orientation{h(100), h(120), h(0)}, "h2  h1"},
		{"three of one kind", []Orientation{h(130), h(100), h(120)}, " h1 h2"},
		{"second vertical", []Orientation{{Axis: AxisVertical, Label: "Z"}, {Axis: AxisVertical, Label: "UP"}}, " v"},
		{"vertical alone", []Orientation{vertical}, "v"},
		{"unknown alone", []Orientation{{}}, "h1"},
		{"unknown beside others", []Orientation{{}, h(0)}, " h1"},
		{"none", nil, ""},
	}
	for _, k := range cases {
		if got := strings.Join(AssignRoles(k.channels), " "); got != k.want {
			t.Errorf("%s: AssignRoles = %q, want %q", k.name, got, k.want)
		}
	}
}

// TestAssignRolesAnyOrder shuffles channels: each keeps its role.
func TestAssignRolesAnyOrder(t *testing.T) {
	seed := uint64(41)
	rng := rand.New(rand.NewPCG(seed, 1))
	for range 2000 {
		var channels []Orientation
		for i := range 1 + rng.IntN(5) {
			o := Orientation{Axis: Axis(rng.IntN(3)), Label: fmt.Sprint(i)} // labels tell equal directions apart
			switch rng.IntN(3) {
			case 0:
				o.AzimuthDeg = Known(float64(rng.IntN(24) * 15))
			case 1:
				o.Order = 1 + rng.IntN(2)
			}
			channels = append(channels, o)
		}
		roles := map[string]string{}
		used := map[string]int{}
		for i, r := range AssignRoles(channels) {
			roles[channels[i].Label] = r
			used[r]++
		}
		if used["h1"] > 1 || used["h2"] > 1 || used["v"] > 1 {
			t.Fatalf("seed %d: role given twice: %v for %+v", seed, roles, channels)
		}
		shuffled := slices.Clone(channels)
		rng.Shuffle(len(shuffled), func(i, j int) { shuffled[i], shuffled[j] = shuffled[j], shuffled[i] })
		for i, r := range AssignRoles(shuffled) {
			if want := roles[shuffled[i].Label]; r != want {
				t.Fatalf("seed %d: %+v is %q in one order and %q in another", seed, shuffled[i], want, r)
			}
		}
	}
}
