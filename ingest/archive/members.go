package archive

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"iter"
	"path"
	"time"
)

// Member is one file inside an archive.
type Member struct {
	// Name is its path inside the archive, with slashes and cleaned; that of a
	// member of an archive inside follows the name of that one after Separator. It
	// is "" for the archive itself.
	Name     string
	Modified time.Time // zero where the archive does not say
	Data     []byte    // the content, the receiver's to keep
	Skipped  string    // why it was passed over without being read
}

// Options say what Members shall do.
type Options struct {
	Limits Limits
	// Skip says why a member of that name, cleaned, need not be read, "" where it
	// shall be; nil reads all.
	Skip func(name string) string
}

// Members reads the archive of size bytes, which lies under the base name, and
// yields its files one after the other, those of archives inside in their place:
// those of a zip archive sorted by name, others as they lie. Folders and devices
// are passed over, links are skipped. It holds one member at a time, and an
// archive inside another beside it.
//
// With an error, the member is not its content but what was refused: a member of
// that name (encrypted, too large, damaged, named twice), or an archive, which
// ends there. The error then names the member at which that was. The archive
// itself has no name; after its error nothing follows. A context that ends is such
// an error.
func Members(ctx context.Context, file io.ReaderAt, size int64, base string, o Options) iter.Seq2[Member, error] {
	return func(yield func(Member, error) bool) {
		w := &walk{ctx: ctx, limits: o.Limits, skip: o.Skip, yield: yield, allowed: o.Limits.allowed(size), names: map[string]bool{}}
		if w.skip == nil {
			w.skip = func(string) string { return "" }
		}
		w.left = w.allowed
		w.archive("", base, io.NewSectionReader(watched{w, file}, 0, size), 1)
		if w.ended != nil && w.ended != errStopped {
			yield(Member{}, w.ended)
		}
	}
}

// walk reads one file and what lies in it.
type walk struct {
	ctx    context.Context
	limits Limits
	skip   func(string) string
	yield  func(Member, error) bool

	allowed, left int64           // bytes to expand, in all and from here on
	count         int             // members met
	given         int             // members and refusals yielded
	names         map[string]bool // labels so far
	ended         error           // why all ends
}

// give yields; it returns an error where nothing more is wanted.
func (w *walk) give(m Member, err error) error {
	if w.ended != nil {
		return w.ended
	}
	w.given++
	if !w.yield(m, err) {
		return w.end(errStopped)
	}
	return nil
}

// archive reads the archive that has the label and the base name, the depth-th
// inside each other. Damage is reported; an error is the end of the walk.
func (w *walk) archive(label, base string, file *io.SectionReader, depth int) error {
	before := w.given
	err := w.open(label, base, file, depth)
	switch {
	case w.ended != nil:
		return w.ended
	case err != nil:
		return w.give(Member{Name: label}, inWords(err))
	case w.given == before:
		return w.give(Member{Name: label}, errors.New("the archive holds no files"))
	}
	return nil
}

func (w *walk) open(label, base string, file *io.SectionReader, depth int) error {
	head := make([]byte, HeadSize)
	n, err := file.ReadAt(head, 0)
	if err != nil && err != io.EOF {
		return err
	}
	switch k := kindOf(head[:n]); k {
	case zipArchive:
		return w.zip(label, file, depth)
	case tarArchive:
		return w.tar(label, file, depth)
	case gzipFile, bzip2File:
		return w.compressed(label, base, k, file, depth)
	}
	return errors.New("no archive: read in place are " + Opened)
}

// entry is a member as its archive describes it.
type entry struct {
	name     string // raw
	modified time.Time
	size     int64  // in bytes, negative where not stated
	skip     string // why it need not be read
	refused  string // why it cannot be
	open     func() (io.Reader, error)
}

// entry reads a member and passes it on. The error is damage in the member, or
// the end of the walk; refusals are reported.
func (w *walk) entry(label string, e entry, depth int) error {
	if err := w.ctx.Err(); err != nil {
		return w.end(err)
	}
	if w.count++; w.count > w.limits.Count {
		return w.end(fmt.Errorf("holds more than %d files: unpack it", w.limits.Count))
	}
	if len(e.name) > maxName {
		e.refused = fmt.Sprintf("name of %d bytes is longer than the limit of %d", len(e.name), maxName)
	}
	name := clean(e.name)
	m := Member{Name: Join(label, name), Modified: e.modified}
	if m.Skipped = w.skip(name); m.Skipped == "" {
		m.Skipped = e.skip
	}
	switch {
	case m.Skipped != "":
		return w.give(m, nil)
	case w.names[m.Name]:
		m.Name = fmt.Sprintf("%s#%d", m.Name, w.count)
		return w.give(m, errors.New("a second file of this name in the archive: the first is read; unpack it to choose"))
	}
	w.names[m.Name] = true
	switch {
	case e.refused != "":
		return w.give(m, errors.New(e.refused))
	case e.size > w.limits.Member:
		return w.give(m, w.errTooLarge())
	}
	r, err := e.open()
	if err == nil {
		m.Data, err = w.readAll(r, e.size)
	}
	if err != nil {
		return err
	}
	return w.content(m, path.Base(name), depth)
}

// content passes a member on, or what is in it if that is an archive.
func (w *walk) content(m Member, base string, depth int) error {
	if !Is(m.Data) {
		return w.give(m, nil)
	}
	if depth >= w.limits.Depth {
		return w.give(Member{Name: m.Name}, errors.New("an archive too deep inside others: unpack the outermost"))
	}
	return w.archive(m.Name, base, io.NewSectionReader(bytes.NewReader(m.Data), 0, int64(len(m.Data))), depth+1)
}
