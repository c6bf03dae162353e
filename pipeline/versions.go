package pipeline

import (
	"context"
	"errors"
	"math"
	"strings"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/pipeline/likeness"
)

// parallelDeg is how far apart two azimuths of one direction may be stated.
const parallelDeg = 2

// versions settles which components of the record, and of all records that may
// hold the same motions as it or as one of those, do. Whatever may be compared is
// compared each with each, so that the order does not matter.
func (s *settler) versions(ctx context.Context, recordID int64) error {
	records, err := s.related(ctx, recordID)
	if err != nil || len(records) < 2 {
		return err
	}
	var all []*db.Version
	for _, id := range records {
		s.settled[db.Subject{Kind: db.SubjectRecord, ID: id}] = true
		found, err := s.tx.VersionsOf(ctx, id)
		if err != nil {
			return err
		}
		for i := range found {
			all = append(all, &found[i])
		}
	}
	motionOf, err := s.motions(ctx, all)
	if err != nil {
		return err
	}
	for i, v := range all {
		if motionOf[i] == v.MotionID {
			continue
		}
		if err := s.tx.SetMotion(ctx, v.ComponentID, motionOf[i]); err != nil {
			return err
		}
	}
	return nil
}

// related returns the record and all that are connected with it by what
// db.Tx.Related says.
func (s *settler) related(ctx context.Context, recordID int64) ([]int64, error) {
	records, seen := []int64{recordID}, map[int64]bool{recordID: true}
	for i := 0; i < len(records); i++ { // appended to below
		found, err := s.tx.Related(ctx, records[i])
		if err != nil {
			return nil, err
		}
		for _, id := range found {
			if !seen[id] {
				seen[id] = true
				records = append(records, id)
			}
		}
	}
	return records, nil
}

// motions returns the motion of each component: the least id of those that hold it,
// 0 where there is no other.
func (s *settler) motions(ctx context.Context, all []*db.Version) ([]int64, error) {
	likes, err := s.likes(ctx, all)
	if err != nil {
		return nil, err
	}
	group := make([]int, len(all)) // the first position of those that are one
	for i := range group {
		group[i] = i
	}
	for _, l := range likes {
		if !hasRival(all, likes, l) {
			unite(group, l.i, l.j)
		}
	}
	least, size := map[int]int64{}, map[int]int{}
	for i, g := range group {
		if size[g]++; size[g] == 1 || all[i].ComponentID < least[g] {
			least[g] = all[i].ComponentID
		}
	}
	out := make([]int64, len(all))
	for i, g := range group {
		if size[g] > 1 {
			out[i] = least[g]
		}
	}
	return out, nil
}

// like says that two components, by position, may hold the same motion.
type like struct {
	i, j     int
	strength float64 // by which to choose among several
}

// likes compares what may hold the same motion.
func (s *settler) likes(ctx context.Context, all []*db.Version) ([]like, error) {
	var out []like
	read := map[int64]*likeness.Motion{}
	for i, a := range all {
		for j, b := range all[:i] {
			if a.RecordID == b.RecordID || !canBeOne(a, b) {
				continue
			}
			strength, same, err := s.alike(ctx, a, b, read)
			if err != nil {
				return nil, err
			}
			if same {
				out = append(out, like{i, j, strength})
			}
		}
	}
	return out, nil
}

// hasRival reports whether one of the two components is more like a sensor beside the
// other: what one sensor gave is like what those beside it gave, and most like its own.
func hasRival(all []*db.Version, likes []like, l like) bool {
	for _, r := range likes {
		if r.strength <= l.strength {
			continue
		}
		for _, ends := range [][2]int{{r.i, r.j}, {r.j, r.i}} {
			shared, rival := ends[0], ends[1]
			if shared == l.i && areTwoSensors(all[rival], all[l.j]) || shared == l.j && areTwoSensors(all[rival], all[l.i]) {
				return true
			}
		}
	}
	return false
}

// unite makes the groups of i and j one.
func unite(group []int, i, j int) {
	from, to := max(group[i], group[j]), min(group[i], group[j])
	for k, g := range group {
		if g == from {
			group[k] = to
		}
	}
}

// canBeOne reports whether two components measure one direction at one time and
// place, as far as they say.
func canBeOne(a, b *db.Version) bool {
	return !differ(a.EventID, b.EventID) && !differ(a.StationCode, b.StationCode) && overlap(a, b) && areParallel(a, b)
}

// differ reports whether both are known and not the same.
func differ[T comparable](a, b T) bool {
	var unknown T
	return a != unknown && b != unknown && a != b
}

func overlap(a, b *db.Version) bool {
	return a.Start.IsZero() || b.Start.IsZero() || !a.End().Before(b.Start) && !b.End().Before(a.Start)
}

