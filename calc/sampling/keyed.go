package sampling

// The increments are odd 64-bit constants: the golden ratio's fraction, and a
// second one that keeps the walk over samples apart from that over coordinates.
const (
	coordinateStep = 0x9e3779b97f4a7c15
	sampleStep     = 0xd1342543de82ef95
)

// mix is a bijection of 64 bits in which every output bit depends on every input
// bit: the finaliser of SplitMix64.
//
// Source: G. L. Steele, D. Lea, C. H. Flood, "Fast splittable pseudorandom number
// generators", OOPSLA 2014, with D. Stafford's constants (variant 13).
func mix(x uint64) uint64 {
	x ^= x >> 30
	x *= 0xbf58476d1ce4e5b9
	x ^= x >> 27
	x *= 0x94d049bb133111eb
	return x ^ x>>31
}

// Key names the random stream of one sample under a seed.
//
// The stream is SplitMix64 started at a hashed place, chosen over the Philox and
// ChaCha families because it costs two multiplications a number instead of ten
// rounds, and over a sequential generator because it can be entered anywhere. Two
// of n streams of k numbers overlap with a chance of about n² k / 2^64: 1e-6 for a
// million samples of twenty coordinates.
func Key(seed, sample uint64) uint64 {
	return mix(mix(seed+coordinateStep) + sample*sampleStep)
}

// Bits returns the 64 random bits at a place of a stream.
func Bits(key, place uint64) uint64 { return mix(key + (place+1)*coordinateStep) }

// Uniform returns the number at a place of a stream, in the open interval (0, 1):
// the centre of one of 2^52 equal cells.
func Uniform(key, place uint64) float64 { return unit(Bits(key, place)) }

// unit maps the upper 52 bits to the centre of their cell; 53 bits would round
// the last cell up to 1. The signed conversion is one instruction, the unsigned one
// branches.
func unit(x uint64) float64 { return (float64(int64(x>>12)) + 0.5) * 0x1p-52 }

// Purposes keep streams apart that are drawn under one seed.
const (
	purposeScramble = iota + 1
	purposePermutation
	purposeJitter
)

// subseed derives a seed for one purpose and replicate.
func subseed(seed uint64, purpose, replicate int) uint64 {
	return Key(Key(seed, uint64(purpose)), uint64(replicate))
}
