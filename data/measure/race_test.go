//go:build race

package measure

// The race detector allocates for itself, so what is allocated tells nothing of the readers.
const raceDetector = true
