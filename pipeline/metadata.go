package pipeline

import (
	"context"
	"fmt"
	"regexp"

	"swaybook/ingest"
)

// mayHoldMetadata matches the names of documents and of archives in which they may
// lie. What other names have is not looked at: every file would have to be opened
// twice, and every member expanded.
var mayHoldMetadata = regexp.MustCompile(`(?i)\.((xml|tar|zip)(\.gz|\.bz2)?|tgz|tbz2?)$`)

// skipForMetadata says why a file or member of that name need not be read for
// documents.
func skipForMetadata(name string) string {
	if !mayHoldMetadata.MatchString(name) {
		return "no document"
	}
	return ingest.SkipMember(name)
}

// readMetadata looks among the files, and in archives, for documents that describe
// stations and events and adds them to m, so that they serve records in whatever
// order all lie. It decides what becomes of them; all else is left to items, which
// says what is wrong with an archive, too.
func (s *source) readMetadata(ctx context.Context, m *ingest.Metadata) {
	left := packedDocuments
	for _, f := range s.files {
		if ctx.Err() != nil {
			return
		}
		_, own := s.decided[absolute(f.Path)]
		if own || f.Err != nil || skipForMetadata(baseOf(f.Path)) != "" {
			continue
		}
		if ingest.MayBeMetadata(baseOf(f.Path)) {
			used, err := m.AddFile(ctx, f.Path)
			s.decide(ctx, f, used, err)
		} else if a, _ := openArchive(f); a != nil {
			s.readMembers(ctx, a, m, &left)
			a.Close()
		}
	}
}

// packedDocuments is how many bytes of documents are taken out of the archives of a
// run. What they say is held, in up to three times their size, and XML shrinks so
// far that the sizes of the archives are no bound.
const packedDocuments = 256 << 20

// readMembers reads the documents in an archive, and as little else as that takes,
// until none of the bytes is left.
func (s *source) readMembers(ctx context.Context, a *openedArchive, m *ingest.Metadata, left *int) {
	for member, err := range a.members(ctx, skipForMetadata) {
		if err != nil || member.Skipped != "" || !ingest.MayBeMetadata(memberBase(member)) {
			continue
		}
		f := a.found.Member(member.Name)
		if *left -= len(member.Data); *left < 0 {
			s.decide(ctx, f, "", fmt.Errorf("more than %d bytes of XML documents in archives: unpack them", packedDocuments))
			continue
		}
		used, err := m.Add(ctx, f.Path, member.Data)
		s.decide(ctx, f, used, err)
	}
}

// decide notes what became of a document, if the file was one and nobody stopped
// the run, of which the error is no fault of the file's.
func (s *source) decide(ctx context.Context, f ingest.Found, used string, err error) {
	if ctx.Err() == nil && (used != "" || err != nil) {
		s.decided[absolute(f.Path)] = decided{used, err}
	}
}
