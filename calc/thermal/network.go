// Package thermal links the power in parts to their temperatures: each part's
// resistance to ambient, mutual resistances, the step towards the equilibrium in
// which losses and temperatures agree, and the gain whose reaching one means that
// there is none.
//
// Losses as a function of temperature belong to the caller; nothing here
// allocates.
package thermal

import "slices"

const MaxNodes = 18 // [1]

// Vector holds one number per node.
type Vector [MaxNodes]float64

// Network is a set of nodes with resistances to ambient and couplings. The zero
// value is empty.
//
//	Ti = Tamb + Rii Pi + Σ Rij Pj
//
// It owns the workspace of Step and Feedback, so each goroutine needs its own.
type Network struct {
	n      int
	node   [MaxNodes]uint8 // those that take part in a coupling first
	self   Vector          // [K/W]
	joined int             // how many do
	mutual matrix          // [K/W] between them, by their places in node

	lack    Vector // [K] by place, as what follows
	power   Vector // [W]
	inverse Vector // [1] of 1 − Rii Ji
	coupled matrix // factors of 1 − R J of the joined nodes
	gains   gains  // workspace of Feedback
}

type matrix [MaxNodes][MaxNodes]float64

// Reset empties the network.
func (n *Network) Reset() { n.n, n.joined, n.mutual = 0, 0, matrix{} }

// Add puts node i in the network with its resistance to ambient [K/W].
func (n *Network) Add(i int, resistance float64) {
	n.node[n.n] = uint8(i)
	n.self[i] = resistance
	n.n++
}

// SetSelf changes the resistance to ambient [K/W] of a node that was added.
func (n *Network) SetSelf(i int, resistance float64) { n.self[i] = resistance }

// Couple adds mutual resistances [K/W] between two nodes: the rise of a per watt
// in b, and of b per watt in a; both are in the network. They are equal by reciprocity unless a node
// stands for several equal parts.
func (n *Network) Couple(a, b int, ontoA, ontoB float64) {
	k, l := n.join(uint8(a)), n.join(uint8(b))
	n.mutual[k][l] += ontoA
	n.mutual[l][k] += ontoB
}

// join returns the node's place among the joined ones, where it is moved to if it is
// not there.
func (n *Network) join(i uint8) int {
	k := slices.Index(n.node[:n.n], i)
	if k >= n.joined {
		n.node[k], n.node[n.joined] = n.node[n.joined], n.node[k]
		k = n.joined
		n.joined++
	}
	return k
}

// Temperatures computes every node's temperature [degC] from the powers [W].
func (n *Network) Temperatures(ambientDegC float64, power, dst *Vector) {
	for _, i := range n.node[:n.n] {
		dst[i] = ambientDegC + n.self[i]*power[i]
	}
	for k, i := range n.node[:n.joined] {
		for l, j := range n.node[:n.joined] {
			dst[i] += n.mutual[k][l] * power[j]
		}
	}
}

// Rise returns how far node i lies above ambient by its own power, and by that of
// others [K].
func (n *Network) Rise(i int, power *Vector) (own, others float64) {
	own = n.self[i] * power[i]
	if k := slices.Index(n.node[:n.joined], uint8(i)); k >= 0 {
		for l, j := range n.node[:n.joined] {
			others += n.mutual[k][l] * power[j]
		}
	}
	return own, others
}
