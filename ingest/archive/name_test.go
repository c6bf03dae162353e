package archive

import (
	"strings"
	"testing"
)

func TestClean(t *testing.T) {
	for name, want := range map[string]string{
		"a/b.V2": "a/b.V2", "./a//b.V2": "a/b.V2", "/etc/passwd": "etc/passwd", "../../a": "a", "a/../../b": "b", `..\..\a\b`: "a/b", `C:\data\x.V2`: "data/x.V2",
		"c:x": "x", `\\host\share\x`: "host/share/x", "": "unnamed", ".": "unnamed", "..": "unnamed", "/": "unnamed", "a\nb": "a%0Ab", "a\x00b": "a%00b",
		"a\x1b[31m": "a%1B[31m", "a!b.V2": "a%21b.V2", "\x83\x65.EW": "%83e.EW", "é.V2": "é.V2", "\u0085x": "%C2%85x", "�": "�", "a ": "a ",
	} {
		if got := clean(name); got != want {
			t.Errorf("clean(%q) = %q, want %q", name, got, want)
		}
	}
	if got := clean(strings.Repeat("n", 5000)); len(got) != maxName {
		t.Errorf("a name of %d bytes", len(got))
	}
}

func TestSplitAndInPlace(t *testing.T) {
	for p, want := range map[string]struct{ parts, inPlace string }{
		"a/b.V2":                  {"a/b.V2", "a/b.V2"},
		"a/b.zip!c/d.V2":          {"a/b.zip|c/d.V2", "a/c/d.V2"},
		"b.zip!d.V2":              {"b.zip|d.V2", "d.V2"},
		"a/b.zip!c/i.tar.gz!d.V2": {"a/b.zip|c/i.tar.gz|d.V2", "a/c/d.V2"},
		"/a/x.V2.gz!x.V2":         {"/a/x.V2.gz|x.V2", "/a/x.V2"},
		`C:\a\b.zip!c/d.V2`:       {`C:\a\b.zip|c/d.V2`, "C:/a/c/d.V2"},
		"wow!/b.V2":               {"wow!/b.V2", "wow!/b.V2"},
		"a/!b.V2":                 {"a/!b.V2", "a/!b.V2"},
		"!":                       {"!", "!"},
		"a!":                      {"a!", "a!"},
		"":                        {"", ""},
	} {
		if got := strings.Join(Split(p), "|"); got != want.parts {
			t.Errorf("Split(%q) = %s, want %s", p, got, want.parts)
		}
		if got := InPlace(p); got != want.inPlace {
			t.Errorf("InPlace(%q) = %s, want %s", p, got, want.inPlace)
		}
	}
	if got := Join(Join("a.zip", "b.tar"), "c"); got != "a.zip!b.tar!c" || Join("", "c") != "c" {
		t.Errorf("Join = %s", got)
	}
}

// A text is no archive because of its first letters.
func TestIs(t *testing.T) {
	for _, text := range []string{"", "PK invented", "BZh", "BZh is the station", "BZh91AY&", "\x1f\x8b", strings.Repeat("0", 600), strings.Repeat("\x00", 600)} {
		if Is([]byte(text)) {
			t.Errorf("Is(%.20q)", text)
		}
	}
}
