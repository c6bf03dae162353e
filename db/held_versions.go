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
	rows, err := s.tx.QueryContext(ctx, `SELECT id, record_id, role, motion_id, step_s, samples, processing, low_cut_hz, high_cut_hz, source_id FROM `+s.shown("component"))
	if err != nil {
		return nil, s.unread("component", err)
	}
	seen := s.tally("component", "", "id", "record_id", "role", "motion_id", "step_s", "samples", "processing", "low_cut_hz", "high_cut_hz", "source_id")
	type row struct {
		Version
		motion sql.NullInt64
	}
	found, err := collectSeen(rows, seen, func(v *row) []any {
		return []any{&v.ComponentID, &v.RecordID, &v.Role, &v.motion, &v.StepS, &v.Samples, &v.Processing, &v.LowCutHz, &v.HighCutHz, &v.SourceID}
	})
	if err != nil {
		return nil, s.unread("component", err)
	}
	out := make([]Version, len(found))
	for i, v := range found {
		out[i] = v.Version
		out[i].MotionID = v.motion.Int64
	}
	return out, nil
}

// recordCodes are the codes of records by their ids.
func (s *Snapshot) recordCodes(ctx context.Context) (map[int64]string, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT id, code FROM `+s.shown("record"))
	if err != nil {
		return nil, s.unread("record", err)
	}
	type row struct {
		id   int64
		code string
	}
	found, err := collectSeen(rows, s.tally("record", "", "id", "code"), func(v *row) []any { return []any{&v.id, &v.code} })
	if err != nil {
		return nil, s.unread("record", err)
	}
	out := make(map[int64]string, len(found))
	for _, v := range found {
		out[v.id] = v.code
	}
	return out, nil
}
