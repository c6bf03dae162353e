package pipeline

import (
	"context"
	"path"
	"path/filepath"

	"swaybook/ingest"
)

// decided is what became of a file before the records were read.
type decided struct {
	reason string // why it is skipped
	err    error  // why it is rejected
}

// readMetadata looks among the files for documents that describe stations and
// events and adds them to m, so that they serve records in whatever order the
// files stand. It returns what became of each by its absolute path; other files
// are left out.
func readMetadata(ctx context.Context, files []ingest.Found, m *ingest.Metadata) map[string]decided {
	done := map[string]decided{}
	for _, f := range files {
		if f.Err != nil || !ingest.MayBeMetadata(path.Base(filepath.ToSlash(f.Path))) || ctx.Err() != nil {
			continue
		}
		used, err := m.Add(f.Path)
		if used != "" || err != nil {
			done[absolute(f.Path)] = decided{used, err}
		}
	}
	return done
}
