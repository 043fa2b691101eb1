package crystal

import (
	"fmt"
	"strconv"
	"strings"
)

// Twentyfourths is the denominator of every translation in this package. All
// translations of the tabulated settings and of their usual origin shifts are
// whole multiples of 1/24.
const Twentyfourths = 24

// maxEntry bounds the entries of a rotation matrix that is read. Conventional
// settings need 1; skewed cells 2 or 3.
const maxEntry = 3

// Op is a symmetry operator: coordinates x go to R x + T/24. R has determinant
// 1 or -1; T, in 24ths, lies in [0, 24) for every operator this package makes.
type Op struct {
	R [3][3]int8
	T [3]int8
}

// Identity is the operator x,y,z.
func Identity() Op { return Op{R: [3][3]int8{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}} }

// Inversion is the operator -x,-y,-z.
func Inversion() Op { return Op{R: [3][3]int8{{-1, 0, 0}, {0, -1, 0}, {0, 0, -1}}} }

// String writes the operator as International Tables does, such as
// "-x+1/2,y,-z"; ParseOp reads it back to the same value.
func (o Op) String() string {
	var b strings.Builder
	for i := range 3 {
		if i > 0 {
			b.WriteByte(',')
		}
		start := b.Len()
		for j := range 3 {
			writeTerm(&b, int(o.R[i][j]), "xyz"[j], b.Len() > start)
		}
		if t := int(o.T[i]); t != 0 {
			num, den := reduced(t, Twentyfourths)
			if num > 0 && b.Len() > start {
				b.WriteByte('+')
			}
			b.WriteString(strconv.Itoa(num))
			if den != 1 {
				b.WriteString("/" + strconv.Itoa(den))
			}
		} else if b.Len() == start {
			b.WriteByte('0')
		}
	}
	return b.String()
}

func writeTerm(b *strings.Builder, coefficient int, axis byte, follows bool) {
	if coefficient == 0 {
		return
	}
	switch {
	case coefficient < 0:
		b.WriteByte('-')
	case follows:
		b.WriteByte('+')
	}
	if a := abs(coefficient); a != 1 {
		b.WriteString(strconv.Itoa(a) + "*")
	}
	b.WriteByte(axis)
}

// Compose returns the operator that applies q first and then o, with its
// translation reduced to [0, 1).
func (o Op) Compose(q Op) Op {
	var p Op
	for i := range 3 {
		t := int(o.T[i])
		for j := range 3 {
			p.R[i][j] = o.R[i][0]*q.R[0][j] + o.R[i][1]*q.R[1][j] + o.R[i][2]*q.R[2][j]
			t += int(o.R[i][j]) * int(q.T[j])
		}
		p.T[i] = int8(mod(t, Twentyfourths))
	}
	return p
}

// Inverse returns the operator that undoes o, with its translation reduced to
// [0, 1). It panics when R is not of determinant 1 or -1, which no operator
// made by this package is.
func (o Op) Inverse() Op {
	d := o.Det()
	if d != 1 && d != -1 {
		panic("crystal: Op.Inverse: determinant is not 1 or -1")
	}
	var p Op
	for i := range 3 {
		for j := range 3 {
			a, b := (j+1)%3, (j+2)%3
			c, e := (i+1)%3, (i+2)%3
			p.R[i][j] = int8(d * (int(o.R[a][c])*int(o.R[b][e]) - int(o.R[a][e])*int(o.R[b][c])))
		}
	}
	for i := range 3 {
		t := 0
		for j := range 3 {
			t -= int(p.R[i][j]) * int(o.T[j])
		}
		p.T[i] = int8(mod(t, Twentyfourths))
	}
	return p
}

// Det is the determinant of R: 1 for rotations and screws, -1 for inversion,
// mirrors, glides and rotoinversions.
func (o Op) Det() int { return det(widen(o.R)) }

// ApplyHKL returns the row h R: the reflection that o makes equivalent to h.
func (o Op) ApplyHKL(h HKL) HKL {
	r := &o.R
	return HKL{
		h.H*int(r[0][0]) + h.K*int(r[1][0]) + h.L*int(r[2][0]),
		h.H*int(r[0][1]) + h.K*int(r[1][1]) + h.L*int(r[2][1]),
		h.H*int(r[0][2]) + h.K*int(r[1][2]) + h.L*int(r[2][2]),
	}
}

// Apply returns R x + T/24 for fractional coordinates x, not reduced to a cell.
func (o Op) Apply(x [3]float64) [3]float64 {
	var y [3]float64
	for i := range 3 {
		y[i] = float64(o.T[i]) / Twentyfourths
		for j := range 3 {
			y[i] += float64(o.R[i][j]) * x[j]
		}
	}
	return y
}

// shifted returns the operator as seen from an origin moved so that every
// coordinate grows by v, in 24ths: translation T + (1 - R) v.
func (o Op) shifted(v [3]int) Op {
	p := o
	for i := range 3 {
		t := int(o.T[i]) + v[i]
		for j := range 3 {
			t -= int(o.R[i][j]) * v[j]
		}
		p.T[i] = int8(mod(t, Twentyfourths))
	}
	return p
}

func (o Op) check() error {
	for i := range 3 {
		for j := range 3 {
			if r := o.R[i][j]; r > maxEntry || r < -maxEntry {
				return fmt.Errorf("coefficient %d of %c is outside -%d to %d", r, "xyz"[j], maxEntry, maxEntry)
			}
		}
	}
	if d := o.Det(); d != 1 && d != -1 {
		return fmt.Errorf("determinant of the rotation part is %d, not 1 or -1", d)
	}
	return nil
}
