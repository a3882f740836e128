package exchange

// computations are the operations that take a body. A new one is a line here and
// a file of its own beside it.
var computations = map[string]handler{
	"bomChecks":     bomChecks,
	"corners":       proof,
	"loopGain":      loopGain,
	"losses":        losses,
	"ruleChecks":    ruleChecks,
	"sizing":        size,
	"steadyState":   steadyState,
	"substitutions": substitutions,
	"transients":    transients,
}
