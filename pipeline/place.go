package pipeline

import (
	"context"
	"fmt"
	"path"
	"path/filepath"
	"time"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/ingest/archive"
)

// startTolerance is how far apart the first samples of one record's components
// may be. Recorders start all channels together, headers round to a second.
const startTolerance = time.Second

// placement is where a channel goes: the record's code, the channel's role, and
// the new roles of what the record holds already.
type placement struct {
	code      string
	newRecord bool
	role      string
	renamed   map[string]string
}

// maxVersions is how many versions of one record are held. More are a sign that
// something else than a version tells the files apart.
const maxVersions = 20

// place finds the record for a channel of the file. Same event, station and
// instrument make one record, unless the channel starts at another time (a
// second trigger), its direction is taken by another sensor of the same file
// family, or it is another version of what the record holds: another format or
// state of processing, or a direction that is taken already. Files without
// identity make one record only within a folder. What does not belong gets a record
// of its own, whose code says why. A channel that states no direction, and another
// content of a file that is held, are errors.
func place(ctx context.Context, tx *db.Tx, res result, c *ingest.Channel) (placement, error) {
	code, r, err := findRecord(ctx, tx, res, c)
	if err != nil {
		return placement{}, err
	}
	p, rival, err := placeVersion(ctx, tx, code, r, res, c)
	if err != nil || rival == nil {
		return p, err
	}
	code += "_ch" + ingest.Slug(c.ChannelCode)
	if r, _, err = tx.FindRecord(ctx, code); err != nil {
		return placement{}, err
	}
	if p, rival, err = placeVersion(ctx, tx, code, r, res, c); rival != nil {
		err = takenError(code, *rival, res.source, c)
	}
	return p, err
}

// placeVersion finds the version of the record to which the channel belongs, the
// record itself or one of code_v2, code_v3 …. rival is the component of another
// sensor that has the channel's direction.
func placeVersion(ctx context.Context, tx *db.Tx, code string, r db.StoredRecord, res result, c *ingest.Channel) (p placement, rival *db.Component, err error) {
	base := code
	for n := 2; ; n++ {
		if isSameVersion(r, res, c) {
			if p, rival = join(code, r, c); rival == nil {
				return p, nil, nil
			}
			switch {
			case isAmended(rival, res.source) || hasNoDirection(rival, c) || n > maxVersions:
				return p, nil, takenError(code, *rival, res.source, c)
			case c.ChannelCode != "" && rival.Channel != c.ChannelCode:
				return p, rival, nil
			}
		}
		code = fmt.Sprintf("%s_v%d", base, n)
		if r, _, err = tx.FindRecord(ctx, code); err != nil {
			return p, nil, err
		}
	}
}

// isSameVersion reports whether the channel can stand beside what the record holds:
// both horizontals of a pair have been through the same hands.
func isSameVersion(r db.StoredRecord, res result, c *ingest.Channel) bool {
	for _, held := range r.Components {
		if held.SourceFormat != res.source.Format || held.Processing != string(c.Processing) {
			return false
		}
	}
	return true
}

// isAmended reports whether the file holds another content of what is held.
func isAmended(held *db.Component, src db.Source) bool {
	return held.SourcePath == src.Path && held.SourceSHA256 != src.SHA256
}

func hasNoDirection(held *db.Component, c *ingest.Channel) bool {
	return c.Orientation.Axis == ingest.AxisUnknown || held.Axis == axes[ingest.AxisUnknown]
}

// findRecord returns the record to which the channel belongs by what it states,
// or the code of a new one.
func findRecord(ctx context.Context, tx *db.Tx, res result, c *ingest.Channel) (code string, r db.StoredRecord, err error) {
	code, stated := ingest.RecordID(c, res.stem)
	if r, _, err = tx.FindRecord(ctx, code); err != nil {
		return code, r, err
	}
	if !stated && len(r.Components) > 0 && folderOf(r.Components[0].SourcePath) != folderOf(res.source.Path) {
		code += "_" + folderSlug(res)
		r, _, err = tx.FindRecord(ctx, code)
		return code, r, err
	}
	if !startsApart(r.Start, c.Start) {
		return code, r, nil
	}
	later, ok, err := tx.FindTrigger(ctx, code, c.Start, startTolerance)
	if ok || err != nil {
		return later.Code, later, err
	}
	return code + c.Start.UTC().Format("_T150405"), db.StoredRecord{}, nil
}

// folderOf is the folder of a file, of a member of an archive that in which it
// would lie unpacked.
func folderOf(file string) string { return path.Dir(archive.InPlace(filepath.ToSlash(file))) }

// folderSlug names the folder of a file below the one that was named, or that
// one itself.
func folderSlug(res result) string {
	if below := folderOf(res.rel); below != "." {
		return ingest.Slug(below)
	}
	return ingest.Slug(path.Base(folderOf(res.source.Path)))
}

// takenError says what the channel stands in the way of, and what to do.
func takenError(code string, rival db.Component, src db.Source, c *ingest.Channel) error {
	switch {
	case isAmended(&rival, src):
		return fmt.Errorf("record %s holds an earlier content of this file: files are not replaced; ingest into a new store (--store) to use the new one", code)
	case hasNoDirection(&rival, c):
		return fmt.Errorf("record %s holds a component of %s, and one of the two states no direction: name it in the file or by the catalogue's component or azimuth_deg column",
			code, rival.SourcePath)
	}
	return fmt.Errorf("record %s holds this direction already (%s, from %s), and so do %d versions of it", code, rival.Role, rival.SourcePath, maxVersions)
}

func startsApart(a, b time.Time) bool {
	return !a.IsZero() && !b.IsZero() && a.Sub(b).Abs() > startTolerance
}

// join gives the channel a role beside the record's components, or returns the
// component that has its direction.
func join(code string, r db.StoredRecord, c *ingest.Channel) (placement, *db.Component) {
	if rival := sameDirection(r.Components, c.Orientation); rival != nil {
		return placement{}, rival
	}
	roles := ingest.AssignRoles(append(orientationsOf(r.Components), c.Orientation))
	for i, role := range roles {
		if role == "" {
			return placement{}, &r.Components[min(i, len(r.Components)-1)]
		}
	}
	p := placement{code: code, newRecord: r.ID == 0, role: roles[len(roles)-1], renamed: map[string]string{}}
	for i, held := range r.Components {
		if held.Role != roles[i] {
			p.renamed[held.Role] = roles[i]
		}
	}
	return p, nil
}

// sameDirection returns the component that measures exactly the direction o.
func sameDirection(components []db.Component, o ingest.Orientation) *db.Component {
	for i, held := range components {
		h := orientationOf(held)
		if h.Axis != o.Axis {
			continue
		}
		same := h.Label == o.Label
		if h.AzimuthDeg.Known && o.AzimuthDeg.Known {
			same = h.AzimuthDeg.Value == o.AzimuthDeg.Value
		}
		if same || o.Axis == ingest.AxisVertical {
			return &components[i]
		}
	}
	return nil
}
