//go:build linux

package main

import (
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

// Under a limit on the size of files an export ends with 0 and is whole, or with 1, the name of
// what it could not write, and nothing beside the store.
func TestFilesOfExportsMayNotGrow(t *testing.T) {
	dir := t.TempDir()
	store := storeOfAT2(t, t.TempDir())
	failed, done := map[string]int{}, 0
	for _, dampings := range []string{"0,2%,5%,10%,20%", "5%"} { // what is on its way has all of them, a file one
		for blocks := 64; blocks <= 256; blocks *= 2 { // of 512 bytes; a store is not opened with fewer
			what := fmt.Sprintf("dampings %s, %d blocks", dampings, blocks)
			out := filepath.Join(dir, "out")
			cmd := exec.Command("sh", "-c", fmt.Sprintf(`ulimit -f %d && exec swaybook --store "$0" export parquet --damping "$1" "$2"`, blocks), store, dampings, out)
			text, err := cmd.CombinedOutput()
			if err == nil {
				done++
				if err := os.RemoveAll(out); err != nil {
					t.Fatal(err)
				}
			} else {
				_, name, _ := strings.Cut(string(text), dir+"/.out.part-")
				_, name, _ = strings.Cut(name, "/new/")
				name, reason, _ := strings.Cut(name, ": ")
				if cmd.ProcessState.ExitCode() != exitFailed || name == "" || reason != "file too large\n" {
					t.Errorf("%s: exit code %d, %q", what, cmd.ProcessState.ExitCode(), text)
				}
				failed[strings.TrimRight(name, "0123456789")]++
			}
			if entries, err := os.ReadDir(dir); err != nil || len(entries) > 0 {
				t.Errorf("%s: %v is left, %v", what, entries, err)
			}
		}
	}
	if len(failed) < 2 || done == 0 {
		t.Errorf("failed at %v, done %d: the limits do not meet both what is on its way and what is written", failed, done)
	}
}
