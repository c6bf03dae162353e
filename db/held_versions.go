package db

import (
	"cmp"
	"context"
	"database/sql"
	"slices"
)

// Versions returns the components of the records that hold a motion which another one
// holds too, in the order of their ids; MotionID is 0 of those among them that do not. Of
// each it reads what decides which is the better one: the record, the role, samples and step,
// processing, corners and the path. As a rule there are none, as who read components knows.
func (s *Snapshot) Versions(ctx context.Context) ([]Version, error) {
	if s.hasVersions != nil && !*s.hasVersions {
		return nil, nil
	}
	all, err := s.versions(ctx)
	if err != nil {
		return nil, err
	}
	has := map[int64]bool{}
	for i := range all {
		has[all[i].RecordID] = has[all[i].RecordID] || all[i].MotionID != 0
	}
	out := slices.DeleteFunc(all, func(v Version) bool { return !has[v.RecordID] })
	if len(out) == 0 {
		return nil, nil
	}
	codes, err := s.recordCodes(ctx)
	if err != nil {
		return nil, err
	}
	files, err := s.files(ctx, "", nil)
	if err != nil {
		return nil, err
	}
	for i := range out {
		v := &out[i]
		v.RecordCode, v.SourcePath = codes[v.RecordID], files[v.SourceID].path
	}
	slices.SortFunc(out, func(a, b Version) int { return cmp.Compare(a.ComponentID, b.ComponentID) })
	return out, nil
}

// versions are all components. All are read, since only all can be compared with their seal.
func (s *Snapshot) versions(ctx context.Context) ([]Version, error) {
	var v Version
	var motion sql.NullInt64
	var out []Version
	err := s.scan(ctx, wanted{
		name: "component", columns: words(`id record_id role motion_id step_s samples processing low_cut_hz high_cut_hz source_id`),
		into: []any{&v.ComponentID, &v.RecordID, &v.Role, &motion, &v.StepS, &v.Samples, &v.Processing, &v.LowCutHz, &v.HighCutHz, &v.SourceID},
	}, func() error {
		v.MotionID = motion.Int64
		out = append(out, v)
		return nil
	})
	return out, err
}

// recordCodes are the codes of records by their ids.
func (s *Snapshot) recordCodes(ctx context.Context) (map[int64]string, error) {
	var id int64
	var code string
	out := map[int64]string{}
	err := s.scan(ctx, wanted{name: "record", columns: words(`id code`), into: []any{&id, &code}}, func() error {
		out[id] = code
		return nil
	})
	return out, err
}
