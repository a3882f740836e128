package packs

import (
	"fmt"
	"math"
	"strings"

	"railproof/calc/rules"

	"github.com/google/cel-go/cel"
	"github.com/google/cel-go/common/ast"
	"github.com/google/cel-go/common/types"
)

// expression is one compiled text of a rule.
type expression struct {
	program cel.Program
	names   map[string]rules.Name
	dim     dimension
	reads   []string // facts that the text names, in its order
}

// compile checks a text in an environment: names, types and dimensions.
func compile(text string, e *environment) (*expression, error) {
	if strings.TrimSpace(text) == "" {
		return nil, fmt.Errorf("empty expression")
	}
	parsed, issues := e.cel.Parse(text)
	if issues.Err() != nil {
		return nil, firstIssue(issues)
	}
	reads, err := knownNames(parsed.NativeRep(), e.names)
	if err != nil {
		return nil, err
	}
	wholeNumbersToDoubles(parsed.NativeRep().Expr())
	checked, issues := e.cel.Check(parsed)
	if issues.Err() != nil {
		return nil, firstIssue(issues)
	}
	dim, err := meter{e.names}.of(checked.NativeRep().Expr())
	if err != nil {
		return nil, err
	}
	program, err := e.cel.Program(checked, cel.CostLimit(maxCost))
	if err != nil {
		return nil, err
	}
	return &expression{program, e.names, dim, reads}, nil
}

// wholeNumbersToDoubles lets a pack write 2 where it means 2.0: facts are all
// real numbers.
func wholeNumbersToDoubles(e ast.Expr) {
	factory := ast.NewExprFactory()
	ast.PreOrderVisit(e, ast.NewExprVisitor(func(e ast.Expr) {
		if e.Kind() != ast.LiteralKind {
			return
		}
		switch n := e.AsLiteral().(type) {
		case types.Int:
			e.SetKindCase(factory.NewLiteral(e.ID(), types.Double(n)))
		case types.Uint:
			e.SetKindCase(factory.NewLiteral(e.ID(), types.Double(n)))
		}
	}))
}

// firstIssue returns the first message of the compiler with its place in the text.
func firstIssue(issues *cel.Issues) error {
	list := issues.Errors()
	if len(list) == 0 {
		return issues.Err()
	}
	first := list[0]
	return fmt.Errorf("column %d: %s", first.Location.Column()+1, first.Message)
}

// knownNames lists the facts that an expression names. It refuses the first that
// the scope does not have, with the nearest one that it has.
func knownNames(tree *ast.AST, names map[string]rules.Name) ([]string, error) {
	var reads []string
	var walk func(e ast.Expr) error
	walk = func(e ast.Expr) error {
		switch e.Kind() {
		case ast.CallKind:
			c := e.AsCall()
			if c.IsMemberFunction() {
				return fmt.Errorf("column %d: %s is not a function of rules", column(tree, e), c.FunctionName())
			}
			for _, a := range c.Args() {
				if err := walk(a); err != nil {
					return err
				}
			}
		case ast.IdentKind, ast.SelectKind:
			if !isName(e) {
				return fmt.Errorf("column %d: only facts have fields", column(tree, e))
			}
			key := strings.TrimPrefix(dotted(e), presence)
			if _, ok := names[key]; ok {
				reads = append(reads, key)
				return nil
			}
			return fmt.Errorf("column %d: %s is not a name here%s", column(tree, e), key, suggestion(key, names))
		}
		return nil
	}
	err := walk(tree.Expr())
	return reads, err
}

// isName reports whether an expression is a name, plain or dotted.
func isName(e ast.Expr) bool {
	for e.Kind() == ast.SelectKind {
		e = e.AsSelect().Operand()
	}
	return e.Kind() == ast.IdentKind
}

func column(tree *ast.AST, e ast.Expr) int {
	for e.Kind() == ast.SelectKind {
		e = e.AsSelect().Operand()
	}
	return tree.SourceInfo().GetStartLocation(e.ID()).Column() + 1
}

// suggestion names what was probably meant; "" if nothing is near.
func suggestion(given string, names map[string]rules.Name) string {
	const near = 4 // edits
	best, least := "", near
	for key := range names {
		if d := distance(given, key, least+1); d < least || d == least && d < near && key < best {
			best, least = key, d
		}
	}
	if best == "" {
		return ""
	}
	return "; did you mean " + best + "?"
}

// distance returns the edit distance of two words, or bound if it is no less.
func distance(a, b string, bound int) int {
	if d := len(a) - len(b); d >= bound || -d >= bound {
		return bound
	}
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := range len(a) {
		diagonal := row[0]
		row[0] = i + 1
		for j := range len(b) {
			cost := diagonal
			if a[i] != b[j] {
				cost++
			}
			diagonal = row[j+1]
			row[j+1] = min(cost, row[j]+1, row[j+1]+1)
		}
	}
	return min(row[len(b)], bound)
}

// facts lets an expression look up names; it is an activation of the expression
// language.
type facts struct {
	look  *rules.Look
	names map[string]rules.Name
}

// ResolveName implements the activation.
func (f facts) ResolveName(name string) (any, bool) {
	if key, ok := strings.CutPrefix(name, presence); ok {
		return f.look.Has(key), true
	}
	switch f.names[name].Kind {
	case rules.WordFact:
		return f.look.Word(name), true
	case rules.FlagFact:
		return f.look.Flag(name), true
	}
	return f.look.Number(name), true
}

// Parent implements the activation.
func (f facts) Parent() cel.Activation { return nil }

// number evaluates an expression whose value is a number.
func (e *expression) number(look *rules.Look) float64 {
	if n, ok := e.evaluate(look).(float64); ok {
		return n
	}
	return math.NaN()
}

// holds evaluates an expression whose value is yes or no.
func (e *expression) holds(look *rules.Look) bool {
	yes, _ := e.evaluate(look).(bool)
	return yes
}

func (e *expression) evaluate(look *rules.Look) any {
	out, _, err := e.program.Eval(facts{look, e.names})
	if err != nil {
		look.Fail("the rule's expression cannot be computed: " + err.Error())
		return nil
	}
	return out.Value()
}
