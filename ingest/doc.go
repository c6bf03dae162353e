// Package ingest turns the bytes of record files into channels: samples of
// ground acceleration in one direction, in m/s², with the time step and the
// metadata that the file states.
//
// Promises: a file is recognised by its content, never by its name; a unit is
// never guessed; what a header does not say stays unknown; every refusal names
// file, line and cause. The package keeps no state and opens no files but
// those that Discover lists and Read reads. Package archive reads those inside
// archives.
//
// Start at Format, the interface of a reader, and Formats, the list of those
// there are. Channel is what a reader returns; RecordID and AssignRoles say how
// channels become records.
package ingest
