package spread

import "math"

// Coordinate is one independent direction in which a design may lie: a spread of
// its own, a group, or the matching residual of a group's member.
type Coordinate struct {
	Pointers     []string // the spreads that it moves
	Group        string
	Residual     bool // the matching residual of the one spread in Pointers
	Distribution Distribution
}

// Set is a document's spreads compiled into independent coordinates z in [-1, 1].
// It never changes, so workers share it.
type Set struct {
	variables   []Variable
	coordinates []Coordinate
	laws        []law     // one per coordinate
	bindings    []binding // one per variable
	residuals   []residual

	uniform, triangular, normal []law // the same laws, by distribution
}

// binding computes one variable from its coordinate.
type binding struct {
	coordinate int
	typ        float64
	side       [2]float64 // change of the value per unit of z: above, below
	max, min   float64    // exact values at z = 1 and -1
}

// residual multiplies a variable by 1 + tolerance z.
type residual struct {
	variable, coordinate int
	tolerance            float64
}

// New compiles spreads. Coordinates stand in the order in which the document first
// mentions them, matching residuals after all others. The error is an
// *InvalidError with every contradiction.
func New(variables []Variable) (*Set, error) {
	if faults := check(variables); len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	s := &Set{variables: append([]Variable(nil), variables...), bindings: make([]binding, len(variables))}
	groups := map[string]int{}
	for i := range s.variables {
		v := &s.variables[i]
		at, known := groups[v.Group]
		if v.Group == "" || !known {
			at = len(s.coordinates)
			below := 0.5
			if v.Group == "" {
				below = (v.Typ - v.Min) / (v.Max - v.Min)
			} else {
				groups[v.Group] = at
			}
			s.coordinates = append(s.coordinates, Coordinate{Group: v.Group, Distribution: v.Distribution})
			s.laws = append(s.laws, newLaw(at, v.Distribution, below))
		}
		s.coordinates[at].Pointers = append(s.coordinates[at].Pointers, v.Pointer)
		s.bindings[i] = binding{at, v.Typ, [2]float64{v.Max - v.Typ, v.Typ - v.Min}, v.Max, v.Min}
	}
	for i := range s.variables {
		v := &s.variables[i]
		if v.MatchTol == 0 {
			continue
		}
		s.residuals = append(s.residuals, residual{i, len(s.coordinates), v.MatchTol})
		s.coordinates = append(s.coordinates, Coordinate{[]string{v.Pointer}, v.Group, true, v.Distribution})
		s.laws = append(s.laws, newLaw(len(s.laws), v.Distribution, 0.5))
	}
	for _, l := range s.laws {
		switch l.kind {
		case Uniform:
			s.uniform = append(s.uniform, l)
		case Triangular:
			s.triangular = append(s.triangular, l)
		case Normal:
			s.normal = append(s.normal, l)
		}
	}
	return s, nil
}

// Len returns the number of independent coordinates.
func (s *Set) Len() int { return len(s.coordinates) }

// Variables returns the spreads in the order in which they were given.
func (s *Set) Variables() []Variable { return s.variables }

// Coordinates describes the coordinates in order.
func (s *Set) Coordinates() []Coordinate { return s.coordinates }

// Moments returns the moments of coordinate i.
func (s *Set) Moments(i int) Moments { return s.laws[i].moments() }

// Place turns a point u of the open unit cube into coordinates z that follow the
// distributions; both have length Len.
func (s *Set) Place(u, z []float64) {
	s.place(u, z)
}

// Apply sets values, one per variable, to those at coordinates z in [-1, 1]; at
// either end they are exactly max and min.
func (s *Set) Apply(z, values []float64) {
	values = values[:len(s.bindings)]
	for i := range s.bindings {
		b := &s.bindings[i]
		x := z[b.coordinate]
		y := b.typ + float64(x*b.side[math.Float64bits(x)>>63])
		switch x {
		case 1:
			y = b.max
		case -1:
			y = b.min
		}
		values[i] = y
	}
	for _, r := range s.residuals {
		values[r.variable] *= 1 + float64(r.tolerance*z[r.coordinate])
	}
}
