package thermal

import (
	"math"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"
	"pgregory.net/rapid"

	"railproof/calc/internal/calctest"
)

// losses is a power curve of every node over its own temperature.
type losses func(node int, degC float64) (power, slope float64)

// settle iterates Step as a caller does, and tells where it ends.
func settle(n *Network, ambient float64, p losses) (degC Vector, state State, steps int) {
	var power, slope Vector
	for _, i := range n.node[:n.n] {
		degC[i] = ambient
	}
	for steps = 1; steps <= 200; steps++ {
		for _, i := range n.node[:n.n] {
			power[i], slope[i] = p(int(i), degC[i])
		}
		var change float64
		change, state = n.Step(ambient, &power, &slope, &degC)
		if state == Runaway || state == Stepped && change < 1e-9 {
			return degC, state, steps
		}
	}
	return degC, Climbed, steps
}

func linear(p25, slope Vector) losses {
	return func(i int, degC float64) (float64, float64) { return p25[i] + slope[i]*(degC-25), slope[i] }
}

// pair is two parts that heat each other.
func pair() *Network {
	n := &Network{}
	n.Add(2, 38)
	n.Add(5, 22)
	n.Couple(2, 5, 9, 9)
	return n
}

func TestTemperaturesSuperpose(t *testing.T) {
	n := pair()
	p := Vector{2: 1.5, 5: 0.5, 7: 99}
	var degC Vector
	calctest.Poison(&degC)
	n.Temperatures(40, &p, &degC)
	calctest.Close(t, "first", degC[2], 40+38*1.5+9*0.5, 1e-15)
	calctest.Close(t, "second", degC[5], 40+22*0.5+9*1.5, 1e-15)
	if !math.IsNaN(degC[7]) {
		t.Errorf("a node that is not in the network got %g", degC[7])
	}
	own, others := n.Rise(5, &p)
	calctest.Close(t, "own rise", own, 11, 1e-15)
	calctest.Close(t, "rise by others", others, 13.5, 1e-15)
}

func TestOneStepSolvesLinearLosses(t *testing.T) {
	n := &Network{}
	n.Add(0, 40)
	degC, state, steps := settle(n, 50, linear(Vector{1}, Vector{0.005}))
	want, ok := LinearEquilibrium(50, 40, 0, 1, 0.005)
	if !ok || state != Stepped || steps > 2 {
		t.Fatalf("state %d after %d steps", state, steps)
	}
	calctest.Close(t, "closed form", degC[0], want, 1e-14)
	withConstant, _ := LinearEquilibrium(50, 40, 0.7, 1, 0.005)
	degC, _, _ = settle(n, 50, linear(Vector{1.7}, Vector{0.005}))
	calctest.Close(t, "with a constant loss", degC[0], withConstant, 1e-14)
}

func TestNoEquilibriumIsRunaway(t *testing.T) {
	for _, gain := range []float64{1, 1.0001, 1.5, 40} {
		if degC, ok := LinearEquilibrium(25, 40, 0.1, 1, gain/40); ok {
			t.Errorf("gain %g: equilibrium at %g", gain, degC)
		}
	}
	n := pair()
	if _, state, _ := settle(n, 25, linear(Vector{2: 1, 5: 1}, Vector{2: 0.03})); state != Runaway {
		t.Errorf("one part alone beyond gain one: state %d", state)
	}
	// Each part alone is stable (0.76, 0.77); together they are not.
	if _, state, _ := settle(n, 25, linear(Vector{2: 1, 5: 1}, Vector{2: 0.020, 5: 0.035})); state != Runaway {
		t.Errorf("coupled beyond gain one: state %d", state)
	}
}

// leaky is a loss that doubles every 10 K beside a constant one.
func leaky(at25, constant float64) losses {
	return func(_ int, degC float64) (float64, float64) {
		p := at25 * math.Exp2((degC-25)/10)
		return constant + p, p * math.Ln2 / 10
	}
}

