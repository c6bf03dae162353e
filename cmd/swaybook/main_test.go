package main

import (
	"errors"
	"flag"
	"fmt"
	"io"
	"os/exec"
	"path/filepath"
	"strconv"
	"testing"

	"github.com/rogpeppe/go-internal/testscript"
)

var update = flag.Bool("update", false, "rewrite the expectations of the scripts")

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){"swaybook": main})
}

// TestScripts runs the command line as people and scripts see it.
func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{
		Dir:           filepath.Join("..", "..", "testdata", "script"),
		UpdateScripts: *update,
		Setup: func(env *testscript.Env) error {
			testdata, err := filepath.Abs(filepath.Join("..", "..", "testdata"))
			env.Setenv("RECORDS", filepath.Join(testdata, "records"))
			env.Setenv("LAYOUTS", filepath.Join(testdata, "layouts"))
			return err
		},
		Cmds: map[string]func(*testscript.TestScript, bool, []string){"status": status},
		Condition: func(cond string) (bool, error) {
			// [sqlite3]: the command-line client of SQLite is installed.
			_, err := exec.LookPath(cond)
			return err == nil, nil
		},
	})
}

// status N COMMAND... runs the command and asserts its exit code, which exec
// cannot do.
func status(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: status N command...")
	}
	want, err := strconv.Atoi(args[0])
	ts.Check(err)
	got := 0
	if err := ts.Exec(args[1], args[2:]...); err != nil {
		exit, ok := err.(*exec.ExitError)
		if !ok {
			ts.Fatalf("%v", err)
		}
		got = exit.ExitCode()
	}
	if got != want {
		ts.Fatalf("exit code %d, want %d", got, want)
	}
}

// TestRejectedIsNoExcuse: what fails after some files were rejected is a failure.
func TestRejectedIsNoExcuse(t *testing.T) {
	for _, c := range []struct {
		err  error
		want int
	}{
		{errRejected, exitRejected},
		{errors.Join(errRejected, nil), exitRejected},
		{errors.Join(errRejected, errRejected), exitRejected},
		{fmt.Errorf("ingest: %w", errRejected), exitRejected},
		{errors.Join(errRejected, io.ErrShortWrite), exitFailed},
		{errors.Join(io.ErrShortWrite, errors.Join(errRejected)), exitFailed},
		{errors.Join(errRejected, errInterrupted), exitInterrupted},
		{errors.Join(errRejected, usagef("wrong")), exitUsage},
	} {
		if got := rank(c.err); got != c.want {
			t.Errorf("rank(%q) = %d, want %d", c.err, got, c.want)
		}
	}
}
