package query

import (
	"github.com/expr-lang/expr/ast"
	"github.com/expr-lang/expr/parser"

	"swaybook/db"
)

// isPeak reports whether an attribute is one that a rotated pair may have to be
// asked for: its samples give it where it is not stored.
func isPeak(name string) bool { return attributeDetails[name]&db.DetailPeaks != 0 }

// usesPeaks reports whether the expression cannot be decided without peaks.
func (w *where) usesPeaks() bool { return w != nil && hasPeak(w.names) }

func hasPeak(names map[string]bool) bool {
	for name, used := range names {
		if used && isPeak(name) {
			return true
		}
	}
	return false
}

// possibleText is an expression that is true wherever the given one can be, with
// whatever peaks: each condition on a peak is taken for met, or under "not" for
// not met. So `station == "A" and pga_g > 1` becomes `station == "A" and true`.
// The text must be one that compileWhere accepts; "" where that cannot be told.
func possibleText(text string) string {
	tree, err := parser.Parse(text)
	if err != nil {
		return ""
	}
	return supposed(tree.Node, true).String()
}

// supposed is the condition with what depends on peaks decided as wanted.
func supposed(node ast.Node, want bool) ast.Node {
	switch n := node.(type) {
	case *ast.UnaryNode:
		if n.Operator == "not" || n.Operator == "!" {
			return &ast.UnaryNode{Operator: n.Operator, Node: supposed(n.Node, !want)}
		}
	case *ast.BinaryNode:
		switch n.Operator {
		case "and", "&&", "or", "||":
			return &ast.BinaryNode{Operator: n.Operator, Left: supposed(n.Left, want), Right: supposed(n.Right, want)}
		}
	}
	used := &inspector{used: map[string]bool{}}
	ast.Walk(&node, used)
	if hasPeak(used.used) {
		return &ast.BoolNode{Value: want}
	}
	return node
}
