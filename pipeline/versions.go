package pipeline

import (
	"cmp"
	"context"
	"errors"
	"math"
	"slices"
	"strings"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/pipeline/likeness"
)

// parallelDeg is how far apart two azimuths of one direction may be stated.
const parallelDeg = 2

// versions settles which components hold the same motion as one of the record, and
// which of them statistics take: the one whose record comes first by precedence.
func (s *settler) versions(ctx context.Context, recordID int64) error {
	found, err := s.tx.Versions(ctx, recordID)
	if err != nil {
		return err
	}
	records := byPreference(found)
	var taken []*db.Version
	for _, record := range records {
		var own []*db.Version
		for _, v := range record {
			of, err := s.sameMotion(ctx, v, taken)
			if err != nil {
				return err
			}
			if of == 0 {
				own = append(own, v)
			}
			if of != v.DuplicateOf {
				if err := s.tx.SetDuplicate(ctx, v.ComponentID, of); err != nil {
					return err
				}
			}
		}
		taken = append(taken, own...)
	}
	return nil
}

// sameMotion returns the first of the components that holds the motion of v, 0 for
// none.
func (s *settler) sameMotion(ctx context.Context, v *db.Version, taken []*db.Version) (int64, error) {
	for _, other := range taken {
		if !canBeOne(v, other) {
			continue
		}
		if v.Digest == other.Digest {
			return other.ComponentID, nil
		}
		same, err := s.alike(ctx, v, other)
		if err != nil || same {
			return other.ComponentID, err
		}
	}
	return 0, nil
}

// canBeOne reports whether two components measure one direction at one time and
// place, as far as they say.
func canBeOne(a, b *db.Version) bool {
	switch {
	case a.EventID != 0 && b.EventID != 0 && a.EventID != b.EventID, a.StationCode != "" && b.StationCode != "" && a.StationCode != b.StationCode:
		return false
	case a.Axis != b.Axis:
		return a.Digest == b.Digest && (a.Axis == axes[ingest.AxisUnknown] || b.Axis == axes[ingest.AxisUnknown])
	case !a.Start.IsZero() && !b.Start.IsZero() && (a.End().Before(b.Start) || b.End().Before(a.Start)):
		return false
	case a.Axis == axes[ingest.AxisVertical]:
		return true
	case a.AzimuthDeg != nil && b.AzimuthDeg != nil:
		// One may point the other way.
		return math.Abs(math.Remainder(*a.AzimuthDeg-*b.AzimuthDeg, 180)) <= parallelDeg
	}
	return strings.EqualFold(a.Label, b.Label) || a.Digest == b.Digest
}

// alike compares the samples of two components, once for all time.
func (s *settler) alike(ctx context.Context, a, b *db.Version) (bool, error) {
	l, ok, err := s.tx.LikenessOf(ctx, a.ComponentID, b.ComponentID)
	if err != nil {
		return false, err
	}
	if !ok {
		if a.ComponentID > b.ComponentID {
			a, b = b, a
		}
		if l, err = s.compare(ctx, a, b); err != nil {
			return false, err
		}
		if err := s.tx.PutLikeness(ctx, l); err != nil {
			return false, err
		}
	}
	return l.Kind != likeness.Different.String(), nil
}

func (s *settler) compare(ctx context.Context, a, b *db.Version) (db.Likeness, error) {
	l := db.Likeness{FirstID: a.ComponentID, SecondID: b.ComponentID, Kind: likeness.Different.String()}
	first, err := s.motion(ctx, a)
	if err != nil || first == nil {
		return l, err
	}
	second, err := s.motion(ctx, b)
	if err != nil || second == nil {
		return l, err
	}
	v := s.comparer.Compare(first, second)
	l.Kind, l.Scale, l.Correlation = v.Kind.String(), v.Scale, v.Correlation
	return l, nil
}

// motion reads a component's samples; nil where the store has lost them.
func (s *settler) motion(ctx context.Context, v *db.Version) (*likeness.Motion, error) {
	samples, err := s.tx.SamplesOf(ctx, *v)
	if errors.Is(err, db.ErrDamaged) {
		return nil, nil
	}
	if err != nil {
		return nil, err
	}
	return likeness.NewMotion(samples, v.StepS)
}

// byPreference groups components by record, the record first of which statistics
// take the motion: one with both horizontals before one without, corrected before
// raw, then the wider usable band, the longer motion, and the earlier path.
func byPreference(found []db.Version) [][]*db.Version {
	byRecord := map[int64][]*db.Version{}
	for i := range found {
		v := &found[i]
		byRecord[v.RecordID] = append(byRecord[v.RecordID], v)
	}
	var records [][]*db.Version
	for _, r := range byRecord {
		records = append(records, r)
	}
	slices.SortFunc(records, func(a, b []*db.Version) int {
		return cmp.Or(
			cmp.Compare(horizontalCount(b), horizontalCount(a)),
			cmp.Compare(processingRank(a[0].Processing), processingRank(b[0].Processing)),
			cmp.Compare(usableBand(b[0]), usableBand(a[0])),
			cmp.Compare(float64(b[0].Samples)*b[0].StepS, float64(a[0].Samples)*a[0].StepS),
			strings.Compare(a[0].SourcePath, b[0].SourcePath),
			strings.Compare(a[0].RecordCode, b[0].RecordCode))
	})
	return records
}

func horizontalCount(components []*db.Version) int {
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
	order := []ingest.Processing{ingest.ProcessingCorrected, ingest.ProcessingMeanRemoved, ingest.ProcessingUnknown, ingest.ProcessingRaw}
	return slices.Index(order, ingest.Processing(state))
}

// usableBand is the logarithm of the ratio of the corner frequencies, 0 where one
// is not stated.
func usableBand(v *db.Version) float64 {
	if v.LowCutHz == nil || v.HighCutHz == nil || !(*v.LowCutHz > 0) {
		return 0
	}
	return math.Log(*v.HighCutHz / *v.LowCutHz)
}