func TestExponentialLossSettlesAtTheLowerEquilibrium(t *testing.T) {
	n := &Network{}
	n.Add(0, 45)
	p := leaky(5e-3, 0.8)
	degC, state, steps := settle(n, 25, p)
	if state != Stepped || steps > 12 {
		t.Fatalf("state %d after %d steps", state, steps)
	}
	low, high := 25.0, 80.0
	for range 200 {
		mid := (low + high) / 2
		if w, _ := p(0, mid); 25+45*w > mid {
			low = mid
		} else {
			high = mid
		}
	}
	calctest.Close(t, "bisection", degC[0], low, 1e-10)
	_, slope := p(0, degC[0])
	if gain, _ := n.Feedback(&Vector{slope}); !(gain < 1) {
		t.Errorf("gain %g at a stable equilibrium", gain)
	}
	// A little more ambient and the curve no longer meets the line.
	if _, state, _ := settle(n, 45, p); state != Runaway {
		t.Errorf("state %d, expected runaway", state)
	}
}

// TestFlatteningLossIsFound: a table whose slope comes near gain one, or exceeds
// it, and then flattens has an equilibrium further up.
func TestFlatteningLossIsFound(t *testing.T) {
	n := &Network{}
	n.Add(0, 50)
	for name, steep := range map[string]float64{"gain 0.99": 0.0198, "gain 0.9999": 0.019998, "gain 1": 0.02, "gain 1.5": 0.03} {
		t.Run(name, func(t *testing.T) {
			p := func(_ int, degC float64) (float64, float64) {
				if degC < 120 {
					return 0.8 + steep*(degC-25), steep
				}
				return 0.8 + steep*95 + 0.001*(degC-120), 0.001
			}
			degC, state, _ := settle(n, 25, p)
			if state != Stepped {
				t.Fatalf("state %d", state)
			}
			w, _ := p(0, degC[0])
			calctest.Close(t, "equilibrium", 25+50*w, degC[0], 1e-9)
			if degC[0] < 120 {
				t.Errorf("%g degC lies on the steep piece", degC[0])
			}
		})
	}
}

func TestFallingLossesSettle(t *testing.T) {
	n := pair()
	degC, state, _ := settle(n, 25, linear(Vector{2: 2, 5: 1}, Vector{2: -0.05, 5: -0.01}))
	if state != Stepped {
		t.Fatalf("state %d", state)
	}
	if !(degC[2] > 25 && degC[2] < 25+38*2+9) {
		t.Errorf("%g degC", degC[2])
	}
	gain, node := n.Feedback(&Vector{2: -0.05, 5: -0.01})
	if gain != 0 || node != -1 {
		t.Errorf("losses that fall with temperature do not run away: gain %g at node %d", gain, node)
	}
}

// draw makes a random network whose resistance matrix is positive definite, and
// random slopes.
func draw(t *rapid.T, least float64) (*Network, []int, Vector) {
	n := &Network{}
	count := rapid.IntRange(1, 6).Draw(t, "nodes")
	var nodes []int
	var slope Vector
	for k := range count {
		i := 3*k%MaxNodes + k/6
		nodes = append(nodes, i)
		n.Add(i, rapid.Float64Range(5, 60).Draw(t, "self"))
		slope[i] = rapid.Float64Range(least, 0.03).Draw(t, "slope")
	}
	for a := range count {
		for b := a + 1; b < count; b++ {
			if rapid.Bool().Draw(t, "coupled") {
				r := rapid.Float64Range(0, 1).Draw(t, "share") * math.Sqrt(n.self[nodes[a]]*n.self[nodes[b]]) / float64(count)
				n.Couple(nodes[a], nodes[b], r, r)
			}
		}
	}
	return n, nodes, slope
}

