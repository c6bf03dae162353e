package archive

import (
	"errors"
	"fmt"
	"io"
)

// Limits bound what an archive may cost, all that lies in it taken together. All
// fields must be set.
type Limits struct {
	Member int64 // bytes of one member; larger ones are refused by name
	Total  int64 // bytes expanded
	// Ratio is how many bytes may be expanded for each byte of the file, and Free
	// how many beside that, since a small file compresses as it likes.
	Ratio, Free int64
	Count       int   // members
	Directory   int64 // bytes of a zip archive's directory, which is held whole
	Depth       int   // archives inside each other, the outermost one counted
}

// DefaultLimits are those of a run, for members up to so many bytes. Files of
// numbers in text shrink to a third or a tenth, so 64 is far beyond what an honest
// archive needs; with it, memory is bounded by the file's size. The total bounds
// the time, to some minutes. A directory takes about five times its size in
// memory.
func DefaultLimits(member int64) Limits {
	return Limits{Member: member, Total: 64 << 30, Ratio: 64, Free: 1 << 20, Count: 100_000, Directory: 32 << 20, Depth: 2}
}

// allowed is how many bytes may be expanded from a file of that size.
func (l Limits) allowed(size int64) int64 {
	if size > (l.Total-l.Free)/l.Ratio {
		return l.Total
	}
	return min(l.Total, l.Free+l.Ratio*size)
}

// errStopped ends a walk whose receiver wants no more.
var errStopped = errors.New("stopped")

// end notes the error that ends the whole walk, and returns it.
func (w *walk) end(err error) error {
	if w.ended == nil {
		w.ended = err
	}
	return w.ended
}

// expand passes on what a decompressor gives, up to what the walk may expand. The
// decompressors may wrap its errors; the walk remembers.
type expand struct {
	w *walk
	r io.Reader
}

func (e expand) Read(p []byte) (int, error) {
	if err := e.w.ctx.Err(); err != nil {
		return 0, e.w.end(err)
	}
	n, err := e.r.Read(p)
	if e.w.left -= int64(n); e.w.left < 0 {
		return 0, e.w.end(e.w.tooMuch())
	}
	return n, err
}

func (w *walk) tooMuch() error {
	if w.allowed == w.limits.Total {
		return fmt.Errorf("expands to more than %d bytes: unpack it and name what is in it", w.limits.Total)
	}
	return fmt.Errorf("expands to more than %d times its size", w.limits.Ratio)
}

// watched ends reading with the context.
type watched struct {
	w  *walk
	at io.ReaderAt
}

func (r watched) ReadAt(p []byte, off int64) (int, error) {
	if err := r.w.ctx.Err(); err != nil {
		return 0, r.w.end(err)
	}
	return r.at.ReadAt(p, off)
}

// firstRead is how many bytes of a member are made room for before they have
// come: a header may promise what the file does not hold.
const firstRead = 1 << 20

// errTooLarge is the refusal of a member beyond the limit.
func (w *walk) errTooLarge() error {
	return fmt.Errorf("larger than the limit of %d bytes", w.limits.Member)
}

// readAll reads a member that says it has size bytes, negative where it does not
// say.
func (w *walk) readAll(r io.Reader, size int64) ([]byte, error) {
	if size < 0 {
		size = firstRead / 16
	}
	data := make([]byte, 0, min(size, firstRead)+1) // room to see the end
	for {
		n, err := r.Read(data[len(data):cap(data)])
		data = data[:len(data)+n]
		switch {
		case int64(len(data)) > w.limits.Member:
			return nil, w.errTooLarge()
		case err == io.EOF:
			return data, nil
		case err != nil:
			return nil, err
		case len(data) == cap(data):
			data = append(make([]byte, 0, 2*cap(data)), data...)
		}
	}
}
