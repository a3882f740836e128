package sampling

import (
	"fmt"
	"math/bits"
)

// Method is how samples are placed.
type Method uint8

const (
	Independent    Method = iota // pseudo-random; exact confidence statements hold
	Sobol                        // replicates of a scrambled low-discrepancy net
	LatinHypercube               // replicates of a Latin hypercube
)

// Replicates is the number of independently randomised sets that the two balanced
// methods draw, so that their spread gives an error bar.
const Replicates = 16

const (
	leastPerReplicate = 8       // [1] fewer points have no balance to speak of
	MaxSamples        = 1 << 28 // [1] the strata of a Latin hypercube stay exact up to here
)

// Design asks for a number of samples of the unit cube.
type Design struct {
	Method      Method
	Seed        uint64
	Coordinates int
	Samples     int
}

// Sampler yields the samples of a design. It never changes after New; each worker
// takes a Cursor of its own.
type Sampler struct {
	design       Design
	replicates   int
	perReplicate uint64
	nets         []sobolNet
	latin        []latinReplicate
}

// New lays out a design. The balanced methods round the number of samples up: to
// a whole number per replicate, and for Sobol to a power of two.
func New(d Design) (*Sampler, error) {
	if d.Coordinates < 0 || d.Samples < 1 || d.Samples > MaxSamples {
		return nil, fmt.Errorf("sampling: %d samples of %d coordinates: between 1 and %d samples are possible", d.Samples, d.Coordinates, MaxSamples)
	}
	s := &Sampler{design: d, replicates: 1, perReplicate: uint64(d.Samples)}
	if d.Method == Independent {
		return s, nil
	}
	s.replicates = Replicates
	s.perReplicate = max(leastPerReplicate, uint64(d.Samples+Replicates-1)/Replicates)
	switch d.Method {
	case LatinHypercube:
		s.latin = make([]latinReplicate, s.replicates)
		for r := range s.latin {
			s.latin[r] = newLatinReplicate(d.Coordinates, s.perReplicate, d.Seed, r)
		}
	case Sobol:
		if d.Coordinates > MaxSobolCoordinates {
			return nil, fmt.Errorf("sampling: %d coordinates: the low-discrepancy sequence has at most %d; use independent samples", d.Coordinates, MaxSobolCoordinates)
		}
		width := bits.Len64(s.perReplicate - 1)
		s.perReplicate = 1 << width
		s.nets = make([]sobolNet, s.replicates)
		for r := range s.nets {
			s.nets[r] = newSobolNet(d.Coordinates, width, d.Seed, r)
		}
	default:
		panic("sampling: unknown method")
	}
	return s, nil
}

// Samples returns the number of samples laid out: at least as many as asked for.
func (s *Sampler) Samples() int { return s.replicates * int(s.perReplicate) }

// Replicates returns the number of independent sets among them; sample k belongs
// to set k / PerReplicate.
func (s *Sampler) Replicates() int { return s.replicates }

// PerReplicate returns the number of samples in one set.
func (s *Sampler) PerReplicate() int { return int(s.perReplicate) }

// Coordinates returns the dimension of the cube.
func (s *Sampler) Coordinates() int { return s.design.Coordinates }

// Cursor reads samples, in any order; consecutive ones are cheapest.
type Cursor struct {
	*Sampler
	next uint64 // sample that follows from x by one flip
	x    []uint64
}

// Cursor returns a reader for one worker.
func (s *Sampler) Cursor() *Cursor {
	return &Cursor{Sampler: s, x: make([]uint64, s.design.Coordinates)}
}

// Point sets u to sample k, every coordinate in (0, 1).
func (c *Cursor) Point(k int, u []float64) {
	if k < 0 || k >= c.Samples() || len(u) != len(c.x) {
		panic("sampling: sample or length out of range")
	}
	switch c.design.Method {
	case Independent:
		key := Key(c.design.Seed, uint64(k))
		for j := range u {
			key += coordinateStep // as Uniform(key, j)
			u[j] = unit(mix(key))
		}
	case Sobol:
		c.sobol(uint64(k), u)
	case LatinHypercube:
		c.latin[uint64(k)/c.perReplicate].at(uint64(k)%c.perReplicate, u)
	}
}

func (c *Cursor) sobol(k uint64, u []float64) {
	net, i := &c.nets[k/c.perReplicate], k%c.perReplicate
	if k == c.next && i > 0 {
		net.flip(bits.TrailingZeros64(i), c.x)
	} else {
		net.at(i, c.x)
	}
	c.next = k + 1
	for j, x := range c.x {
		u[j] = unit(x)
	}
}
