package exchange

// computations are the operations that take a body. A new one is a line here and
// a file of its own beside it.
var computations = map[string]handler{
	"corners":     proof,
	"losses":      losses,
	"sizing":      size,
	"steadyState": steadyState,
}
