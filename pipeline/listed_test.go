package pipeline

import (
	"errors"
	"strings"
	"testing"

	"swaybook/ingest"
)

// TestFoldersMustBeListed, unless the study leaves them out; links that lead nowhere are files
// that cannot be read.
func TestFoldersMustBeListed(t *testing.T) {
	denied := errors.New("permission denied")
	takes := func(path string, _ bool) bool { return path != "lost" }
	for name, c := range map[string]struct {
		found ingest.Found
		fails bool
	}{
		"a folder":          {ingest.Found{Path: "/r/2041", Rel: "2041", Err: denied, IsFolder: true}, true},
		"the source itself": {ingest.Found{Path: "/r", Err: denied, IsFolder: true}, true},
		"one left out":      {ingest.Found{Path: "/r/lost", Rel: "lost", Err: denied, IsFolder: true}, false},
		"a link":            {ingest.Found{Path: "/r/a", Rel: "a", Err: denied}, false},
	} {
		err := checkListed([]ingest.Found{{Path: "/r/b", Rel: "b"}, c.found}, Options{Takes: takes})
		if (err != nil) != c.fails || c.fails && !strings.HasPrefix(err.Error(), c.found.Path+": permission denied; exclude it") {
			t.Errorf("%s: %v", name, err)
		}
	}
}
