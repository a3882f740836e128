package packs

import (
	"fmt"
	"slices"
	"strings"

	"railproof/calc/rules"

	"github.com/google/cel-go/common/ast"
	"github.com/google/cel-go/common/operators"
	"github.com/google/cel-go/common/types"
)

// meter finds the dimension of an expression, so that a rule that compares volts
// with amperes is refused when its pack is loaded.
type meter struct{ names map[string]rules.Name }

func (m meter) of(e ast.Expr) (dimension, error) {
	switch e.Kind() {
	case ast.LiteralKind:
		switch e.AsLiteral().(type) {
		case types.Double:
			return dimension{free: true}, nil
		case types.String:
			return dimension{word: true}, nil
		case types.Bool:
			return dimension{truth: true}, nil
		}
		return dimension{}, fmt.Errorf("only numbers, words and true or false may be written out")
	case ast.IdentKind, ast.SelectKind:
		return m.name(dotted(e))
	case ast.CallKind:
		return m.call(e.AsCall())
	}
	return dimension{}, fmt.Errorf("lists, maps and messages have no place in a rule")
}

// dotted returns the full name that a chain of selections spells.
func dotted(e ast.Expr) string {
	if e.Kind() == ast.SelectKind {
		return dotted(e.AsSelect().Operand()) + "." + e.AsSelect().FieldName()
	}
	return e.AsIdent()
}

func (m meter) name(key string) (dimension, error) {
	if strings.HasPrefix(key, presence) {
		return dimension{truth: true}, nil
	}
	n, ok := m.names[key]
	switch {
	case !ok:
		return dimension{}, fmt.Errorf("%s is not a name", key)
	case n.Kind == rules.WordFact:
		return dimension{word: true}, nil
	case n.Kind == rules.FlagFact:
		return dimension{truth: true}, nil
	}
	d, ok := dimensions[n.Unit]
	if !ok {
		panic("packs: unit without a dimension: " + n.Unit)
	}
	return d, nil
}

func (m meter) call(c ast.CallExpr) (dimension, error) {
	args := make([]dimension, len(c.Args()))
	for i, a := range c.Args() {
		d, err := m.of(a)
		if err != nil {
			return d, err
		}
		args[i] = d
	}
	truth := dimension{truth: true}
	switch c.FunctionName() {
	case operators.LogicalAnd, operators.LogicalOr, operators.LogicalNot:
		return truth, nil
	case operators.Equals, operators.NotEquals:
		if err := m.words(c.Args()[0], c.Args()[1]); err != nil {
			return truth, err
		}
		_, err := same(args[0], args[1])
		return truth, err
	case operators.Less, operators.LessEquals, operators.Greater, operators.GreaterEquals:
		if !args[0].number() {
			return truth, fmt.Errorf("%s has no order", args[0])
		}
		_, err := same(args[0], args[1])
		return truth, err
	case operators.Conditional:
		return same(args[1], args[2])
	case operators.Negate, "abs":
		return args[0], nil
	case operators.Add:
		return sum(args[0], args[1], false)
	case operators.Subtract:
		return sum(args[0], args[1], true)
	case operators.Multiply:
		return times(args[0], args[1], 1)
	case operators.Divide:
		return times(args[0], args[1], -1)
	case "sqrt":
		return root(args[0])
	case "min", "max":
		d := args[0]
		var err error
		for _, a := range args[1:] {
			if d, err = same(d, a); err != nil {
				return d, err
			}
		}
		return d, nil
	case "linear":
		if _, err := same(args[0], args[1]); err != nil {
			return args[0], err
		}
		if _, err := same(args[0], args[3]); err != nil {
			return args[0], err
		}
		return same(args[2], args[4])
	}
	return dimension{}, fmt.Errorf("%s is not a function of rules", c.FunctionName())
}

// words refuses a comparison with a word that the fact can never be: such a
// condition would switch a rule off in silence.
func (m meter) words(a, b ast.Expr) error {
	for _, pair := range [][2]ast.Expr{{a, b}, {b, a}} {
		if k := pair[0].Kind(); k != ast.IdentKind && k != ast.SelectKind {
			continue
		}
		n, ok := m.names[dotted(pair[0])]
		if !ok || n.Kind != rules.WordFact || pair[1].Kind() != ast.LiteralKind {
			continue
		}
		if w, ok := pair[1].AsLiteral().(types.String); ok && !slices.Contains(n.Words, string(w)) {
			return fmt.Errorf("%s is never %q; it is one of %s", n.Key, string(w), strings.Join(n.Words, ", "))
		}
	}
	return nil
}
