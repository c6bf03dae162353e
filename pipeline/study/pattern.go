package study

import (
	"errors"
	"path"
	"slices"
	"strings"
)

// Pattern takes files by their paths below a source. Its segments are those of
// path.Match, as in the file column of a catalogue, and ** for any number of
// folders, none too. One without a slash holds for names at any depth, and one
// that matches a folder, or an archive, for all that is in it.
type Pattern struct {
	Text
	segments []string
}

// parsePattern reads a pattern.
func parsePattern(text Text) (Pattern, error) {
	clean := strings.TrimSuffix(text.Value, "/")
	segments := strings.Split(clean, "/")
	for _, s := range segments {
		switch _, err := path.Match(s, ""); {
		case err != nil:
			return Pattern{}, errors.New("no pattern, a [ without ] or a lone \\")
		case s == "" || s == "." || s == "..":
			return Pattern{}, errors.New("want a path below a source, such as 2041/**/*.V2")
		}
	}
	if len(segments) == 1 {
		segments = append([]string{"**"}, segments...)
	}
	return Pattern{text, append(segments, "**")}, nil
}

// memberMark stands between an archive and what is in it, in paths.
const memberMark = "!"

// Takes reports whether a file is one of the study's, by its path below a source,
// with slashes. Without patterns of inclusion all are. An archive is a folder: it
// is to be opened unless it is excluded, and each member is asked for by its path
// behind the archive's and a "!"; patterns are held against the whole and against
// the path within the archive.
func (s *Study) Takes(below string, isArchive bool) bool {
	names := [][]string{strings.Split(below, "/")}
	if archive, inside, ok := strings.Cut(below, memberMark); ok {
		parts := strings.Split(strings.ReplaceAll(inside, memberMark, "/"), "/")
		names = append(names, append(strings.Split(archive, "/"), parts...), parts)
	}
	isIn := func(patterns []Pattern) bool {
		return slices.ContainsFunc(patterns, func(p Pattern) bool {
			return slices.ContainsFunc(names, func(name []string) bool { return matches(p.segments, name) })
		})
	}
	if isIn(s.Exclude) {
		return false
	}
	return isArchive || len(s.Include) == 0 || isIn(s.Include)
}

// matches compares segment by segment. Where a ** took too few, only the last one
// need take more: what was matched before it stays matched.
func matches(pattern, name []string) bool {
	p, n := 0, 0
	last, taken := -1, 0 // the last ** and where what it took ends
	for n < len(name) {
		switch {
		case p < len(pattern) && pattern[p] == "**":
			last, taken = p, n
			p++
		case p < len(pattern) && matchesSegment(pattern[p], name[n]):
			p, n = p+1, n+1
		case last >= 0:
			taken++
			p, n = last+1, taken
		default:
			return false
		}
	}
	for p < len(pattern) && pattern[p] == "**" {
		p++
	}
	return p == len(pattern)
}

func matchesSegment(pattern, name string) bool {
	ok, _ := path.Match(pattern, name) // the pattern is known to be good
	return ok
}
