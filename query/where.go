package query

import (
	"errors"
	"fmt"
	"regexp"
	"strings"

	"github.com/expr-lang/expr"
	"github.com/expr-lang/expr/ast"
	"github.com/expr-lang/expr/file"
	"github.com/expr-lang/expr/vm"

	"swaybook/db"
)

// What one expression may cost. An expression is asked of every record, so its
// price is bounded: by its size, by the elements that one evaluation may make
// (a range such as 1990..1999 makes ten), and by leaving out what loops or
// multiplies text.
const (
	maxWhereText     = 10000 // bytes; also bounds how deep parentheses nest
	maxWhereNodes    = 1000
	maxWhereElements = 10000
)

// whereFunctions are the functions that expressions may use: all are pure and
// cost no more than the text they are given.
var whereFunctions = []string{
	"abs", "ceil", "floor", "round", "min", "max", "int", "float", "len",
	"lower", "upper", "trim", "trimPrefix", "trimSuffix", "hasPrefix", "hasSuffix", "indexOf", "lastIndexOf",
}

// where is a compiled expression. It is for one goroutine. The nil where takes
// everything and uses nothing.
type where struct {
	program *vm.Program
	// possible is true wherever program can be, whatever the peaks: see possibleText.
	possible *vm.Program
	machine  vm.VM
	used     []int           // positions in numbers of those that the expression uses
	names    map[string]bool // all that it uses
}

// compileWhere checks the expression's names and types. The empty text gives
// nil. Every error is a UsageError.
func compileWhere(text string) (*where, error) {
	if strings.TrimSpace(text) == "" {
		return nil, nil
	}
	if len(text) > maxWhereText {
		return nil, usage("where", "the expression is longer than %d bytes", maxWhereText)
	}
	inspector := &inspector{used: map[string]bool{}}
	options := []expr.Option{
		expr.Env(attributes{}), expr.AsBool(), expr.WarnOnAny(),
		expr.MaxNodes(maxWhereNodes), expr.DisableAllBuiltins(), expr.Patch(inspector),
	}
	for _, name := range whereFunctions {
		options = append(options, expr.EnableBuiltin(name))
	}
	program, err := expr.Compile(text, options...)
	if inspector.refused != "" {
		return nil, usage("where", "%s is not accepted in an expression", inspector.refused)
	}
	if err != nil {
		return nil, whereError(err)
	}
	w := &where{program: program, machine: vm.VM{MemoryBudget: maxWhereElements}, names: inspector.used}
	for i, n := range numbers {
		if inspector.used[n.name] {
			w.used = append(w.used, i)
		}
	}
	w.possible = program
	if w.usesPeaks() {
		if w.possible, err = expr.Compile(possibleText(text), options...); err != nil {
			return nil, whereError(err)
		}
	}
	return w, nil
}

func whereError(err error) error {
	why := plainWords(err.Error())
	var at *file.Error
	if errors.As(err, &at) {
		why = fmt.Sprintf("%s (at character %d)", plainWords(at.Message), at.Column+1)
	}
	return &UsageError{What: "where", Why: why + "; known attributes: " + WhereAttributes(), Err: err}
}

// plainWords puts the words of this package's users for those of the compiler's.
func plainWords(message string) string {
	for _, w := range wordings {
		message = w.compiler.ReplaceAllString(message, w.plain)
	}
	return message
}

var wordings = []struct {
	compiler *regexp.Regexp
	plain    string
}{
	{regexp.MustCompile(`\bfloat64\b`), "number"},
	{regexp.MustCompile(`\bint\b`), "whole number"},
	{regexp.MustCompile(`unexpected token Operator\("="\)`), `"=" is no comparison, write "=="`},
	{regexp.MustCompile(`\bbool\b`), "true-or-false"},
	{regexp.MustCompile(`type query\.qualityFlags has no field (\w+)`), `there is no finding "$1"`},
}

// unknown returns the name of the first attribute that the expression uses and
// the motion lacks, or "", peaks after all others.
func (w *where) unknown(a *attributes) string {
	peak := ""
	for _, i := range w.used {
		switch name := numbers[i].name; {
		case isKnown(numbers[i].of(a)):
		case !isPeak(name):
			return name
		case peak == "":
			peak = name
		}
	}
	return peak
}

// uses reports whether the expression uses the attribute.
func (w *where) uses(name string) bool { return w != nil && w.names[name] }

// met reports whether the motion meets the expression.
func (w *where) met(a *attributes) (bool, error) { return w.run(w.program, a) }

// canBeMet reports whether a motion of unknown peaks can meet the expression.
func (w *where) canBeMet(a *attributes) (bool, error) { return w.run(w.possible, a) }

func (w *where) run(program *vm.Program, a *attributes) (bool, error) {
	out, err := w.machine.Run(program, *a)
	if err != nil {
		return false, whereError(err)
	}
	yes, ok := out.(bool)
	if !ok {
		return false, usage("where", "the expression gives %v, not true or false", out)
	}
	return yes, nil
}

// details are those of components that the expression uses.
func (w *where) details() (d db.Details) {
	if w == nil {
		return 0
	}
	for name := range w.names {
		d |= attributeDetails[name]
	}
	return d
}

// inspector notes which names an expression uses and refuses what could loop,
// grow text or reach round the names. It changes nothing.
type inspector struct {
	used    map[string]bool
	refused string
}

// Visit implements the compiler's visitor.
func (v *inspector) Visit(node *ast.Node) {
	switch n := (*node).(type) {
	case *ast.IdentifierNode:
		v.used[n.Value] = true
		if n.Value == "$env" {
			v.refused = "$env"
		}
	case *ast.VariableDeclaratorNode:
		v.refused = "let"
	case *ast.PredicateNode, *ast.PointerNode:
		v.refused = "a function over the elements of a list"
	case *ast.MapNode:
		v.refused = "a map"
	case *ast.SequenceNode:
		v.refused = "more than one expression"
	}
}
