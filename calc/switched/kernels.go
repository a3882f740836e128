package switched

// apply writes y = M x.
func apply(m *square, x, y *vec, n int) {
	if n == 4 {
		m, x := (*[16]float64)(m[:]), (*[4]float64)(x[:])
		y[0] = m[0]*x[0] + m[1]*x[1] + m[2]*x[2] + m[3]*x[3]
		y[1] = m[4]*x[0] + m[5]*x[1] + m[6]*x[2] + m[7]*x[3]
		y[2] = m[8]*x[0] + m[9]*x[1] + m[10]*x[2] + m[11]*x[3]
		y[3] = m[12]*x[0] + m[13]*x[1] + m[14]*x[2] + m[15]*x[3]
		return
	}
	if n == 3 {
		m, x := (*[9]float64)(m[:]), (*[3]float64)(x[:])
		y[0] = m[0]*x[0] + m[1]*x[1] + m[2]*x[2]
		y[1] = m[3]*x[0] + m[4]*x[1] + m[5]*x[2]
		y[2] = m[6]*x[0] + m[7]*x[1] + m[8]*x[2]
		return
	}
	for i := range n {
		acc := 0.0
		for j, a := range m[i*n : i*n+n] {
			acc += a * x[j]
		}
		y[i] = acc
	}
}

// addTwice adds 2 b to a.
func addTwice(a, b *square, n int) {
	x, y := a[:n*n], b[:n*n]
	for i := range x {
		x[i] += 2 * y[i]
	}
}

// multiply writes dst = a b; dst is neither. Two and three banks beside one
// phase have their own unrolled forms.
func multiply(dst, a, b *square, n int) {
	switch n {
	case 3:
		multiply3((*[9]float64)(dst[:]), (*[9]float64)(a[:]), (*[9]float64)(b[:]))
		return
	case 4:
		multiply4((*[16]float64)(dst[:]), (*[16]float64)(a[:]), (*[16]float64)(b[:]))
		return
	}
	for i := range n {
		out := dst[i*n : i*n+n]
		left := a[i*n : i*n+n]
		x := left[0]
		for j, v := range b[:n] {
			out[j] = x * v
		}
		for k := 1; k < n; k++ {
			x := left[k]
			row := b[k*n : k*n+n]
			for j, v := range row {
				out[j] += x * v
			}
		}
	}
}

func multiply3(c, a, b *[9]float64) {
	for i := 0; i < 9; i += 3 {
		x, y, z := a[i], a[i+1], a[i+2]
		c[i] = x*b[0] + y*b[3] + z*b[6]
		c[i+1] = x*b[1] + y*b[4] + z*b[7]
		c[i+2] = x*b[2] + y*b[5] + z*b[8]
	}
}

func multiply4(c, a, b *[16]float64) {
	for i := 0; i < 16; i += 4 {
		x, y, z, w := a[i], a[i+1], a[i+2], a[i+3]
		c[i] = x*b[0] + y*b[4] + z*b[8] + w*b[12]
		c[i+1] = x*b[1] + y*b[5] + z*b[9] + w*b[13]
		c[i+2] = x*b[2] + y*b[6] + z*b[10] + w*b[14]
		c[i+3] = x*b[3] + y*b[7] + z*b[11] + w*b[15]
	}
}

// congruent adds E M Eᵀ to the symmetric matrix M; t is work space.
func congruent(e, m, t *square, n int) {
	multiply(t, e, m, n)
	switch n {
	case 3:
		congruent3((*[9]float64)(m[:]), (*[9]float64)(t[:]), (*[9]float64)(e[:]))
		return
	case 4:
		congruent4((*[16]float64)(m[:]), (*[16]float64)(t[:]), (*[16]float64)(e[:]))
		return
	}
	for i := range n {
		left := t[i*n : i*n+n]
		for j := 0; j <= i; j++ {
			acc := 0.0
			for k, v := range e[j*n : j*n+n] {
				acc += left[k] * v
			}
			m[i*n+j] += acc
			m[j*n+i] = m[i*n+j]
		}
	}
}

// congruent3 adds t eᵀ to m.
func congruent3(m, t, e *[9]float64) {
	for i := 0; i < 9; i += 3 {
		x, y, z := t[i], t[i+1], t[i+2]
		m[i] += x*e[0] + y*e[1] + z*e[2]
		m[i+1] += x*e[3] + y*e[4] + z*e[5]
		m[i+2] += x*e[6] + y*e[7] + z*e[8]
	}
}

// congruent4 adds t eᵀ to m.
func congruent4(m, t, e *[16]float64) {
	for i := 0; i < 4; i++ {
		x, y, z, w := t[4*i], t[4*i+1], t[4*i+2], t[4*i+3]
		m[4*i] += x*e[0] + y*e[1] + z*e[2] + w*e[3]
		m[4*i+1] += x*e[4] + y*e[5] + z*e[6] + w*e[7]
		m[4*i+2] += x*e[8] + y*e[9] + z*e[10] + w*e[11]
		m[4*i+3] += x*e[12] + y*e[13] + z*e[14] + w*e[15]
	}
}

func dot(w, x *vec, n int) float64 {
	if n == 4 {
		return w[0]*x[0] + w[1]*x[1] + w[2]*x[2] + w[3]*x[3]
	}
	acc := 0.0
	for i := range n {
		acc += w[i] * x[i]
	}
	return acc
}
