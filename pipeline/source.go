package pipeline

import (
	"cmp"
	"context"
	"io/fs"
	"iter"
	"os"
	"path"
	"path/filepath"
	"regexp"
	"sync/atomic"
	"time"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/ingest/archive"
)

// source is what a run reads: the files that were found, and in the place of
// archives what is in them.
type source struct {
	files   []ingest.Found
	takes   func(rel string, isArchive bool) bool
	decided map[string]decided // by absolute path, of files and members
	total   atomic.Int64       // files and members found so far
}

// decided is what becomes of a file whatever it holds.
type decided struct {
	reason string // why it is skipped
	err    error  // why it is rejected
}

// newSource returns the source of the files but for the run's own, of which the
// reasons are given, and for those that are not taken.
func newSource(files []ingest.Found, opts Options) *source {
	s := &source{files: files, takes: opts.Takes, decided: map[string]decided{}}
	for name, reason := range opts.Own {
		s.decided[absolute(name)] = decided{reason: reason}
	}
	s.total.Store(int64(len(files)))
	return s
}

// item is a file for a worker to read, or a member of an archive.
type item struct {
	ingest.Found
	key      db.IntakeKey // its place among what is read
	stem     string       // base name without extension
	skip     string       // why it need not be read
	isMember bool
	data     []byte // of a member
	modified time.Time
	// opened says that the file is an archive: its members follow, and it is none.
	opened bool
}

// items opens the files one after the other, as far as it takes to see which are
// archives, and reads these. It holds the content of one member; files are left to
// the workers.
func (s *source) items(ctx context.Context) iter.Seq[item] {
	return func(yield func(item) bool) {
		for _, f := range s.files {
			if ctx.Err() != nil || !s.file(ctx, f, yield) {
				return
			}
		}
	}
}

func (s *source) file(ctx context.Context, f ingest.Found, yield func(item) bool) bool {
	// The store itself must not even be opened: closing a file ends the locks that
	// the process has on it.
	done := s.decided[absolute(f.Path)]
	it := item{Found: f, key: db.IntakeKey{Path: f.Path}, stem: stemOf(f.Path), skip: cmp.Or(done.reason, ingest.SkipByName(baseOf(f.Path)))}
	if done.err != nil {
		it.Err = done.err
	}
	if it.skip != "" || it.Err != nil {
		return yield(it)
	}
	opened, err := openArchive(f)
	if opened != nil {
		defer opened.Close()
	}
	// An archive that cannot be opened is not left out because its name is no record's.
	isArchive := opened != nil || err != nil && namesArchive.MatchString(f.Path)
	switch {
	case !s.takes(f.Rel, isArchive):
		s.total.Add(-1)
		return true
	case opened == nil:
		return yield(it)
	}
	return s.members(ctx, opened, yield)
}

// absolute is the path in the one form in which two can be compared; a path
// that has none stays as it is.
func absolute(name string) string {
	if abs, err := filepath.Abs(name); err == nil {
		return abs
	}
	return name
}

// openedArchive is a file that is an archive.
type openedArchive struct {
	*os.File
	found ingest.Found
	info  fs.FileInfo
}

// namesArchive matches what archives are mostly called, where nothing else can be known.
var namesArchive = regexp.MustCompile(`(?i)\.(zip|tar|tgz|tbz2?|gz|bz2)$`)

// openArchive opens the file if it is an archive, and returns nil for any other. The error
// is that of what cannot be opened, of which the worker says it again.
func openArchive(found ingest.Found) (*openedArchive, error) {
	f, err := os.Open(found.Path)
	if err != nil {
		return nil, err
	}
	info, err := f.Stat()
	if err != nil || !archive.Begins(f) {
		f.Close()
		return nil, err
	}
	return &openedArchive{f, found, info}, nil
}

// members reads what is in the archive; skip says why a member need not be read.
func (a *openedArchive) members(ctx context.Context, skip func(name string) string) iter.Seq2[archive.Member, error] {
	options := archive.Options{Limits: archive.DefaultLimits(ingest.MaxFileSize), Skip: skip}
	return archive.Members(ctx, a, a.info.Size(), baseOf(a.found.Path), options)
}

// members passes on what is in the archive. In the count of what was found its
// first member, or its own rejection, takes its place.
func (s *source) members(ctx context.Context, a *openedArchive, yield func(item) bool) bool {
	if !yield(item{Found: a.found, opened: true}) {
		return false
	}
	more, n := int64(0), 0
	for m, err := range a.members(ctx, ingest.SkipMember) {
		if ctx.Err() != nil {
			return false
		}
		n++
		if m.Name != "" && err == nil && !s.takes(archive.Join(a.found.Rel, m.Name), false) {
			continue
		}
		s.total.Add(more)
		more = 1
		it := s.memberItem(a, m, err)
		it.key = db.IntakeKey{Path: a.found.Path, Member: n}
		if !yield(it) {
			return false
		}
	}
	return true
}

// memberItem is a member of the archive, or what stands against it, or against the
// archive.
func (s *source) memberItem(a *openedArchive, m archive.Member, err error) item {
	it := item{Found: a.found, skip: m.Skipped, isMember: true, data: m.Data, modified: m.Modified}
	if m.Name != "" {
		it.Found = a.found.Member(m.Name)
		it.stem = stemOf(memberBase(m))
	}
	if it.Err = err; m.Modified.IsZero() {
		it.modified = a.info.ModTime()
	}
	if done, ok := s.decided[absolute(it.Path)]; ok && err == nil {
		it.skip, it.Err = cmp.Or(it.skip, done.reason), done.err
	}
	return it
}

// memberBase is the base name of a member.
func memberBase(m archive.Member) string {
	parts := archive.Split(m.Name)
	return path.Base(parts[len(parts)-1])
}

func stemOf(file string) string {
	base := baseOf(file)
	return base[:len(base)-len(path.Ext(base))]
}

func baseOf(file string) string { return path.Base(filepath.ToSlash(file)) }
