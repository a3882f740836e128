// Package thermal links the power in parts to their temperatures: each part's
// resistance to ambient, mutual resistances, the step towards the equilibrium in
// which losses and temperatures agree, and the gain whose reaching one means that
// there is none.
//
// Losses as a function of temperature belong to the caller; nothing here
// allocates.
package thermal

import "slices"

const (
	MaxNodes     = 18 // [1]
	MaxCouplings = 64 // [1] as the contract takes
)

// Vector holds one number per node.
type Vector [MaxNodes]float64

// Coupling is the mutual resistance of two nodes.
type Coupling struct {
	A, B         uint8
	OntoA, OntoB float64 // [K/W] rise of one per watt in the other
}

// Network is a set of nodes with resistances to ambient and couplings. The zero
// value is empty.
//
//	Ti = Tamb + Rii Pi + Σ Rij Pj
//
// It owns the workspace of Step and Feedback, so each goroutine needs its own.
type Network struct {
	n         int
	node      [MaxNodes]uint8
	self      Vector // [K/W]
	couplings int
	coupling  [MaxCouplings]Coupling
	joined    int // nodes that take part in a coupling
	join      [MaxNodes]uint8

	lack, delta, next, inverse Vector // workspace of Step
	coupled                    gains  // workspace of Step and Feedback
}

// Reset empties the network.
func (n *Network) Reset() { n.n, n.couplings, n.joined = 0, 0, 0 }

// Add puts node i in the network with its resistance to ambient [K/W].
func (n *Network) Add(i int, resistance float64) {
	n.node[n.n] = uint8(i)
	n.self[i] = resistance
	n.n++
}

// SetSelf changes the resistance to ambient [K/W] of a node that was added.
func (n *Network) SetSelf(i int, resistance float64) { n.self[i] = resistance }

// Couple adds mutual resistances [K/W] between two nodes: the rise of a per watt
// in b, and of b per watt in a. They are equal by reciprocity unless a node
// stands for several equal parts.
func (n *Network) Couple(a, b int, ontoA, ontoB float64) {
	n.coupling[n.couplings] = Coupling{uint8(a), uint8(b), ontoA, ontoB}
	n.couplings++
	for _, i := range [...]uint8{uint8(a), uint8(b)} {
		if !slices.Contains(n.join[:n.joined], i) {
			n.join[n.joined] = i
			n.joined++
		}
	}
}

// Temperatures computes every node's temperature [degC] from the powers [W].
func (n *Network) Temperatures(ambientDegC float64, power, dst *Vector) {
	for _, i := range n.node[:n.n] {
		dst[i] = ambientDegC + n.self[i]*power[i]
	}
	for k := range n.coupling[:n.couplings] {
		c := &n.coupling[k]
		dst[c.A] += c.OntoA * power[c.B]
		dst[c.B] += c.OntoB * power[c.A]
	}
}

// Rise returns how far node i lies above ambient by its own power, and by that of
// others [K].
func (n *Network) Rise(i int, power *Vector) (own, others float64) {
	own = n.self[i] * power[i]
	for k := range n.coupling[:n.couplings] {
		c := &n.coupling[k]
		if int(c.A) == i {
			others += c.OntoA * power[c.B]
		}
		if int(c.B) == i {
			others += c.OntoB * power[c.A]
		}
	}
	return own, others
}
