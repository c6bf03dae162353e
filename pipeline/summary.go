package pipeline

// Cause is why a file, or one channel of it, was rejected.
type Cause struct {
	Line int    `json:"line"` // 0 where the cause is not in one line
	Text string `json:"cause"`
}

// FileReport is what became of one file.
type FileReport struct {
	Path       string
	Outcome    Outcome
	Reason     string // why skipped, or where held content was first read
	Components int    // stored
	Records    int    // new with them
	Causes     []Cause
	Warnings   []string
}

// Doubt says why metadata do not tell the earthquake of what a file holds.
type Doubt struct {
	Path string
	Text string
}

// Summary counts what became of the files of a run, and of the records whose
// horizontals it rotated.
type Summary struct {
	Files       int `json:"files"`        // seen
	Stored      int `json:"stored"`       // components
	StoredFiles int `json:"stored_files"` // files that gave them
	Held        int `json:"held"`         // files whose content was in the store already
	Skipped     int `json:"skipped"`      // files that are no ground acceleration
	Rejected    int `json:"rejected"`     // files that could not be read, or stored
	Elsewhere   int `json:"elsewhere"`    // files of which other shards have all
	Channels    int `json:"rejected_channels"`
	Records     int `json:"records"` // new records
	Rotated     int `json:"rotated"` // records
	// Assumed counts those rotated at an assumed right angle.
	Assumed    int `json:"rotated_at_assumed_right_angle"`
	NotRotated int `json:"not_rotated"` // records whose horizontals make no pair
	Damaged    int `json:"damaged"`     // records that are damaged in the store
	// Recomputed counts held components of which the generation lacked the spectra, and
	// NotRecomputed those that could not be solved.
	Recomputed    int `json:"recomputed"`
	NotRecomputed int `json:"not_recomputed"`
	// Unconditioned counts the held components on which the run's recipe cannot be carried
	// out, found by this run or by one before.
	Unconditioned int `json:"not_conditioned"`
	// Uncomputed counts those that a run which was stopped did not reach.
	Uncomputed int `json:"left_to_compute"`
	// Unrotated counts the pairs left to a later run: all where that was asked for,
	// those not reached by a run that was stopped while it rotated.
	Unrotated int `json:"left_to_rotate"`
	// Of the whole store: event codes that are associated with another one, and
	// components that hold a motion of which statistics take another version.
	EventsJoined int     `json:"events_joined"`
	Duplicates   int     `json:"duplicates"`
	Seconds      float64 `json:"seconds"`
}

func (s *Summary) add(f FileReport) {
	s.Files++
	s.Stored += f.Components
	s.Records += f.Records
	switch f.Outcome {
	case Stored:
		s.StoredFiles++
		s.Channels += len(f.Causes)
	case Held:
		s.Held++
		s.Channels += len(f.Causes)
	case Skipped:
		s.Skipped++
	case Rejected:
		s.Rejected++
	case Elsewhere:
		s.Elsewhere++
		s.Channels += len(f.Causes)
	}
}

func (s *Summary) addRecomputed(r Recomputed) {
	s.Uncomputed--
	if r.Reason != "" {
		s.NotRecomputed++
		return
	}
	s.Recomputed++
}

func (s *Summary) addRotated(r Rotated) {
	switch {
	case r.Damaged:
		s.Damaged++
		return
	case r.Reason != "":
		s.NotRotated++
		return
	case r.Assumed:
		s.Assumed++
	}
	s.Rotated++
}

// HasBegun reports whether the run came to any file, component or record.
func (s Summary) HasBegun() bool { return s.Files+s.Recomputed+s.Uncomputed+s.Rotated+s.Unrotated > 0 }

// Complete reports whether nothing was rejected, and every component was computed.
func (s Summary) Complete() bool { return s.Rejected+s.Channels+s.NotRecomputed == 0 }
