package packs

import (
	"maps"
	"math"
	"slices"
	"sync"

	"railproof/calc/rules"

	"github.com/google/cel-go/cel"
	"github.com/google/cel-go/common"
	"github.com/google/cel-go/common/ast"
	"github.com/google/cel-go/common/env"
	"github.com/google/cel-go/common/operators"
	"github.com/google/cel-go/common/types"
	"github.com/google/cel-go/common/types/ref"
)

// presence begins the hidden names that has() asks: presence + "part.rating.voltage_v".
const presence = "known."

// Bounds of one expression.
const (
	maxExpression = 2000 // [1] code points
	maxDepth      = 40   // [1] nesting
	maxCost       = 2000 // [1] steps of evaluation
)

// environment is what expressions of one scope may say.
type environment struct {
	cel   *cel.Env
	names map[string]rules.Name
}

var environments [rules.ScopeCount]struct {
	once sync.Once
	env  *environment
}

// environmentOf returns the environment of a scope, built on first use.
func environmentOf(s rules.Scope) *environment {
	slot := &environments[s]
	slot.once.Do(func() { slot.env = newEnvironment(s) })
	return slot.env
}

// with returns an environment that also has a pack's parameters.
func (e *environment) with(parameters map[string]float64) (*environment, error) {
	if len(parameters) == 0 {
		return e, nil
	}
	more := make([]cel.EnvOption, 0, len(parameters))
	next := &environment{names: maps.Clone(e.names)}
	for name := range parameters {
		key := rules.ParameterRoot + name
		next.names[key] = rules.Name{Key: key, Unit: anyUnit}
		more = append(more, cel.Variable(key, cel.DoubleType))
	}
	extended, err := e.cel.Extend(more...)
	next.cel = extended
	return next, err
}

func newEnvironment(s rules.Scope) *environment {
	names := rules.Vocabulary(s)
	e := &environment{names: make(map[string]rules.Name, len(names))}
	variables := make([]cel.EnvOption, 0, 2*len(names)+16)
	for _, n := range names {
		e.names[n.Key] = n
		kind := cel.DoubleType
		switch n.Kind {
		case rules.WordFact:
			kind = cel.StringType
		case rules.FlagFact:
			kind = cel.BoolType
		}
		variables = append(variables, cel.Variable(n.Key, kind), cel.Variable(presence+n.Key, cel.BoolType))
	}
	operatorsUsed := &env.LibrarySubset{DisableMacros: true}
	for _, name := range []string{
		operators.LogicalAnd, operators.LogicalOr, operators.LogicalNot, operators.Conditional,
		operators.Equals, operators.NotEquals, operators.Less, operators.LessEquals, operators.Greater, operators.GreaterEquals,
		operators.Add, operators.Subtract, operators.Multiply, operators.Divide, operators.Negate,
	} {
		operatorsUsed.IncludeFunctions = append(operatorsUsed.IncludeFunctions, env.NewFunction(name))
	}
	options := slices.Concat(variables, functions())
	options = append(options,
		cel.StdLib(cel.StdLibSubset(operatorsUsed)),
		cel.ClearMacros(),
		cel.Macros(cel.GlobalMacro("has", 1, expandHas)),
		cel.ParserExpressionSizeLimit(maxExpression),
		cel.ParserRecursionLimit(maxDepth))
	built, err := cel.NewCustomEnv(options...)
	if err != nil {
		panic("packs: environment of " + s.String() + ": " + err.Error())
	}
	e.cel = built
	return e
}

// expandHas turns has(part.rating.voltage_v) into the hidden name that asks for
// its presence.
func expandHas(h cel.MacroExprFactory, _ ast.Expr, args []ast.Expr) (ast.Expr, *common.Error) {
	var under func(e ast.Expr) (ast.Expr, bool)
	under = func(e ast.Expr) (ast.Expr, bool) {
		switch e.Kind() {
		case ast.IdentKind:
			return h.NewSelect(h.NewIdent(presence[:len(presence)-1]), e.AsIdent()), true
		case ast.SelectKind:
			if operand, ok := under(e.AsSelect().Operand()); ok {
				return h.NewSelect(operand, e.AsSelect().FieldName()), true
			}
		}
		return nil, false
	}
	if e, ok := under(args[0]); ok {
		return e, nil
	}
	return nil, h.NewError(args[0].ID(), "has() takes the name of a fact")
}

// functions declares what expressions may call besides the operators.
func functions() []cel.EnvOption {
	d := cel.DoubleType
	overload := func(name string, n int, f func(x []float64) float64) cel.FunctionOpt {
		args := make([]*cel.Type, n)
		for i := range args {
			args[i] = d
		}
		return cel.Overload(name, args, d, cel.FunctionBinding(func(values ...ref.Val) ref.Val {
			var x [5]float64
			for i, v := range values {
				number, ok := v.(types.Double)
				if !ok {
					return types.MaybeNoSuchOverloadErr(v)
				}
				x[i] = float64(number)
			}
			return types.Double(f(x[:len(values)]))
		}))
	}
	least := func(x []float64) float64 { return fold(x, math.Min) }
	most := func(x []float64) float64 { return fold(x, math.Max) }
	return []cel.EnvOption{
		cel.Function("min", overload("min_2", 2, least), overload("min_3", 3, least)),
		cel.Function("max", overload("max_2", 2, most), overload("max_3", 3, most)),
		cel.Function("abs", overload("abs_1", 1, func(x []float64) float64 { return math.Abs(x[0]) })),
		cel.Function("sqrt", overload("sqrt_1", 1, func(x []float64) float64 { return math.Sqrt(x[0]) })),
		cel.Function("linear", overload("linear_5", 5, func(x []float64) float64 { return linear(x[0], x[1], x[2], x[3], x[4]) })),
	}
}

func fold(x []float64, f func(a, b float64) float64) float64 {
	y := x[0]
	for _, v := range x[1:] {
		y = f(y, v)
	}
	return y
}

// linear returns the straight line from (x0, y0) to (x1, y1) at x, flat beyond
// both ends.
func linear(x, x0, y0, x1, y1 float64) float64 {
	switch {
	case x <= x0:
		return y0
	case x >= x1:
		return y1
	}
	return y0 + (y1-y0)*(x-x0)/(x1-x0)
}
