package ingest

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"time"

	"swaybook/ingest/fdsnxml"
)

// Metadata is what StationXML and QuakeML documents say of channels, stations
// and events. Its methods may be called from several goroutines at once, those
// that add excepted.
type Metadata struct {
	inventory fdsnxml.Inventory
	notes     []MetadataNote

	ordering sync.Mutex // guards what follows
	quakes   quakes
}

// MetadataNote is what of a document was not taken, or is doubtful, and the line
// of the element.
type MetadataNote struct {
	Path string
	Line int
	Text string
}

// The reasons for which a file is no record but was put to use.
const (
	StationMetadataUsed = "station metadata, used"
	EventMetadataUsed   = "events, used"
)

// ReadMetadata reads StationXML and QuakeML documents: those named, and those
// among the *.xml of folders named, in the order of the paths' names. What
// several say alike counts once. An error is a *ParseError, the context's, or says
// that a path cannot be listed.
func ReadMetadata(ctx context.Context, paths []string) (*Metadata, error) {
	m := &Metadata{}
	for _, path := range slices.Sorted(slices.Values(paths)) {
		if err := m.addPath(ctx, path); err != nil {
			return nil, err
		}
	}
	return m, nil
}

func (m *Metadata) addPath(ctx context.Context, path string) error {
	info, err := os.Stat(path)
	if err != nil {
		return fmt.Errorf("read metadata: %w", err)
	}
	if !info.IsDir() {
		used, err := m.AddFile(ctx, path)
		if err == nil && used == "" {
			err = &ParseError{Path: path, Err: errors.New("neither StationXML nor QuakeML")}
		}
		return err
	}
	entries, err := os.ReadDir(path)
	if err != nil {
		return fmt.Errorf("read metadata: %w", err)
	}
	some := false
	for _, e := range entries {
		if e.IsDir() || !MayBeMetadata(e.Name()) {
			continue
		}
		used, err := m.AddFile(ctx, filepath.Join(path, e.Name()))
		if err != nil {
			return err
		}
		some = some || used != ""
	}
	if !some {
		m.notes = append(m.notes, MetadataNote{Path: path, Text: "no *.xml in this folder is StationXML or QuakeML; folders below it are not read"})
	}
	return nil
}

// MayBeMetadata reports whether a file's base name is that of an XML document.
func MayBeMetadata(base string) bool {
	return strings.EqualFold(filepath.Ext(base), ".xml") && SkipByName(base) == ""
}

// AddFile is Add of the file at path.
func (m *Metadata) AddFile(ctx context.Context, path string) (used string, err error) {
	data, _, err := Read(path)
	if err != nil {
		return "", err
	}
	return m.Add(ctx, path, data)
}

// Add reads one more document, which lies at path, and says how it is used, ""
// where it is neither StationXML nor QuakeML. What of it is left out is noted. An
// error is a *ParseError, or the context's; nothing is added with it. The data are
// not kept.
func (m *Metadata) Add(ctx context.Context, path string, data []byte) (used string, err error) {
	switch fdsnxml.Kind(data) {
	case fdsnxml.Stations:
		v, err := fdsnxml.ReadStations(ctx, data)
		if err != nil {
			return "", metadataFault(ctx, path, err)
		}
		m.note(path, v.Notes)
		m.inventory.Merge(v, path)
		return StationMetadataUsed, nil
	case fdsnxml.Events:
		events, left, err := fdsnxml.ReadEvents(ctx, data)
		if err != nil {
			return "", metadataFault(ctx, path, err)
		}
		m.note(path, left)
		m.addEvents(path, events)
		return EventMetadataUsed, nil
	}
	return "", nil
}

func metadataFault(ctx context.Context, path string, err error) error {
	if stopped := ctx.Err(); stopped != nil {
		return stopped
	}
	if e, ok := errors.AsType[*fdsnxml.Error](err); ok {
		return &ParseError{Path: path, Line: e.Line, Err: e.Err}
	}
	return &ParseError{Path: path, Err: err}
}

func (m *Metadata) note(path string, notes []fdsnxml.Note) {
	for _, n := range notes {
		m.notes = append(m.notes, MetadataNote{path, n.Line, n.Text})
	}
}

// Notes returns what was noted, in the order of the documents.
func (m *Metadata) Notes() []MetadataNote {
	if m == nil {
		return nil
	}
	return m.notes
}

// IsEmpty reports whether no document has been read.
func (m *Metadata) IsEmpty() bool {
	return m == nil || m.saysNoEvents() && len(m.inventory.Stations)+len(m.inventory.Channels) == 0
}

// Station returns what StationXML says of the channel's station, by network and
// code: name, coordinates and elevation. ok is false where that is nothing.
func (m *Metadata) Station(c *Channel) (s Station, ok bool) {
	if m == nil || c.Station.Network == "" || c.Station.Code == "" {
		return Station{}, false
	}
	site, ok := m.inventory.Site(c.Station.Network, c.Station.Code, c.Start)
	if !ok {
		return Station{}, false
	}
	return Station{
		Network: c.Station.Network, Code: c.Station.Code, Name: site.Name,
		Latitude: Number(site.Latitude), Longitude: Number(site.Longitude), ElevationM: Number(site.ElevationM),
	}, true
}

// epoch returns what is said of a channel over the times.
func (m *Metadata) epoch(network, station, location, code string, from, to time.Time) (*fdsnxml.Channel, error) {
	if m == nil {
		return nil, fdsnxml.ErrUnknown
	}
	return m.inventory.Lookup(network, station, location, code, from, to)
}
