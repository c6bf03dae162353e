package spectrum

import (
	"go/ast"
	"go/parser"
	"go/token"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// asksForFusing tells whether a fused instruction of a source line can only be
// that of math.FMA: the line calls it, and holds no product beyond its arguments
// that is not rounded by a conversion.
func asksForFusing(line string) bool {
	code, _, _ := strings.Cut(line, "//")
	if !strings.Contains(code, "math.FMA(") {
		return false
	}
	// What a conversion encloses cannot fuse with what is outside.
	rounded := regexp.MustCompile(`float64\([^()]*\)`)
	for rounded.MatchString(code) {
		code = rounded.ReplaceAllString(code, "x")
	}
	return !strings.Contains(code, "*")
}

func TestAsksForFusing(t *testing.T) {
	for line, want := range map[string]bool{
		"	w = math.FMA(w, t, v)":                        true,
		"	s := math.FMA(x, y, float64(float64(a*b)*c))": true,
		"	s := math.FMA(x, y, z) + a*b":                 false,
		"	s := math.FMA(x, y, a*b)":                     false,
		"	s := a*b + c // math.FMA(a, b, c)":            false,
		"	s := float64(a*b) + c":                        false,
	} {
		if got := asksForFusing(line); got != want {
			t.Errorf("asksForFusing(%q) = %v", line, got)
		}
	}
}

// sourceOf returns the line of code that a line of a compiler listing is about.
func sourceOf(t *testing.T, listing string) string {
	t.Helper()
	place := regexp.MustCompile(`\(([^()]*\.go):(\d+)\)`).FindStringSubmatch(listing)
	if place == nil {
		t.Fatalf("no source line in %q", listing)
	}
	text, err := os.ReadFile(place[1])
	if err != nil {
		t.Fatal(err)
	}
	number, err := strconv.Atoi(place[2])
	if err != nil {
		t.Fatal(err)
	}
	return strings.Split(string(text), "\n")[number-1]
}

// TestNoOpenFusing compiles the numerical packages for architectures with fused
// multiply-add and finds the instruction only where math.FMA asks for it. Any
// other would give that architecture its own last bits.
func TestNoOpenFusing(t *testing.T) {
	if testing.Short() {
		t.Skip("compiles the package for other architectures")
	}
	tool, err := exec.LookPath("go")
	if err != nil {
		t.Skip("no go command in the path")
	}
	packages := []string{".", "../internal/kernel", "../internal/elementary", "../geodesy", "../likeness", "../signal", "../condition", "../quality", "../intensity",
		"../../query/stats", "../../query/mixed", "../../query/modal", "../../query/design"}
	for _, dir := range packages {
		if _, err := os.ReadDir(dir); err != nil { // tells the cache of test results what this one depends on
			t.Fatal(err)
		}
	}
	for _, target := range []string{"GOARCH=arm64", "GOARCH=amd64 GOAMD64=v3"} {
		t.Run(target, func(t *testing.T) {
			cmd := exec.Command(tool, append([]string{"build", "-gcflags=-S"}, packages...)...)
			cmd.Env = append(cmd.Environ(), append(strings.Fields(target), "GOOS=linux", "CGO_ENABLED=0", "GOFLAGS=")...)
			listing, err := cmd.CombinedOutput()
			if err != nil {
				t.Skipf("cannot compile for it: %v", err)
			}
			fused := 0
			for line := range strings.Lines(string(listing)) {
				if strings.Contains(line, "runtime.complex128div") {
					t.Errorf("divides complex numbers in the runtime, which is fused: %s", line)
				}
				if !strings.Contains(line, "FMADD") && !strings.Contains(line, "FMSUB") &&
					!strings.Contains(line, "FNMADD") && !strings.Contains(line, "FNMSUB") {
					continue
				}
				fused++
				if source := sourceOf(t, line); !asksForFusing(source) {
					t.Errorf("fused though not asked to: %s\n%s", line, source)
				}
			}
			if fused == 0 {
				t.Error("no fused instruction at all: the listing is not what this test reads")
			}
		})
	}
}

// TestSameFunctions finds in the packages that stored results come from no function that is
// not the same on every machine: of package math only what is exact, or rounded as IEEE 754
// says, nothing of complex functions or a general library. likeness, whose numbers meet bounds and are not stored, takes
// gonum's transforms; geodesy, whose results are stored to the metre, is left out.
func TestSameFunctions(t *testing.T) {
	exact := strings.Fields("Abs Ceil Copysign FMA Float64bits Float64frombits Floor Frexp Inf IsInf IsNaN Ldexp Max Min Mod NaN Nextafter Remainder Round RoundToEven Signbit Sqrt Trunc")
	sources := 0
	for _, dir := range []string{".", "../internal/kernel", "../internal/elementary", "../signal", "../condition", "../quality", "../intensity", "../likeness"} {
		paths, err := filepath.Glob(filepath.Join(dir, "*.go"))
		if err != nil {
			t.Fatal(err)
		}
		for _, path := range paths {
			if strings.HasSuffix(path, "_test.go") {
				continue
			}
			sources++
			file, err := parser.ParseFile(token.NewFileSet(), path, nil, 0)
			if err != nil {
				t.Fatal(err)
			}
			for _, spec := range file.Imports {
				imported := strings.Trim(spec.Path.Value, `"`)
				if imported == "math/cmplx" || strings.HasPrefix(imported, "gonum.org/") && dir != "../likeness" {
					t.Errorf("%s imports %s, whose bits are not the same on every machine", path, imported)
				}
			}
			ast.Inspect(file, func(n ast.Node) bool {
				call, ok := n.(*ast.CallExpr)
				if !ok {
					return true
				}
				selector, ok := call.Fun.(*ast.SelectorExpr)
				if !ok {
					return true
				}
				if of, ok := selector.X.(*ast.Ident); ok && of.Name == "math" && !slices.Contains(exact, selector.Sel.Name) {
					t.Errorf("%s calls math.%s, whose bits are not the same on every machine", path, selector.Sel.Name)
				}
				return true
			})
		}
	}
	if sources < 20 {
		t.Errorf("only %d sources", sources)
	}
}
