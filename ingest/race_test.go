//go:build race

package ingest

// raceDetector says that memory is counted with what the race detector takes.
const raceDetector = true
