//go:build race

package spectrum

// raceDetector tells that tests run with the race detector.
const raceDetector = true
