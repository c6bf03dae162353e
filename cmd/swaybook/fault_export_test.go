//go:build linux

package main

import (
	"fmt"
	"io/fs"
	"maps"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"syscall"
	"testing"
)

// Under a limit on the size of files an export ends with 0 and is whole, or with 1, the name of
// what it could not write, and nothing beside the store but what was there.
func TestFilesOfExportsMayNotGrow(t *testing.T) {
	store := storeOfAT2(t, t.TempDir())
	failed, done := map[string]int{}, 0
	for _, dampings := range []string{"0,2%,5%,10%,20%", "5%"} { // what is on its way has all of them, a file one
		for blocks := 64; blocks <= 256; blocks *= 2 { // of 512 bytes; a store is not opened with fewer
			for _, isThere := range []bool{false, true} {
				what := fmt.Sprintf("dampings %s, %d blocks, there before: %v", dampings, blocks, isThere)
				dir := t.TempDir()
				out, hidden := filepath.Join(dir, "out"), dir+`/\.out\.part-[0-9]+/new/`
				if isThere {
					hidden = out + `/\.part-[0-9]+/`
					if err := os.Mkdir(out, 0o777); err != nil {
						t.Fatal(err)
					}
				}
				before := treeOf(t, dir)
				cmd := exec.Command("sh", "-c", fmt.Sprintf(`ulimit -f %d && exec swaybook --store "$0" export parquet --damping "$1" "$2"`, blocks), store, dampings, out)
				text, err := cmd.CombinedOutput()
				if err == nil {
					done++
					continue
				}
				said := regexp.MustCompile(hidden + `(.+?)[0-9]*: file too large\n$`).FindStringSubmatch(string(text))
				if cmd.ProcessState.ExitCode() != exitFailed || said == nil {
					t.Fatalf("%s: exit code %d, %q", what, cmd.ProcessState.ExitCode(), text)
				}
				failed[said[1]]++
				if after := treeOf(t, dir); !maps.Equal(after, before) {
					t.Errorf("%s: %v is left", what, slices.Sorted(maps.Keys(after)))
				}
			}
		}
	}
	if len(failed) < 2 || done == 0 {
		t.Errorf("failed at %v, done %d: the limits do not meet both what is on its way and what is written", failed, done)
	}
}

// An export goes into a disk that is mounted at the folder, whose group all of it has.
func TestExportsFillMountPoints(t *testing.T) {
	store, out := storeOfAT2(t, t.TempDir()), t.TempDir()
	mount(t, "tmpfs", out, "tmpfs", 0, "mode=2775,gid=4321")
	mustRun(t, exec.Command("swaybook", "--store", store, "export", "parquet", out))
	for _, name := range []string{"", "records", "records/part-0001.parquet", "ordinates/damping=0.05", "ordinates/damping=0.05/part-0001.parquet"} {
		info, err := os.Stat(filepath.Join(out, name))
		if err != nil {
			t.Fatal(err)
		}
		if is := info.Sys().(*syscall.Stat_t); is.Gid != 4321 || info.IsDir() && info.Mode()&fs.ModeSetgid == 0 {
			t.Errorf("%q: group %d, mode %v", name, is.Gid, info.Mode())
		}
	}
}

// refusedAtOnce runs an export that may replace a folder and cannot. It must say so by the words
// given and leave all as it was; a limit on the size of files stops it where it writes any.
func refusedAtOnce(t *testing.T, cmd *exec.Cmd, dir, words string) {
	t.Helper()
	before := treeOf(t, dir)
	limited := exec.Command("sh", append([]string{"-c", `ulimit -f 64 && exec "$0" "$@"`, cmd.Path}, cmd.Args[1:]...)...)
	limited.Dir, limited.SysProcAttr = cmd.Dir, cmd.SysProcAttr
	text, _ := limited.CombinedOutput()
	if limited.ProcessState.ExitCode() != exitFailed || !strings.Contains(string(text), words) || !strings.Contains(string(text), "it cannot be replaced by another folder: ") {
		t.Errorf("exit code %d, %q, want %q", limited.ProcessState.ExitCode(), text, words)
	}
	if after := treeOf(t, dir); !maps.Equal(after, before) {
		t.Errorf("%v is there, and was %v", slices.Sorted(maps.Keys(after)), slices.Sorted(maps.Keys(before)))
	}
}

// A folder that cannot be replaced is told before anything is written.
func TestExportsThatCannotReplaceSayItAtOnce(t *testing.T) {
	dir := openDir(t)
	store, around := storeOfAT2(t, dir), filepath.Join(dir, "around")
	out := filepath.Join(around, "out")
	if err := os.MkdirAll(out, 0o777); err != nil {
		t.Fatal(err)
	}
	export := func() *exec.Cmd {
		return exec.Command("swaybook", "--store", store, "export", "parquet", "--force", "--damping", "0,2%,5%,10%,20%", out)
	}
	t.Run("mount point", func(t *testing.T) {
		mount(t, "tmpfs", out, "tmpfs", 0, "")
		mustRun(t, export())
		refusedAtOnce(t, export(), around, "it is a mount point (device or resource busy)")
	})
	mustRun(t, export())
	as := nobodysCommands(t, dir)
	mustRun(t, as(export()))
	for what, path := range map[string]string{"folder around it": around, "folder": out} { // moving one changes it
		t.Run(what, func(t *testing.T) {
			if err := os.Chmod(path, 0o555); err != nil {
				t.Fatal(err)
			}
			refusedAtOnce(t, as(export()), around, "permission denied")
			if err := os.Chmod(path, 0o755); err != nil {
				t.Fatal(err)
			}
		})
	}
}

// openDir is a folder that others than its owner may enter.
func openDir(t *testing.T) string {
	t.Helper()
	dir, err := os.MkdirTemp("", "exports")
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { os.RemoveAll(dir) })
	if err := os.Chmod(dir, 0o755); err != nil {
		t.Fatal(err)
	}
	return dir
}

// An export is done where what it replaced cannot be removed, and says what is left.
func TestExportsThatCannotRemoveTheOldAreDone(t *testing.T) {
	dir := openDir(t)
	store := storeOfAT2(t, dir)
	around := filepath.Join(dir, "around")
	out := filepath.Join(around, "out")
	export := exec.Command("swaybook", "--store", store, "export", "parquet", "--force", out)
	if err := os.Mkdir(around, 0o777); err != nil {
		t.Fatal(err)
	}
	as := nobodysCommands(t, dir)
	mustRun(t, as(export))
	before, err := os.Stat(out)
	if err == nil {
		err = os.Chmod(filepath.Join(out, "records"), 0o555)
	}
	if err != nil {
		t.Fatal(err)
	}
	text, err := as(export).CombinedOutput()
	note := regexp.MustCompile(`(?m)^note: (.*/around/\.out\.part-[0-9]+) is left: .*records/part-0001\.parquet: permission denied$`).FindSubmatch(text)
	if err != nil || note == nil {
		t.Fatalf("%v, %q", err, text)
	}
	old, errOld := os.Stat(filepath.Join(string(note[1]), "before"))
	now, errNow := os.Stat(out)
	if errOld != nil || errNow != nil || !os.SameFile(before, old) || os.SameFile(before, now) {
		t.Errorf("before %v, %v; now %v, %v", old, errOld, now, errNow)
	}
	if err := os.Chmod(filepath.Join(string(note[1]), "before", "records"), 0o755); err != nil {
		t.Error(err)
	}
}
