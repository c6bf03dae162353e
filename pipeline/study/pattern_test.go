package study

import (
	"math/rand/v2"
	"regexp"
	"strings"
	"testing"
)

func TestPatterns(t *testing.T) {
	for _, c := range []struct {
		pattern string
		takes   string // by blanks
		leaves  string
	}{
		{"*.V2", "a.V2 d/a.V2 d/e/a.V2 x.zip!a.V2 x.zip!d/a.V2 d/x.zip!b.tar!a.V2", "a.V1 a.V2.txt .V2x"},
		{"d/*.V2", "d/a.V2 x.zip!d/a.V2 e/x.zip!d/a.V2", "a.V2 e/d/a.V2 d/e/a.V2"},
		{"**/*.V2", "a.V2 d/a.V2 d/e/a.V2", "a.V1"},
		{"2041/**/n?.V2", "2041/n1.V2 2041/07/n1.V2 2041/07/06/n2.V2", "n1.V2 2042/n1.V2 2041/n10.V2"},
		{"2041/**", "2041/a 2041/07/a", "2042/a a"},
		{"2041/", "2041/a 2041/07/a d/2041/a 2041", "2042/a 2041.V2"},
		{"d/x.zip", "d/x.zip d/x.zip!a d/x.zip!e/a", "x.zip e/d/x.zip d/x.zip.V2"},
		{"x.zip/e", "x.zip!e/a x.zip!e", "x.zip!a"},
		{"**/d/**/e/*.V2", "d/e/a.V2 c/d/e/a.V2 d/c/d/c/e/a.V2 e/d/d/e/e/a.V2", "d/a.V2 e/d/a.V2 d/e/c/a.V2"},
		{"a!b.V2", "a!b.V2", "b.V2"},
		{"[ab].V2", "a.V2 d/b.V2", "c.V2"},
	} {
		p, err := parsePattern(Text{Value: c.pattern})
		if err != nil {
			t.Fatal(err)
		}
		s := &Study{Include: []Pattern{p}}
		for path := range strings.FieldsSeq(c.takes) {
			if !s.Takes(path, false) {
				t.Errorf("%q leaves %q", c.pattern, path)
			}
		}
		for path := range strings.FieldsSeq(c.leaves) {
			if s.Takes(path, false) {
				t.Errorf("%q takes %q", c.pattern, path)
			}
			if !s.Takes(path, true) {
				t.Errorf("%q leaves the archive %q, in which something may match", c.pattern, path)
			}
		}
		s = &Study{Exclude: []Pattern{p}}
		for path := range strings.FieldsSeq(c.takes) {
			if s.Takes(path, false) || s.Takes(path, true) {
				t.Errorf("without %q there is %q", c.pattern, path)
			}
		}
		for path := range strings.FieldsSeq(c.leaves) {
			if !s.Takes(path, false) {
				t.Errorf("without %q there is no %q", c.pattern, path)
			}
		}
	}
}

// TestMatchesLikeRegularExpressions holds the walk over segments against regular
// expressions, in which a ** is any number of segments.
func TestMatchesLikeRegularExpressions(t *testing.T) {
	const seed = 7
	random := rand.New(rand.NewPCG(seed, 0))
	pick := func(from []string, most int) []string {
		out := make([]string, 1+random.IntN(most))
		for i := range out {
			out[i] = from[random.IntN(len(from))]
		}
		return out
	}
	matched := 0
	for range 20000 {
		pattern, name := pick([]string{"a", "b", "**", "**"}, 6), pick([]string{"a", "b"}, 7)
		text := "^"
		for _, segment := range pattern {
			if segment == "**" {
				text += "(?:[^/]+/)*"
			} else {
				text += segment + "/"
			}
		}
		want := regexp.MustCompile(text + "$").MatchString(strings.Join(name, "/") + "/")
		if got := matches(pattern, name); got != want {
			t.Fatalf("seed %d: matches(%q, %q) = %v", seed, pattern, name, got)
		}
		if want {
			matched++
		}
	}
	if matched < 1000 {
		t.Errorf("only %d of the names match", matched)
	}
}