// dense is the network as a matrix.
func dense(n *Network, nodes []int) *mat.Dense {
	r := mat.NewDense(len(nodes), len(nodes), nil)
	place := map[uint8]int{}
	for k, i := range nodes {
		place[uint8(i)] = k
		r.Set(k, k, n.self[i])
	}
	for a, i := range n.node[:n.joined] {
		for b, j := range n.node[:n.joined] {
			if a != b {
				r.Set(place[i], place[j], n.mutual[a][b])
			}
		}
	}
	return r
}

// TestFeedbackIsLargestEigenvalue compares with a dense eigenvalue solver.
func TestFeedbackIsLargestEigenvalue(t *testing.T) {
	for name, least := range map[string]float64{"rising losses": 0, "mixed": -0.02} {
		t.Run(name, func(t *testing.T) {
			rapid.Check(t, func(t *rapid.T) {
				n, nodes, slope := draw(t, least)
				rj := dense(n, nodes)
				for k, i := range nodes {
					for row := range nodes {
						rj.Set(row, k, rj.At(row, k)*max(slope[i], 0))
					}
				}
				var eig mat.Eigen
				if !eig.Factorize(rj, mat.EigenNone) {
					t.Fatal("no eigenvalues")
				}
				want := 0.0
				for _, v := range eig.Values(nil) {
					want = max(want, real(v))
				}
				got, _ := n.Feedback(&slope)
				if math.Abs(got-want) > 2*gainTolerance*want+1e-12 {
					t.Fatalf("got %.12g, want %.12g", got, want)
				}
				if n.Stable(&slope) != (got < 1) {
					t.Fatalf("stable %v at %.12g", n.Stable(&slope), got)
				}
			})
		})
	}
}

// TestStepSolvesCoupledLosses compares with a dense linear solution, and the
// verdict with the largest eigenvalue.
func TestStepSolvesCoupledLosses(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n, nodes, slope := draw(t, -0.01)
		var p25 Vector
		for _, i := range nodes {
			p25[i] = rapid.Float64Range(0, 2).Draw(t, "power")
		}
		ambient := rapid.Float64Range(25, 85).Draw(t, "ambient")
		gain, _ := n.Feedback(&slope)
		if gain > 0.99 {
			return
		}
		degC, state, _ := settle(n, ambient, linear(p25, slope))
		// (1 − R J) T = Tamb + R (P25 − 25 J)
		r := dense(n, nodes)
		size := len(nodes)
		a, b := mat.NewDense(size, size, nil), mat.NewVecDense(size, nil)
		for row := range nodes {
			b.SetVec(row, ambient)
			for k, i := range nodes {
				a.Set(row, k, -r.At(row, k)*slope[i])
				b.SetVec(row, b.AtVec(row)+r.At(row, k)*(p25[i]-25*slope[i]))
			}
			a.Set(row, row, a.At(row, row)+1)
		}
		var want mat.VecDense
		if err := want.SolveVec(a, b); err != nil {
			t.Fatal(err)
		}
		hottest := 0.0
		for k := range nodes {
			hottest = max(hottest, want.AtVec(k))
		}
		if hottest > CeilingDegC-Climb {
			return // a transient of the search may touch the ceiling
		}
		if state != Stepped {
			t.Fatalf("gain %g, hottest %g: state %d", gain, hottest, state)
		}
		for k, i := range nodes {
			if math.Abs(degC[i]-want.AtVec(k)) > 1e-6 {
				t.Fatalf("node %d: %.9g, want %.9g", i, degC[i], want.AtVec(k))
			}
		}
	})
}

func TestFeedbackNamesTheNode(t *testing.T) {
	n := pair()
	n.Add(9, 10)
	slope := Vector{2: 0.001, 5: 0.02, 9: 0.001}
	if _, node := n.Feedback(&slope); node != 5 {
		t.Errorf("node %d carries the feedback, want 5", node)
	}
}

func TestResidualKeepsNaN(t *testing.T) {
	n := pair()
	if r := n.Residual(25, &Vector{2: math.NaN()}, &Vector{2: 30, 5: 30}); !math.IsNaN(r) {
		t.Errorf("residual %g", r)
	}
	calctest.Close(t, "residual", n.Residual(25, &Vector{2: 1}, &Vector{2: 60, 5: 30}), 4, 1e-12)
}

