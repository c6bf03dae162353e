//go:build !amd64 || noasm

package kernel

// vectorLevels is empty where there is no assembly.
func vectorLevels() []level { return nil }
