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
	v := versions{motion: map[componentKey]int64{}, rank: map[int64]int{}}
	byRecord := map[int64][]*db.Version{}
	for i := range found {
		c := &found[i]
		if c.MotionID != 0 {
			v.motion[componentKey{c.RecordID, c.Role}] = c.MotionID
		}
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

// rival is a motion that shares a component's motion with others of another record: its
// position, and those of the others that are preferred to it.
type rival struct {
	at        int
	preferred []int
}

// rivals returns the motions to which others are preferred, in the order of preference. A
// pair shares what one of its components does.
func (v *versions) rivals(motions []motion) []rival {
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
	holders := map[held][]int{}
	var out []rival
	for _, i := range order {
		m, r := &motions[i], rival{at: i}
		role := ""
		if len(m.members) > 1 {
			role = m.role
		}
		for _, id := range v.motionsOf(m) {
			key := held{id, role}
			for _, j := range holders[key] {
				if record(j) != record(i) && !slices.Contains(r.preferred, j) {
					r.preferred = append(r.preferred, j)
				}
			}
			holders[key] = append(holders[key], i)
		}
		if len(r.preferred) > 0 {
			out = append(out, r)
		}
	}
	return out
}

// repeated returns, by position, the motions that another one stands for which is
// preferred, with the code of its record.
func (v *versions) repeated(motions []motion) map[int]string {
	out := map[int]string{}
	for _, r := range v.rivals(motions) {
		for _, j := range r.preferred {
			if out[j] == "" {
				out[r.at] = motions[j].record()
			}
		}
	}
	return out
}

// reasonRepeated leaves out motions that count in a better version.
const reasonRepeated = "another version of the motion is taken"

// keepBest takes out, as NaN, at every period the ordinates of motions of which a preferred
// version has one there. It returns the motions, by position, that have none left, or none
// at the period of position must where that is not negative, and counts those that stand in
// for a version at a part of the periods. What is unfit stands in nobody's way.
func (o *ordinates) keepBest(rivals []rival, must int, unfit map[int]string) (without map[int]string, standIns int) {
	without = map[int]string{}
	for _, r := range rivals {
		if _, isOut := unfit[r.at]; isOut {
			continue
		}
		kept, lost := 0, 0
		for p := range o.oscillators {
			sd := o.at(p)
			if math.IsNaN(sd[r.at]) {
				continue
			}
			taken := slices.ContainsFunc(r.preferred, func(j int) bool {
				_, isOut := unfit[j]
				return !isOut && !math.IsNaN(sd[j])
			})
			if !taken {
				kept++
				continue
			}
			lost++
			sd[r.at] = math.NaN()
		}
		switch {
		case lost == 0:
		case kept == 0, must >= 0 && math.IsNaN(o.at(must)[r.at]):
			without[r.at] = reasonRepeated
		default:
			standIns++
		}
	}
	return without, standIns
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
