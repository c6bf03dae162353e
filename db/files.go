package db

import (
	"cmp"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
)

// Files are the files of the store at path, by the name that it is given and by that of
// the file which links lead to: path to what it is.
func Files(path string) map[string]string {
	names := []string{path}
	if real, err := resolve(path); err == nil {
		names = append(names, real)
	}
	out := map[string]string{}
	for _, name := range names {
		out[name] = "the store itself"
		out[name+lockSuffix] = "the store's lock"
		for _, suffix := range logSuffixes {
			out[name+suffix] = "the store's log"
		}
	}
	return out
}

// logSuffixes make the names of the files that SQLite keeps beside one that is in use.
var logSuffixes = []string{"-wal", "-shm", "-journal"}

// maxLinks is how many links may lead to a store, as many as Linux follows.
const maxLinks = 40

// resolve returns the path of the file that links lead to, absolute, which need not
// exist: SQLite makes it where a link leads to nothing, and keeps its log beside it.
func resolve(path string) (string, error) {
	for range maxLinks {
		// Not filepath.Dir, which takes the folder before ".." for the one above it.
		folder, name := filepath.Split(path)
		folder, err := filepath.EvalSymlinks(cmp.Or(folder, "."))
		if err != nil {
			return "", err
		}
		path = filepath.Join(folder, name)
		target, err := os.Readlink(path)
		switch {
		case err != nil && isLink(path):
			return "", err
		case err != nil: // no link, or nothing
			return filepath.Abs(path)
		case filepath.IsAbs(target):
			path = target
		default:
			path = folder + string(filepath.Separator) + target
		}
	}
	return "", fmt.Errorf("%s: too many links", path)
}

func isLink(path string) bool {
	info, err := os.Lstat(path)
	return err == nil && info.Mode()&fs.ModeSymlink != 0
}
