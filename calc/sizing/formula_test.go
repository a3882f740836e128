package sizing_test

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"
	"unicode"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/internal/calctest"
	"railproof/calc/sizing"
)

// expression evaluates arithmetic in the symbols of a formula: + - * / ^,
// brackets, sqrt, exp, numbers and pi.
type expression struct {
	text   string
	at     int
	symbol map[string]float64
	used   map[string]bool
}

func (e *expression) peek() byte {
	for e.at < len(e.text) && e.text[e.at] == ' ' {
		e.at++
	}
	if e.at == len(e.text) {
		return 0
	}
	return e.text[e.at]
}

func (e *expression) sum() float64 {
	v := e.product()
	for {
		switch e.peek() {
		case '+':
			e.at++
			v += e.product()
		case '-':
			e.at++
			v -= e.product()
		default:
			return v
		}
	}
}

func (e *expression) product() float64 {
	v := e.power()
	for {
		switch e.peek() {
		case '*':
			e.at++
			v *= e.power()
		case '/':
			e.at++
			v /= e.power()
		default:
			return v
		}
	}
}

func (e *expression) power() float64 {
	v := e.atom()
	if e.peek() == '^' {
		e.at++
		v = math.Pow(v, e.atom())
	}
	return v
}

func (e *expression) atom() float64 {
	c := rune(e.peek())
	if c == '(' {
		e.at++
		v := e.sum()
		if e.peek() != ')' {
			panic("bracket not closed")
		}
		e.at++
		return v
	}
	from := e.at
	for e.at < len(e.text) && (unicode.IsLetter(rune(e.text[e.at])) || unicode.IsDigit(rune(e.text[e.at])) || e.text[e.at] == '.') {
		e.at++
	}
	word := e.text[from:e.at]
	switch {
	case word == "pi":
		return math.Pi
	case word == "sqrt":
		return math.Sqrt(e.atom())
	case word == "exp":
		return math.Exp(e.atom())
	case unicode.IsDigit(c):
		v, err := strconv.ParseFloat(word, 64)
		if err != nil {
			panic(err)
		}
		return v
	}
	v, ok := e.symbol[word]
	if !ok {
		panic(fmt.Sprintf("no symbol %q at %q", word, e.text[from:]))
	}
	e.used[word] = true
	return v
}

// follow evaluates a formula by hand, as it were, from its inputs.
func follow(t *testing.T, formula string, inputs []sizing.Input) float64 {
	t.Helper()
	_, right, ok := strings.Cut(formula, " = ")
	require.True(t, ok, formula)
	e := &expression{text: right, symbol: map[string]float64{}, used: map[string]bool{}}
	for _, in := range inputs {
		e.symbol[in.Symbol] = in.Value
		assert.NotEmpty(t, in.Unit, in.Symbol)
	}
	v := e.sum()
	require.Equal(t, byte(0), e.peek(), "rest of %s", formula)
	return v
}

// Every figure that sizing states follows from the formula and the numbers stated
// beside it.
func TestEveryFormulaGivesItsFigure(t *testing.T) {
	seen := map[string]bool{}
	for k := range min(60, generated()) {
		a := sized()[k]
		for _, w := range a.Windows {
			if low := w.Least(); a.Status.OK() && low != nil {
				assert.GreaterOrEqual(t, w.Chosen*(1+1e-9), low.Value, "%d %s by %s", k, w.Name, low.Constraint)
			}
			if high := w.Most(); a.Status.OK() && high != nil {
				assert.LessOrEqual(t, w.Chosen*(1-1e-9), high.Value, "%d %s by %s", k, w.Name, high.Constraint)
			}
			for _, b := range w.Bounds {
				what := fmt.Sprintf("%d %s by %s: %s", k, w.Name, b.Constraint, b.Formula)
				calctest.Close(t, what, follow(t, b.Formula, b.Inputs), b.Value, 1e-9)
				calctest.Close(t, what+" (part)", b.Part, b.Value/b.Factor, 1e-12)
				assert.True(t, b.Ideal > 0, what)
				assert.NotEmpty(t, b.Source, what)
				assert.LessOrEqual(t, len(b.Formula), 256)
				seen[b.Constraint] = true
			}
		}
		for _, r := range a.Ratings {
			calctest.Close(t, r.Part+" "+r.Name+": "+r.Formula, follow(t, r.Formula, r.Inputs), r.Applied, 1e-9)
			assert.GreaterOrEqual(t, r.Required*(1+1e-12), r.Applied, r.Part+" "+r.Name)
			assert.NotEmpty(t, r.Source)
		}
	}
	for _, c := range []string{"least-on-time", "least-off-time", "inductor-ripple", "continuous-conduction", "step-recovery-rise", "step-recovery-fall", "output-ripple", "step-application", "step-release", "step-waiting", "step-bandwidth", "hold-up", "input-ripple"} {
		assert.True(t, seen[c], "%s never appears", c)
	}
}
