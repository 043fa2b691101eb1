package crystal

// matrix is a 3 x 3 matrix of whole numbers, wide enough for products.
type matrix [3][3]int

func abs(a int) int {
	if a < 0 {
		return -a
	}
	return a
}

// mod is a modulo n with a result in [0, n).
func mod(a, n int) int {
	if a %= n; a < 0 {
		a += n
	}
	return a
}

func gcd(a, b int) int {
	a, b = abs(a), abs(b)
	for b != 0 {
		a, b = b, a%b
	}
	return a
}

func lcm(a, b int) int { return a / gcd(a, b) * b }

func reduced(num, den int) (int, int) {
	g := gcd(num, den)
	return num / g, den / g
}

func widen(r [3][3]int8) matrix {
	var m matrix
	for i := range 3 {
		for j := range 3 {
			m[i][j] = int(r[i][j])
		}
	}
	return m
}

func det(m matrix) int {
	return m[0][0]*(m[1][1]*m[2][2]-m[1][2]*m[2][1]) -
		m[0][1]*(m[1][0]*m[2][2]-m[1][2]*m[2][0]) +
		m[0][2]*(m[1][0]*m[2][1]-m[1][1]*m[2][0])
}

// adjugate is the matrix with m adj(m) = det(m).
func adjugate(m matrix) matrix {
	var a matrix
	for i := range 3 {
		for j := range 3 {
			p, q := (j+1)%3, (j+2)%3
			r, s := (i+1)%3, (i+2)%3
			a[i][j] = m[p][r]*m[q][s] - m[p][s]*m[q][r]
		}
	}
	return a
}

func (m matrix) times(n matrix) matrix {
	var p matrix
	for i := range 3 {
		for j := range 3 {
			p[i][j] = m[i][0]*n[0][j] + m[i][1]*n[1][j] + m[i][2]*n[2][j]
		}
	}
	return p
}

// column returns m v for a column v.
func (m matrix) column(v [3]int) [3]int {
	var w [3]int
	for i := range 3 {
		w[i] = m[i][0]*v[0] + m[i][1]*v[1] + m[i][2]*v[2]
	}
	return w
}

// row returns h m for a row h.
func (m matrix) row(h HKL) HKL {
	return HKL{
		h.H*m[0][0] + h.K*m[1][0] + h.L*m[2][0],
		h.H*m[0][1] + h.K*m[1][1] + h.L*m[2][1],
		h.H*m[0][2] + h.K*m[1][2] + h.L*m[2][2],
	}
}

// primitive divides v by the greatest common divisor of its components and
// makes the first one that is not zero positive.
func primitive(v [3]int) [3]int {
	g := gcd(gcd(v[0], v[1]), v[2])
	if g == 0 {
		return v
	}
	for i := range 3 {
		if v[i] != 0 {
			if v[i] < 0 {
				g = -g
			}
			break
		}
	}
	return [3]int{v[0] / g, v[1] / g, v[2] / g}
}
