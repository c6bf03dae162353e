package pipeline

import (
	"slices"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/ingest/archive"
	"swaybook/pipeline/spectrum"
)

// How near to a file another one lies of which a record holds components.
const (
	elsewhere   = iota
	inOneFolder // of one archive
	ofOneStem   // with names that differ in the direction only
	inOneFile
)

// nearness is that of the nearest component.
func nearness(components []db.Component, res result) int {
	near := elsewhere
	for i := range components {
		near = max(near, nearnessOf(&components[i], res))
	}
	return near
}

func nearnessOf(c *db.Component, res result) int {
	switch {
	case c.SourcePath == res.source.Path:
		return inOneFile
	case archive.Folder(c.SourcePath) != archive.Folder(res.source.Path):
		return elsewhere
	case baseStem(memberStem(c.SourcePath)) == baseStem(res.stem):
		return ofOneStem
	}
	return inOneFolder
}

// baseStem is the part of a stem that the components of one record share.
func baseStem(stem string) string {
	base, _ := ingest.SplitStem(stem)
	return base
}

// memberStem is the stem of a file, or of a member of an archive.
func memberStem(file string) string {
	parts := archive.Split(file)
	return stemOf(parts[len(parts)-1])
}

// nearestOf is the nearness beyond which nothing can be for a channel of the file.
func nearestOf(res result) int {
	if len(res.channels) > 1 {
		return inOneFile
	}
	return ofOneStem
}

// hasOthers reports whether some lie elsewhere.
func hasOthers(components []db.Component, res result) bool {
	return slices.ContainsFunc(components, func(c db.Component) bool { return nearnessOf(&c, res) == elsewhere })
}

// areLone reports whether the channel and each of the record's components are the only one
// of their deliveries, all of them say when they start or none does, and the channel is in
// line with none of the horizontals: two that are make no pair.
func areLone(r *db.StoredRecord, res result, c *ingest.Channel) bool {
	folders := map[string]bool{}
	for _, held := range r.Components {
		folders[archive.Folder(held.SourcePath)] = true
		if areInLine(orientationOf(held), c.Orientation) {
			return false
		}
	}
	return len(res.channels) == 1 && len(folders) == len(r.Components) && r.Start.IsZero() == c.Start.IsZero()
}

// areInLine reports whether two horizontals are too near in direction to be a pair.
func areInLine(a, b ingest.Orientation) bool {
	if a.Axis != ingest.AxisHorizontal || b.Axis != ingest.AxisHorizontal {
		return false
	}
	between := func(o ingest.Orientation) spectrum.Horizontal {
		return spectrum.Horizontal{AzimuthDeg: o.AzimuthDeg.Value, AzimuthKnown: o.AzimuthDeg.Known}
	}
	_, err := spectrum.Between(between(a), between(b))
	return err != nil
}

// bringAlong lets what came with the channel c leave the record in which another has c's
// direction, for the record to which c goes as p says, unless that has no place for it.
func bringAlong(parted, to db.StoredRecord, res result, c *ingest.Channel, p placement) placement {
	least := inOneFolder
	if _, rival := join(parted, res, c); rival != nil {
		least = nearnessOf(rival, res) + 1
	}
	var leaves, stays []db.Component
	from := departure{recordID: parted.ID}
	for i, held := range parted.Components {
		if nearnessOf(&parted.Components[i], res) < least {
			stays = append(stays, held)
			continue
		}
		leaves = append(leaves, held)
		from.paths = append(from.paths, held.SourcePath)
	}
	together := append(orientationsOf(to.Components), orientationsOf(leaves)...)
	roles := ingest.AssignRoles(append(together, c.Orientation))
	if slices.Contains(roles, "") {
		return p
	}
	p.renamed = renamed(to.Components, roles)
	from.moved = map[string]string{}
	for i, held := range leaves {
		from.moved[held.Role] = roles[len(to.Components)+i]
	}
	p.role, p.from = roles[len(roles)-1], &from
	from.renamed = renamed(stays, ingest.AssignRoles(orientationsOf(stays)))
	return p
}

// farthest returns the component first, or another one of its axis that lies farther from
// the file.
func farthest(components []db.Component, first int, res result) *db.Component {
	out := &components[first]
	for i := range components {
		if c := &components[i]; c.Axis == out.Axis && nearnessOf(c, res) < nearnessOf(out, res) {
			out = c
		}
	}
	return out
}
