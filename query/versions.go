package query

import (
	"cmp"
	"context"
	"math"
	"slices"
	"strings"

	"swaybook/db"
)

// versions say which components hold one motion, and of which record statistics
// take it first.
type versions struct {
	motion map[componentKey]int64
	rank   map[int64]int // by record; none where no other holds one of its motions
	code   map[int64]string
}

// componentKey is a component's record and role.
type componentKey struct {
	record int64
	role   string
}

func readVersions(ctx context.Context, snapshot *db.Snapshot) (versions, error) {
	found, err := snapshot.Versions(ctx)
	if err != nil {
		return versions{}, err
	}
	v := versions{motion: map[componentKey]int64{}, rank: map[int64]int{}, code: map[int64]string{}}
	byRecord := map[int64][]*db.Version{}
	for i := range found {
		c := &found[i]
		if c.MotionID != 0 {
			v.motion[componentKey{c.RecordID, c.Role}] = c.MotionID
		}
		v.code[c.RecordID] = c.RecordCode
		byRecord[c.RecordID] = append(byRecord[c.RecordID], c)
	}
	for rank, id := range byPreference(byRecord) {
		v.rank[id] = rank
	}
	return v, nil
}

// byPreference orders records, the one first of which statistics take a motion: one
// with both horizontals before one without, corrected before raw, then the wider
// usable band, the longer motion, the finer step, and the earlier path, each of the least
// favourable component.
func byPreference(records map[int64][]*db.Version) []int64 {
	var ids []int64
	for id := range records {
		ids = append(ids, id)
	}
	worths := map[int64]worth{}
	for _, id := range ids {
		worths[id] = worthOf(records[id])
	}
	slices.SortFunc(ids, func(i, j int64) int {
		a, b := worths[i], worths[j]
		return cmp.Or(
			cmp.Compare(b.horizontals, a.horizontals),
			cmp.Compare(a.processing, b.processing),
			cmp.Compare(b.band, a.band),
			cmp.Compare(b.lengthS, a.lengthS),
			cmp.Compare(a.stepS, b.stepS),
			strings.Compare(a.path, b.path),
			strings.Compare(a.code, b.code))
	})
	return ids
}

// worth is what speaks for a record: of its components the least favourable.
type worth struct {
	horizontals, processing int
	band, lengthS, stepS    float64
	path, code              string // the first by name
}

func worthOf(components []*db.Version) worth {
	w := worth{horizontals: horizontals(components), band: math.Inf(1), lengthS: math.Inf(1), path: components[0].SourcePath, code: components[0].RecordCode}
	for _, v := range components {
		w.processing = max(w.processing, processingRank(v.Processing))
		w.band = min(w.band, usableBand(v))
		w.lengthS = min(w.lengthS, lengthS(v))
		w.stepS = max(w.stepS, v.StepS)
		w.path = min(w.path, v.SourcePath)
	}
	return w
}

func horizontals(components []*db.Version) int {
	n := 0
	for _, v := range components {
		if v.Role == db.RoleH1 || v.Role == db.RoleH2 {
			n++
		}
	}
	return n
}

// processingRank is low for what is ready for use.
func processingRank(state string) int {
	order := []string{"corrected", "mean-removed", "unknown", "raw"}
	if at := slices.Index(order, state); at >= 0 {
		return at
	}
	return len(order)
}

// lengthS is the time from the first sample to the last in s, to the microsecond: a copy
// at another step must not win by rounding.
func lengthS(v *db.Version) float64 { return math.Round(1e6*float64(v.Samples-1)*v.StepS) / 1e6 }

// usableBand is the logarithm of the ratio of the corner frequencies, the higher half the
// sampling rate where it is not stated, 0 where the lower is not.
func usableBand(v *db.Version) float64 {
	if v.LowCutHz == nil || !(*v.LowCutHz > 0) {
		return 0
	}
	high := 0.5 / v.StepS
	if v.HighCutHz != nil {
		high = min(high, *v.HighCutHz)
	}
	return math.Log(high / *v.LowCutHz)
}

// repeated returns, by position, the motions that one before them by preference
// holds too, with the code of its record. A pair repeats what shares one of its
// components.
func (v *versions) repeated(motions []motion) map[int]string {
	if len(v.motion) == 0 {
		return nil
	}
	var order []int
	for i := range motions {
		if len(v.motionsOf(&motions[i])) > 0 {
			order = append(order, i)
		}
	}
	record := func(i int) int64 { return motions[i].members[0].RecordID }
	slices.SortStableFunc(order, func(i, j int) int { return cmp.Compare(v.rank[record(i)], v.rank[record(j)]) })
	type held struct {
		motion int64
		role   string // "" of single components: their roles may differ
	}
	taken := map[held]int64{} // the record that has it
	out := map[int]string{}
	for _, i := range order {
		m := &motions[i]
		role := ""
		if len(m.members) > 1 {
			role = m.role
		}
		ids := v.motionsOf(m)
		for _, id := range ids {
			if by, ok := taken[held{id, role}]; ok && by != record(i) {
				out[i] = v.code[by]
			}
		}
		if out[i] != "" {
			continue
		}
		for _, id := range ids {
			taken[held{id, role}] = record(i)
		}
	}
	return out
}

// motionsOf are the motions of the members that others hold too.
func (v *versions) motionsOf(m *motion) []int64 {
	var out []int64
	for _, c := range m.members {
		if id := v.motion[componentKey{c.RecordID, c.Role}]; id != 0 {
			out = append(out, id)
		}
	}
	return out
}
