package pipeline

import (
	"cmp"
	"context"
	"fmt"
	"path"
	"path/filepath"
	"slices"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/ingest/archive"
)

// placement is where a channel goes: the record's code, the channel's role, and
// the new roles of what the record holds already.
type placement struct {
	code      string
	newRecord bool
	role      string
	renamed   map[string]string
	from      *departure // what comes along, nil for nothing
}

// departure is what leaves a record for the one to which a channel of its delivery goes,
// and the new roles of what stays there.
type departure struct {
	recordID int64
	moved    map[string]string // roles there and in the other record
	paths    []string          // the files of what leaves
	renamed  map[string]string
}

// maxVersions is how many versions of one record are held. More are a sign that
// something else than a version tells the files apart.
const maxVersions = 20

// place finds the record for a channel, of so many samples, of the file. Same event, station and
// instrument make one record, unless the channel starts at another time (a
// second trigger), its direction is taken by another sensor of the same file
// family, or it is another version of what the record holds: another format or
// state of processing, or a direction that is taken already. Of several versions the one
// is taken that holds channels of the same file, or else of its folder: what was delivered
// together stays so, and follows the channel where that finds its direction taken by
// another delivery. Files without identity make one record only within a folder. What does
// not belong gets a record of its own, whose code says why. A channel that states no
// direction, and another content of a file that is held, are errors.
func place(ctx context.Context, tx *db.Tx, res result, c *ingest.Channel, samples int) (placement, error) {
	r, err := findRecord(ctx, tx, res, c, samples)
	if err != nil {
		return placement{}, err
	}
	p, rival, err := placeVersion(ctx, tx, r, res, c)
	if err != nil || rival == nil {
		return p, err
	}
	if r, err = recordOfCode(ctx, tx, r.Code+"_ch"+ingest.Slug(c.ChannelCode)); err != nil {
		return p, err
	}
	if p, rival, err = placeVersion(ctx, tx, r, res, c); rival != nil {
		err = takenError(r.Code, *rival, res.source, c)
	}
	return p, err
}

// placeVersion finds the version of the record to which the channel belongs, the
// record itself, r, or one of code_v2, code_v3 …. rival is the component of another
// sensor that has the channel's direction.
func placeVersion(ctx context.Context, tx *db.Tx, r db.StoredRecord, res result, c *ingest.Channel) (p placement, rival *db.Component, err error) {
	var found versionsFound
	code := r.Code
	for n := 1; found.nearest < nearestOf(res); n++ {
		if n > 1 {
			if r, err = recordOfCode(ctx, tx, fmt.Sprintf("%s_v%d", code, n)); err != nil {
				return p, nil, err
			}
		}
		if r.ID == 0 {
			found.free = r.Code
			break
		}
		if !isSameVersion(r, res, c) {
			continue
		}
		_, rival := join(r, res, c)
		switch {
		case rival == nil:
		case isAmended(rival, res.source) || hasNoDirection(rival, c) || n > maxVersions:
			return p, nil, takenError(r.Code, *rival, res.source, c)
		case c.ChannelCode != "" && rival.Channel != c.ChannelCode:
			return p, rival, nil
		}
		version := r
		found.add(&version, rival, res, c)
	}
	to := found.chosen()
	p, rival = join(to, res, c)
	if found.parted != nil {
		p = bringAlong(*found.parted, to, res, c, p)
	}
	return p, rival, nil
}

// versionsFound are the versions of a record among which a channel has its place.
type versionsFound struct {
	near    *db.StoredRecord // the one that holds what is nearest to the channel's file
	nearest int
	parted  *db.StoredRecord // one in which what came with the channel cannot stay
	isTaken bool             // the channel's direction, in one that holds what came with it
	lone    *db.StoredRecord // the first of lone components of several deliveries
	free    string           // the code of a new one
}

// add takes a version into account, in which the rival, nil for none, has the channel's
// direction.
func (f *versionsFound) add(r *db.StoredRecord, rival *db.Component, res result, c *ingest.Channel) {
	switch near := nearness(r.Components, res); {
	case near > elsewhere && (rival != nil && near > nearnessOf(rival, res) || rival == nil && hasOthers(r.Components, res)):
		f.parted = r
	case near > elsewhere && rival != nil:
		f.isTaken = true
	case near > f.nearest:
		f.near, f.nearest = r, near
	case rival == nil && f.lone == nil && areLone(r, res, c):
		f.lone = r
	}
}

// chosen is the version for the channel. Lone components of several deliveries, as of an
// archive with a folder for each direction, stand together as long as no delivery has
// another one.
func (f *versionsFound) chosen() db.StoredRecord {
	switch {
	case f.near != nil:
		return *f.near
	case f.parted == nil && !f.isTaken && f.lone != nil:
		return *f.lone
	}
	return db.StoredRecord{Code: f.free}
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

// recordOfCode returns the record with this code, without ID where it is a new one.
func recordOfCode(ctx context.Context, tx *db.Tx, code string) (db.StoredRecord, error) {
	r, _, err := tx.FindRecord(ctx, code)
	r.Code = code
	return r, err
}

// findInFolder returns the record of files without identity that lie in the
// file's folder, by what their names have in common: code, or the folder's name where that
// is nothing but a direction. In other folders others may have that code.
func findInFolder(ctx context.Context, tx *db.Tx, res result, code string) (db.StoredRecord, error) {
	if base, o := ingest.SplitStem(res.stem); base == res.stem && o.Axis != ingest.AxisUnknown {
		code = cmp.Or(ingest.Slug(path.Base(folderOf(res.source.Path))), code)
	}
	for n, base := 1, code; ; n++ {
		switch {
		case n == 2:
			code = base + "_" + folderSlug(res)
		case n > 2:
			code = fmt.Sprintf("%s_%s-%d", base, folderSlug(res), n-1)
		}
		r, err := recordOfCode(ctx, tx, code)
		if err != nil || len(r.Components) == 0 || archive.Folder(r.Components[0].SourcePath) == archive.Folder(res.source.Path) {
			return r, err
		}
	}
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

// join gives the channel a role beside the record's components, or returns the
// component that stands in its way: the one that has its direction, or of two other
// horizontals the one that lies farther from the file.
func join(r db.StoredRecord, res result, c *ingest.Channel) (placement, *db.Component) {
	if rival := sameDirection(r.Components, c.Orientation); rival != nil {
		return placement{}, rival
	}
	roles := ingest.AssignRoles(append(orientationsOf(r.Components), c.Orientation))
	if i := slices.Index(roles, ""); i >= 0 {
		return placement{}, farthest(r.Components, min(i, len(r.Components)-1), res)
	}
	return placement{code: r.Code, newRecord: r.ID == 0, role: roles[len(roles)-1], renamed: renamed(r.Components, roles)}, nil
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

// renamed says which components have other roles now.
func renamed(components []db.Component, roles []string) map[string]string {
	out := map[string]string{}
	for i, held := range components {
		if held.Role != roles[i] {
			out[held.Role] = roles[i]
		}
	}
	return out
}
