package ingest

import (
	"cmp"
	"slices"
)

// The roles of a record's components.
const (
	RoleH1 = "h1"
	RoleH2 = "h2"
	RoleV  = "v"
)

// AssignRoles gives each channel of one record its role, in the order of the
// argument, which does not influence the roles:
//
//   - A vertical is v.
//   - A horizontal goes by its own direction: nearer to north–south than to
//     east–west, an azimuth in [315°, 45°) or [135°, 225°), is h1, any other h2.
//     Without azimuth the label's rank decides: 1 is h1, 2 is h2. So a record that
//     is not complete, or is completed later, keeps its roles.
//   - Two horizontals that would have the same role, or one that has none of its
//     own, are put in the order of azimuth, rank and label; known comes before
//     unknown. The first is h1.
//   - A third horizontal and a second vertical, the last in that order, get "":
//     a conflict for the caller to name.
//   - A channel of unknown direction is h1 where it is the only one, else "".
func AssignRoles(channels []Orientation) []string {
	roles := make([]string, len(channels))
	if len(channels) == 1 && channels[0].Axis == AxisUnknown {
		roles[0] = RoleH1
		return roles
	}
	horizontal, vertical := inOrder(channels, AxisHorizontal), inOrder(channels, AxisVertical)
	if len(vertical) > 0 {
		roles[vertical[0]] = RoleV
	}
	pair := keepPair(channels, horizontal)
	switch len(pair) {
	case 1:
		roles[pair[0]] = cmp.Or(ownRole(channels[pair[0]]), RoleH1)
	case 2:
		first, second := ownRole(channels[pair[0]]), ownRole(channels[pair[1]])
		swapped := first != second && (first == RoleH2 || second == RoleH1)
		roles[pair[0]], roles[pair[1]] = RoleH1, RoleH2
		if swapped {
			roles[pair[0]], roles[pair[1]] = RoleH2, RoleH1
		}
	}
	return roles
}

// inOrder returns the indices of the channels of one axis, sorted so that the
// order of the channels themselves does not show.
func inOrder(channels []Orientation, axis Axis) []int {
	var at []int
	for i, o := range channels {
		if o.Axis == axis {
			at = append(at, i)
		}
	}
	slices.SortStableFunc(at, func(i, j int) int {
		a, b := channels[i], channels[j]
		return cmp.Or(
			knownFirst(a.AzimuthDeg, b.AzimuthDeg),
			cmp.Compare(rankOrLast(a.Order), rankOrLast(b.Order)),
			cmp.Compare(a.Label, b.Label),
		)
	})
	return at
}

func knownFirst(a, b Number) int {
	switch {
	case a.Known && b.Known:
		return cmp.Compare(a.Value, b.Value)
	case a.Known:
		return -1
	case b.Known:
		return 1
	}
	return 0
}

func rankOrLast(order int) int {
	if order == 0 {
		return 3
	}
	return order
}

// keepPair returns the two horizontals that get roles: the first of each role of
// its own where there are both, else the first two.
func keepPair(channels []Orientation, horizontal []int) []int {
	if len(horizontal) <= 2 {
		return horizontal
	}
	pair := horizontal[:1:1]
	first := ownRole(channels[horizontal[0]])
	for _, i := range horizontal[1:] {
		if own := ownRole(channels[i]); own != "" && first != "" && own != first {
			return append(pair, i)
		}
	}
	return horizontal[:2]
}

// ownRole is the role of a horizontal by its own direction, "" where neither
// azimuth nor rank is known.
func ownRole(o Orientation) string {
	switch a := o.AzimuthDeg.Value; {
	case o.AzimuthDeg.Known:
		if a >= 315 || a < 45 || a >= 135 && a < 225 {
			return RoleH1
		}
		return RoleH2
	case o.Order == 1:
		return RoleH1
	case o.Order == 2:
		return RoleH2
	}
	return ""
}
