//go:build linux && amd64 && !noasm

package kernel

import (
	"os"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// TestNoLevelIsSilent: a kernel that the machine could run, as Linux lists its
// instructions, is among those that all other tests go through.
func TestNoLevelIsSilent(t *testing.T) {
	text, err := os.ReadFile("/proc/cpuinfo")
	if err != nil {
		t.Skipf("no list of instructions: %v", err)
	}
	line := regexp.MustCompile(`(?m)^flags\s*:(.*)$`).FindStringSubmatch(string(text))
	if line == nil {
		t.Skip("no flags in the list of instructions")
	}
	flags := strings.Fields(line[1])
	for name, needs := range map[string][]string{AVX512: {"avx512f"}, AVX2: {"avx2", "fma"}} {
		has := true
		for _, flag := range needs {
			has = has && slices.Contains(flags, flag)
		}
		if runs := slices.Contains(Names(), name); runs != has {
			t.Errorf("kernel %s: in use %v, but the processor has %v: %v", name, runs, needs, has)
		}
	}
}
