package ingest

import "fmt"

// The flags that reading raises.
const (
	FlagClipped      = "clipped"            // samples held at an extreme
	FlagSpikes       = "spikes"             // single samples that stand out
	FlagLostData     = "lost_data"          // equal samples in the strong part
	FlagPeakMismatch = "peak_mismatch"      // the samples' peak is not the header's
	FlagIrregular    = "irregular_sampling" // times depart from equal steps
)

// Finding is a flag of a channel with what raised it: the value measured and the bound
// that it is beyond.
type Finding struct {
	Flag         string
	Value, Bound float64
	Words        string // the warning that goes with it
}

// find raises a flag and warns in the same words.
func (c *Channel) find(flag string, value, bound float64, format string, args ...any) {
	c.warn(format, args...)
	c.Findings = append(c.Findings, Finding{flag, value, bound, fmt.Sprintf(format, args...)})
}
