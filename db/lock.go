package db

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"strings"
	"syscall"
	"time"
	"unicode"

	"github.com/gofrs/flock"
)

// Holder says which run holds a store.
type Holder struct {
	PID     int       `json:"pid"`
	Host    string    `json:"host"`
	Since   time.Time `json:"since"`
	Command string    `json:"command"`
}

// String names the holder for people. What it is made of may come out of a file, so
// nothing in it moves a terminal's cursor.
func (h Holder) String() string {
	text := fmt.Sprintf("process %d on host %s since %s, %s", h.PID, h.Host, h.Since.UTC().Format(time.RFC3339), h.Command)
	return strings.Map(func(r rune) rune {
		if unicode.IsPrint(r) {
			return r
		}
		return '?'
	}, text)
}

// LockedError says that another run holds the store, and which if it is known.
type LockedError struct {
	Store  string
	Holder *Holder // nil where the lock does not say
}

func (e *LockedError) Error() string {
	who := "the lock does not say which"
	if e.Holder != nil {
		who = e.Holder.String()
	}
	return fmt.Sprintf("another run holds the store %s: %s", e.Store, who)
}

// Lock is the right to be the only run on a store. It is a lock of the operating system
// on a file beside the store, so it ends with the process however that ends; what the
// file says is for people.
type Lock struct {
	lock *flock.Flock
}

// lockSuffix makes the lock's name of the store's.
const lockSuffix = ".lock"

// TakeLock takes the store's lock and writes the holder's name into it. The error is a
// *LockedError where another run has it. The store need not exist. Reading a store needs
// no lock.
func TakeLock(ctx context.Context, store string, holder Holder) (*Lock, error) {
	l, err := takeLock(ctx, store, holder)
	if _, locked := errors.AsType[*LockedError](err); err != nil && !locked {
		return nil, fmt.Errorf("lock store %s: %w", store, explainLock(err))
	}
	return l, err
}

// Who was turned away asks again after askAgain, and so often at most, until the file
// says the same twice: whoever has just taken the lock may not have written yet, and then
// the file tells of a run that is gone.
const (
	askAgain = 50 * time.Millisecond
	maxAsked = 20
)

func takeLock(ctx context.Context, store string, holder Holder) (*Lock, error) {
	real, err := resolve(store)
	if err != nil {
		return nil, err
	}
	path := real + lockSuffix
	var said []byte
	for asked := 0; ; asked++ {
		l, err := tryLock(path, permissionsLike(real))
		if err != nil {
			return nil, err
		}
		if l != nil {
			return l.heldBy(holder)
		}
		says := readLock(path)
		if asked > 0 && string(says) == string(said) || asked == maxAsked {
			return nil, &LockedError{Store: store, Holder: parseHolder(says)}
		}
		said = says
		select {
		case <-ctx.Done():
			return nil, ctx.Err()
		case <-time.After(askAgain):
		}
	}
}

// permissionsLike are those of the store, so that whoever may write to it may lock it; but
// whoever makes the lock may write into it. Otherwise the lock of a store that may not be
// written to would stay, and nobody could open it once the store may be.
func permissionsLike(store string) fs.FileMode {
	if info, err := os.Stat(store); err == nil {
		return info.Mode().Perm() | 0o600
	}
	return 0o666
}

// tryLock returns nil where somebody else has the lock.
func tryLock(path string, mode fs.FileMode) (*Lock, error) {
	for {
		if err := makeLock(path, mode); err != nil {
			return nil, err
		}
		l := flock.New(path, flock.SetFlag(os.O_CREATE|os.O_RDWR), flock.SetPermissions(mode))
		taken, err := l.TryLock()
		if err != nil || !taken {
			return nil, err
		}
		// A run that ends removes its file: what was locked may be that one, and then
		// another file can have been locked under the same name.
		if isStillAt(l, path) {
			return &Lock{l}, nil
		}
		if err := l.Unlock(); err != nil {
			return nil, err
		}
	}
}

