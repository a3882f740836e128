package sampling

// sobolBits is the length of the direction numbers: up to 2^32 points.
const sobolBits = 32

// sobolDirections returns the direction numbers of one dimension, the first digit
// in bit 63.
//
// The recurrence over the primitive polynomial x^s + a1 x^(s-1) + ... + 1 is
//
//	m_k = 2 a1 m_(k-1) xor 4 a2 m_(k-2) xor ... xor 2^s m_(k-s) xor m_(k-s)
//
// Source: P. Bratley, B. L. Fox, "Algorithm 659", ACM Trans. Math. Software 14,
// 88-100 (1988).
func sobolDirections(dimension int) (v [sobolBits]uint64) {
	if dimension == 0 {
		for k := range v {
			v[k] = 1 << (63 - k)
		}
		return v
	}
	d := &directions[dimension-1]
	s := len(d.m)
	var m [sobolBits]uint64
	for k := range m {
		if k < s {
			m[k] = uint64(d.m[k])
		} else {
			m[k] = m[k-s] ^ m[k-s]<<s
			for i := 1; i < s; i++ {
				if d.polynomial>>(s-i)&1 == 1 {
					m[k] ^= m[k-i] << i
				}
			}
		}
		v[k] = m[k] << (63 - k)
	}
	return v
}

// scramble multiplies the direction numbers, as columns of digits, by a random
// lower-triangular matrix with a unit diagonal. Together with a random digital
// shift this is an affine scrambling: each point is uniform on the cube, the net's
// balance is kept, and the variance of a mean is that of nested uniform scrambling
// for the same net. It costs nothing per point, since the product is taken once.
//
// Source: J. Matoušek, "On the L2-discrepancy for anchored boxes", J. Complexity
// 14, 527-556 (1998).
func scramble(v *[sobolBits]uint64, key uint64) {
	var column [sobolBits]uint64
	for c := range column {
		top := uint64(1) << (63 - c)
		column[c] = top | Bits(key, uint64(c))&(top-1)
	}
	for k := range v {
		y := uint64(0)
		for c := range column {
			if v[k]>>(63-c)&1 == 1 {
				y ^= column[c]
			}
		}
		v[k] = y
	}
}

// sobolNet is one independently scrambled replicate: the direction numbers bit by
// bit with the coordinates side by side, and the digital shift.
type sobolNet struct {
	direction []uint64
	shift     []uint64
}

func newSobolNet(coordinates, bits int, seed uint64, replicate int) sobolNet {
	n := sobolNet{make([]uint64, bits*coordinates), make([]uint64, coordinates)}
	sub := subseed(seed, purposeScramble, replicate)
	for j := range coordinates {
		v := sobolDirections(j)
		key := Key(sub, uint64(j))
		scramble(&v, key)
		for b := range bits {
			n.direction[b*coordinates+j] = v[b]
		}
		n.shift[j] = Bits(key, sobolBits)
	}
	return n
}

// at sets x to point i of the net, in Gray-code order.
func (n *sobolNet) at(i uint64, x []uint64) {
	copy(x, n.shift)
	for b, gray := 0, i^i>>1; gray != 0; b, gray = b+1, gray>>1 {
		if gray&1 == 1 {
			n.flip(b, x)
		}
	}
}

func (n *sobolNet) flip(b int, x []uint64) {
	row := n.direction[b*len(x):][:len(x)]
	for j := range row {
		x[j] ^= row[j]
	}
}