func TestNetworkIsReusable(t *testing.T) {
	n := pair()
	n.Reset()
	n.Add(5, 10)
	var degC Vector
	n.Temperatures(20, &Vector{2: 50, 5: 1}, &degC)
	if degC[2] != 0 || degC[5] != 30 {
		t.Errorf("after Reset: %v", degC)
	}
}

func TestStepsDoNotAllocate(t *testing.T) {
	n := pair()
	p, s, degC := Vector{2: 1, 5: 1}, Vector{2: 0.004, 5: 0.002}, Vector{2: 25, 5: 25}
	if a := testing.AllocsPerRun(100, func() { n.Step(25, &p, &s, &degC); n.Feedback(&s) }); a != 0 {
		t.Errorf("%v allocations", a)
	}
}

func BenchmarkThermal(b *testing.B) {
	n := &Network{}
	p, s, degC := Vector{}, Vector{}, Vector{}
	for i := range 6 {
		n.Add(i, 30)
		p[i], degC[i] = 0.5, 30
	}
	s[0], s[1], s[3] = 0.001, 0.0015, 0.0008
	n.Couple(0, 1, 12, 12)
	n.Couple(0, 3, 6, 6)
	n.Couple(1, 3, 6, 6)
	b.Run("step", func(b *testing.B) {
		for b.Loop() {
			n.Step(25, &p, &s, &degC)
		}
	})
	b.Run("refine", func(b *testing.B) {
		for b.Loop() {
			n.Refine(25, &p, &degC)
		}
	})
	b.Run("feedback", func(b *testing.B) {
		for b.Loop() {
			n.Feedback(&s)
		}
	})
}

// TestElimination: its answer solves the coupled equation, and a gain of one or
// more among the coupled nodes shows as a pivot that is not positive; with rising
// losses only so.
func TestElimination(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n, nodes, slope := draw(t, rapid.SampledFrom([]float64{-0.02, 0}).Draw(t, "least slope"))
		if n.joined == 0 {
			return
		}
		degC, power := Vector{}, Vector{}
		for _, i := range nodes {
			power[i] = rapid.Float64Range(0, 2).Draw(t, "power")
		}
		n.shortfall(25, &power, &degC)
		verdict := n.factor(&slope)
		size := n.joined
		rj, r := mat.NewDense(size, size, nil), dense(n, nodes)
		for k, i := range n.node[:size] {
			for row, j := range n.node[:size] {
				rj.Set(row, k, r.At(slices.Index(nodes, int(j)), slices.Index(nodes, int(i)))*slope[i])
			}
		}
		var eig mat.Eigen
		eig.Factorize(rj, mat.EigenNone)
		largest := math.Inf(-1)
		for _, v := range eig.Values(nil) {
			largest = max(largest, real(v))
		}
		for _, i := range n.node[size:n.n] {
			largest = max(largest, n.self[i]*slope[i])
		}
		falls := slices.ContainsFunc(nodes, func(i int) bool { return slope[i] < 0 })
		if verdict && largest > 1+1e-6 || !verdict && largest < 1-1e-6 && !falls {
			t.Fatalf("largest eigenvalue %.9g, verdict stable: %v", largest, verdict)
		}
		if !verdict {
			return
		}
		lack := n.lack
		n.move(&degC)
		delta := &n.lack
		for k, i := range n.node[:n.joined] {
			sum := lack[k] + n.self[i]*slope[i]*delta[k]
			for l, j := range n.node[:n.joined] {
				sum += n.mutual[k][l] * slope[j] * delta[l]
			}
			if math.Abs(sum-delta[k]) > 1e-8*(1+math.Abs(delta[k])) {
				t.Fatalf("node %d: %.12g does not solve its equation, %.12g", i, delta[k], sum)
			}
		}
	})
}
