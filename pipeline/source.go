package pipeline

import (
	"cmp"
	"context"
	"io"
	"iter"
	"maps"
	"os"
	"path"
	"path/filepath"
	"sync/atomic"
	"time"

	"swaybook/ingest"
	"swaybook/ingest/archive"
)

// source is what a run reads: the files that were found, and in the place of
// archives what is in them.
type source struct {
	files   []ingest.Found
	decided map[string]decided // by absolute path
	total   atomic.Int64       // files and members found so far
}

// newSource returns the source of the files but for those that are done, and the
// run's own, of which the reasons are given.
func newSource(files []ingest.Found, own map[string]string, done map[string]decided) *source {
	s := &source{files: files, decided: map[string]decided{}}
	maps.Copy(s.decided, done)
	for name, reason := range own {
		s.decided[absolute(name)] = decided{reason: reason}
	}
	s.total.Store(int64(len(files)))
	return s
}

// item is a file for a worker to read, or a member of an archive.
type item struct {
	ingest.Found
	stem     string // base name without extension
	skip     string // why it need not be read
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
	it := item{Found: f, stem: stemOf(f.Path), skip: cmp.Or(done.reason, ingest.SkipByName(path.Base(filepath.ToSlash(f.Path))))}
	if done.err != nil {
		it.Err = done.err
	}
	if it.skip != "" || it.Err != nil {
		return yield(it)
	}
	opened := openArchive(f.Path)
	if opened == nil {
		return yield(it)
	}
	defer opened.Close()
	return s.members(ctx, f, opened, yield)
}

// absolute is the path in the one form in which two can be compared; a path
// that has none stays as it is.
func absolute(name string) string {
	if abs, err := filepath.Abs(name); err == nil {
		return abs
	}
	return name
}

// openArchive opens the file if it is an archive. What cannot be read is none: the
// worker says why.
func openArchive(name string) *os.File {
	f, err := os.Open(name)
	if err != nil {
		return nil
	}
	head := make([]byte, archive.HeadSize)
	n, err := io.ReadFull(f, head)
	if err != nil && err != io.EOF && err != io.ErrUnexpectedEOF || !archive.Is(head[:n]) {
		f.Close()
		return nil
	}
	return f
}

// members passes on what is in the archive f. In the count of what was found its
// first member, or its own rejection, takes its place.
func (s *source) members(ctx context.Context, f ingest.Found, file *os.File, yield func(item) bool) bool {
	info, err := file.Stat()
	if err != nil {
		f.Err = err
		return yield(item{Found: f})
	}
	if !yield(item{Found: f, opened: true}) {
		return false
	}
	more := int64(0)
	base := path.Base(filepath.ToSlash(f.Path))
	options := archive.Options{Limits: archive.DefaultLimits(ingest.MaxFileSize), Skip: ingest.SkipMember}
	for m, err := range archive.Members(ctx, file, info.Size(), base, options) {
		if ctx.Err() != nil {
			return false
		}
		s.total.Add(more)
		more = 1
		if !yield(memberItem(f, m, err, info.ModTime())) {
			return false
		}
	}
	return true
}

// memberItem is a member of f, or what stands against it, or against f.
func memberItem(f ingest.Found, m archive.Member, err error, modified time.Time) item {
	it := item{Found: f, skip: m.Skipped, isMember: true, data: m.Data, modified: m.Modified}
	if m.Name != "" {
		it.Found = f.Member(m.Name)
		parts := archive.Split(m.Name)
		it.stem = stemOf(parts[len(parts)-1])
	}
	if it.Err = err; m.Modified.IsZero() {
		it.modified = modified
	}
	return it
}

func stemOf(file string) string {
	base := path.Base(filepath.ToSlash(file))
	return base[:len(base)-len(path.Ext(base))]
}
