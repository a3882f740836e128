package sampling

import (
	"encoding/json"
	"math/bits"
	"os"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"
)

// plainPoint is point i of the unscrambled sequence.
func plainPoint(dimension int, i uint64) float64 {
	v, x := sobolDirections(dimension), uint64(0)
	for b, gray := 0, i^i>>1; gray != 0; b, gray = b+1, gray>>1 {
		if gray&1 == 1 {
			x ^= v[b]
		}
	}
	return float64(x>>11) * 0x1p-53
}

func TestSobolFirstPointsAsPublished(t *testing.T) {
	raw, err := os.ReadFile("../../tests/reference/loop-corners-rules.json")
	require.NoError(t, err)
	var doc struct {
		Cases []struct {
			ID       string
			Expected map[string]struct{ Value any }
		}
	}
	require.NoError(t, json.Unmarshal(raw, &doc))
	for _, c := range doc.Cases {
		if c.ID != "corner-10" {
			continue
		}
		for dimension, name := range []string{"dim1", "dim2"} {
			want := c.Expected[name].Value.([]any)
			require.Len(t, want, 8)
			for i, w := range want {
				assert.Equal(t, w, plainPoint(dimension, uint64(i)), "%s point %d", name, i)
			}
		}
		return
	}
	t.Fatal("case corner-10 is missing")
}

// multiply returns a b modulo the polynomial p of degree s over GF(2).
func multiply(a, b, p uint64, s int) uint64 {
	product := uint64(0)
	for ; b != 0; b >>= 1 {
		if b&1 == 1 {
			product ^= a
		}
		if a <<= 1; a>>s&1 == 1 {
			a ^= p
		}
	}
	return product
}

func power(e, p uint64, s int) uint64 {
	result, base := uint64(1), uint64(2)
	if s == 1 {
		base = 1 // x = 1 modulo x + 1
	}
	for ; e != 0; e >>= 1 {
		if e&1 == 1 {
			result = multiply(result, base, p, s)
		}
		base = multiply(base, base, p, s)
	}
	return result
}

func TestDirectionPolynomialsArePrimitiveAndDistinct(t *testing.T) {
	seen := map[uint32]bool{}
	for i, d := range directions {
		s := bits.Len32(d.polynomial) - 1
		require.Len(t, d.m, s, "dimension %d", i+1)
		assert.False(t, seen[d.polynomial], "polynomial %d twice", d.polynomial)
		seen[d.polynomial] = true
		order, p := uint64(1)<<s-1, uint64(d.polynomial)
		assert.EqualValues(t, 1, power(order, p, s), "x^(2^s-1) = 1 mod %d", p)
		for q, rest := uint64(2), order; rest > 1; q++ {
			if rest%q != 0 {
				continue
			}
			for rest%q == 0 {
				rest /= q
			}
			if order/q >= 1 && s > 1 {
				assert.NotEqualValues(t, 1, power(order/q, p, s), "order of x divides (2^s-1)/%d mod %d", q, p)
			}
		}
		for k, m := range d.m {
			assert.True(t, m&1 == 1 && m < 1<<(k+1), "dimension %d m_%d = %d", i+1, k+1, m)
		}
	}
}

// Every coordinate of every replicate puts exactly one point into each of 2^m
// slices, and the first two coordinates together are a (0, m, 2)-net: one point in
// each elementary box of area 2^-m.
func TestScrambledSobolKeepsTheNet(t *testing.T) {
	s, err := New(Design{Sobol, 42, MaxSobolCoordinates, Replicates * 256})
	require.NoError(t, err)
	c, u := s.Cursor(), make([]float64, MaxSobolCoordinates)
	const m, n = 8, 256
	for r := range Replicates {
		var slices [MaxSobolCoordinates][n]int
		var boxes [m + 1][n]int
		for i := range n {
			c.Point(r*n+i, u)
			for j, x := range u {
				slices[j][int(x*n)]++
			}
			for a := range m + 1 {
				boxes[a][int(u[0]*float64(int(1)<<a))<<(m-a)|int(u[1]*float64(int(1)<<(m-a)))]++
			}
		}
		for j := range slices {
			for k, count := range slices[j] {
				require.Equal(t, 1, count, "replicate %d coordinate %d slice %d", r, j, k)
			}
		}
		for a := range boxes {
			for k, count := range boxes[a] {
				require.Equal(t, 1, count, "replicate %d box shape %d number %d", r, a, k)
			}
		}
	}
}

func TestSobolRefusesMoreCoordinatesThanItHas(t *testing.T) {
	_, err := New(Design{Sobol, 1, MaxSobolCoordinates + 1, 100})
	assert.ErrorContains(t, err, "at most 256")
}