func isStillAt(l *flock.Flock, path string) bool {
	locked, err := l.Stat()
	if err != nil {
		return false
	}
	named, err := os.Stat(path)
	return err == nil && os.SameFile(locked, named)
}

// makeLock makes the file if there is none. Its first byte is the one that is locked on
// Windows, where nobody else can read or write it then: it is a line break, and what the
// file says comes after it.
func makeLock(path string, mode fs.FileMode) error {
	f, err := os.OpenFile(path, os.O_CREATE|os.O_EXCL|os.O_WRONLY, mode)
	if errors.Is(err, fs.ErrExist) {
		return nil
	}
	if err != nil {
		return err
	}
	f.Write([]byte("\n")) // not on Windows, where somebody was faster
	return f.Close()
}

// heldBy writes the holder's name into the lock.
func (l *Lock) heldBy(holder Holder) (*Lock, error) {
	text, err := json.Marshal(holder)
	if err == nil {
		err = l.say(string(text) + "\n")
	}
	if err != nil {
		return nil, errors.Join(err, l.Release())
	}
	return l, nil
}

// say replaces what the file says, in one write. It does not cut the file off, which
// a lock might forbid, but covers what stood there with blanks.
func (l *Lock) say(text string) error {
	info, err := l.lock.Stat()
	if err != nil {
		return err
	}
	if n := int(info.Size()) - 1 - len(text); n > 0 {
		text += strings.Repeat(" ", n)
	}
	f, err := os.OpenFile(l.lock.Path(), os.O_WRONLY, 0)
	if err != nil {
		return err
	}
	_, err = f.WriteAt([]byte(text), 1)
	return errors.Join(err, f.Close())
}

// maxLockText bounds what is read of a file that anybody may have written.
const maxLockText = 1 << 16

// readLock returns what the file says, nothing if it cannot be read.
func readLock(path string) []byte {
	f, err := os.Open(path)
	if err != nil {
		return nil
	}
	defer f.Close()
	text, err := io.ReadAll(io.NewSectionReader(f, 1, maxLockText))
	if err != nil {
		return nil
	}
	return text
}

func parseHolder(text []byte) *Holder {
	var h Holder
	if json.Unmarshal(text, &h) != nil || h.PID == 0 {
		return nil
	}
	return &h
}

// Release gives the store free for other runs.
func (l *Lock) Release() error {
	// While it is held, since a file that another run has locked must stay. Windows
	// removes no file that is open; there it stays, and names nobody.
	if err := os.Remove(l.lock.Path()); err != nil {
		if err := l.say("\n"); err != nil {
			return errors.Join(err, l.lock.Unlock())
		}
	}
	return l.lock.Unlock()
}

// heldLock is what could be seen of a store's lock.
type heldLock struct {
	isHeld bool
	holder *Holder // nil where the lock does not say
}

// lookAtLock looks whether a run holds the store. It has the lock for a moment, together
// with all who look, which a run that wants it sits out: it asks again.
func lookAtLock(store string) (*heldLock, error) {
	h := &heldLock{}
	real, err := resolve(store)
	if err == nil {
		l := flock.New(real+lockSuffix, flock.SetFlag(os.O_RDONLY))
		var free bool
		if free, err = l.TryRLock(); err == nil && !free {
			h.isHeld, h.holder = true, parseHolder(readLock(l.Path()))
		}
		err = errors.Join(err, l.Close())
	}
	if errors.Is(err, fs.ErrNotExist) {
		return h, nil
	}
	if err != nil {
		return nil, fmt.Errorf("look at the lock of store %s: %w", store, explainLock(err))
	}
	return h, nil
}

// explainLock turns the system's words for what people meet into ours.
func explainLock(err error) error {
	switch {
	case errors.Is(err, fs.ErrPermission), errors.Is(err, syscall.EROFS):
		return fmt.Errorf("its folder or the lock in it may not be written to: %w", err)
	case errors.Is(err, errors.ErrUnsupported), errors.Is(err, syscall.ENOLCK):
		return fmt.Errorf("the file system has no locks, without which a store cannot be written to; keep it on a local disk: %w", err)
	}
	return err
}
