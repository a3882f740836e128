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

// explained lists the operations whose answers tell on request how their figures
// follow.
var explained = map[string]bool{"losses": true, "sizing": true}

// Explains reports whether an operation's answers can do that.
func Explains(operation string) bool { return explained[operation] }
