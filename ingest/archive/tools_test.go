package archive

import (
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

// What the usual tools pack comes out as it went in.
func TestArchivesOfTheUsualTools(t *testing.T) {
	dir := t.TempDir()
	var want []string
	for _, name := range []string{"a.V2", "sub/b.V2", "sub/deep/c.V2"} {
		content := strings.Repeat(name+" ", 1000)
		full := filepath.Join(dir, "in", filepath.FromSlash(name))
		if err := errors.Join(os.MkdirAll(filepath.Dir(full), 0o755), os.WriteFile(full, []byte(content), 0o644)); err != nil {
			t.Fatal(err)
		}
		want = append(want, name+"="+content)
	}
	for _, command := range []string{
		"zip -qr %s .", "zip -q0r %s .", "tar -cf %s .", "tar --sort=name -czf %s .", "tar --format=pax -cf %s .", "tar --format=ustar -cjf %s .",
	} {
		t.Run(command, func(t *testing.T) {
			out := filepath.Join(t.TempDir(), "a.zip")
			args := strings.Fields(fmt.Sprintf(command, out))
			if _, err := exec.LookPath(args[0]); err != nil {
				t.Skip(err)
			}
			cmd := exec.Command(args[0], args[1:]...)
			cmd.Dir = filepath.Join(dir, "in")
			if text, err := cmd.CombinedOutput(); err != nil {
				t.Skipf("%v: %s", err, text)
			}
			data, err := os.ReadFile(out)
			if err != nil {
				t.Fatal(err)
			}
			got := list(t, data, "a", testLimits())
			for _, line := range want {
				if !strings.Contains("\n"+got+"\n", "\n"+line+"\n") {
					t.Errorf("%.20s is missing", line)
				}
			}
			if n := strings.Count(got, "\n"); n != 2 {
				t.Errorf("%d lines\n%.1000s", n+1, got)
			}
		})
	}
}