// areParallel reports whether two components measure one direction, either way
// round. Of equal samples it is enough that none says otherwise.
func areParallel(a, b *db.Version) bool {
	unknown := axes[ingest.AxisUnknown]
	switch {
	case a.Axis != b.Axis:
		return a.Digest == b.Digest && (a.Axis == unknown || b.Axis == unknown)
	case a.Axis == axes[ingest.AxisVertical]:
		return true
	case a.AzimuthDeg != nil && b.AzimuthDeg != nil:
		return math.Abs(math.Remainder(*a.AzimuthDeg-*b.AzimuthDeg, 180)) <= parallelDeg
	}
	return strings.EqualFold(a.Label, b.Label) || a.Digest == b.Digest
}

// areTwoSensors reports whether two components are of instruments that stand on
// different things or that their network tells apart: on one foundation, or down one
// borehole, motions are much alike.
func areTwoSensors(a, b *db.Version) bool {
	unknown := string(ingest.SitingUnknown)
	return a.SourceSHA256 == b.SourceSHA256 || a.Siting != b.Siting && a.Siting != unknown && b.Siting != unknown ||
		a.SourceFormat == b.SourceFormat && (differ(a.Instrument, b.Instrument) || differ(a.Channel, b.Channel))
}

// isOneSensorProcessed reports whether two components are, by all that is said of
// them, of one sensor, in different states of processing. Where many stand side by
// side, in structures and boreholes, it takes the same channel.
func isOneSensorProcessed(a, b *db.Version) bool {
	if a.EventID == 0 || a.EventID != b.EventID || a.StationCode == "" || a.StationCode != b.StationCode || differ(a.Network, b.Network) {
		return false
	}
	if a.Start.IsZero() || b.Start.IsZero() || a.Processing == b.Processing || areTwoSensors(a, b) || differ(a.Instrument, b.Instrument) {
		return false
	}
	return a.Channel == b.Channel && a.Channel != "" || !differ(a.Channel, b.Channel) && !standsAmongOthers(a) && !standsAmongOthers(b)
}

func standsAmongOthers(v *db.Version) bool {
	return v.Siting == string(ingest.SitingStructure) || v.Siting == string(ingest.SitingBorehole)
}

// alike reports whether two components hold the same motion, and how much alike they
// are. read keeps what is read of each.
func (s *settler) alike(ctx context.Context, a, b *db.Version, read map[int64]*likeness.Motion) (strength float64, same bool, err error) {
	if a.Digest == b.Digest {
		return 1, true, nil
	}
	l, ok, err := s.tx.LikenessOf(ctx, a.ComponentID, b.ComponentID)
	if err == nil && !ok {
		l, err = s.compare(ctx, a, b, read)
	}
	if err != nil {
		return 0, false, err
	}
	strength = max(math.Abs(l.Correlation), math.Abs(l.BandCorrelation))
	switch l.Kind {
	case likeness.Different.String():
		return strength, false, nil
	case likeness.Near.String():
		return strength, isOneSensorProcessed(a, b), nil
	case likeness.Similar.String():
		return strength, !areTwoSensors(a, b), nil
	}
	return 1, true, nil
}

// compare compares the samples of two components, once for all time.
func (s *settler) compare(ctx context.Context, a, b *db.Version, read map[int64]*likeness.Motion) (db.Likeness, error) {
	if a.ComponentID > b.ComponentID {
		a, b = b, a
	}
	l := db.Likeness{FirstID: a.ComponentID, SecondID: b.ComponentID, Kind: likeness.Different.String()}
	first, err := s.motion(ctx, a, read)
	if err != nil || first == nil {
		return l, err
	}
	second, err := s.motion(ctx, b, read)
	if err != nil || second == nil {
		return l, err
	}
	v := s.comparer.Compare(first, second)
	l.Kind, l.Scale, l.Correlation, l.BandCorrelation = v.Kind.String(), v.Scale, v.Correlation, v.InBand
	return l, s.tx.PutLikeness(ctx, l)
}

// motion reads a component's samples; nil where the store has lost them.
func (s *settler) motion(ctx context.Context, v *db.Version, read map[int64]*likeness.Motion) (*likeness.Motion, error) {
	if m, ok := read[v.ComponentID]; ok {
		return m, nil
	}
	samples, err := s.tx.SamplesOf(ctx, v)
	if errors.Is(err, db.ErrDamaged) {
		read[v.ComponentID] = nil
		return nil, nil
	}
	if err != nil {
		return nil, err
	}
	read[v.ComponentID], err = likeness.NewMotion(samples, v.StepS)
	return read[v.ComponentID], err
}
