package sizing

// pace lets the caller of a sizing look about between its pieces, of a few
// milliseconds each, and leave. What is left is not finished.
type pace struct {
	yield func() bool
	left  bool
}

// goesOn yields and reports whether the caller stays; once left it is not asked again.
func (p *pace) goesOn() bool {
	p.left = p.left || !p.yield()
	return !p.left
}
