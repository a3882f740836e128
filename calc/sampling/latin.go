package sampling

import "math/bits"

// permutation is a keyed bijection of the integers below n that takes no memory:
// rounds of odd multiplication and xor-shift on the next power of two, repeated
// until the value falls below n (cycle walking, fewer than two passes on average).
type permutation struct {
	n, mask    uint64
	shift      uint
	add, times [permutationRounds]uint64
}

const permutationRounds = 4 // with three, small strata counts are visibly uneven

func newPermutation(n, key uint64) permutation {
	width := bits.Len64(n - 1)
	p := permutation{n: n, mask: 1<<width - 1, shift: uint(width+1) / 2}
	for r := range p.add {
		p.add[r] = Bits(key, uint64(2*r))
		p.times[r] = Bits(key, uint64(2*r+1)) | 1
	}
	return p
}

func (p *permutation) at(x uint64) uint64 {
	for {
		for r := range p.add {
			x = (x + p.add[r]) * p.times[r] & p.mask
			x ^= x >> p.shift
		}
		if x < p.n {
			return x
		}
	}
}

// latinReplicate is one Latin hypercube: every coordinate visits each of n equal
// strata once, in an order of its own.
//
// Source: M. D. McKay, R. J. Beckman, W. J. Conover, Technometrics 21, 239-245
// (1979).
type latinReplicate struct {
	order  []permutation
	jitter uint64
}

func newLatinReplicate(coordinates int, n, seed uint64, replicate int) latinReplicate {
	l := latinReplicate{order: make([]permutation, coordinates), jitter: subseed(seed, purposeJitter, replicate)}
	sub := subseed(seed, purposePermutation, replicate)
	for j := range l.order {
		l.order[j] = newPermutation(n, Key(sub, uint64(j)))
	}
	return l
}

// at places the point within its strata by 24 random bits, so that stratum plus
// place is exact and the quotient stays inside its stratum for n up to 2^28.
func (l *latinReplicate) at(i uint64, u []float64) {
	key := Key(l.jitter, i)
	for j := range l.order {
		p := &l.order[j]
		place := (float64(int64(Bits(key, uint64(j))>>40)) + 0.5) * 0x1p-24
		u[j] = (float64(int64(p.at(i))) + place) / float64(p.n)
	}
}
