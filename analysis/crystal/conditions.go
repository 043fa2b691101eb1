package crystal

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// zone writes the reflections of a zone with free indices: row i is
// coefficient[i] times the index variable[i].
type zone struct {
	coefficient [3]int
	variable    [3]byte
	extra       string // a relation that a plain form cannot express
}

func (z zone) String() string {
	var b strings.Builder
	for i := range 3 {
		switch c := z.coefficient[i]; c {
		case 0:
			b.WriteByte('0')
		case 1:
			b.WriteByte(z.variable[i])
		case -1:
			b.WriteString("-" + string(z.variable[i]))
		default:
			b.WriteString(strconv.Itoa(c) + string(z.variable[i]))
		}
	}
	return b.String() + z.extra
}

// axisZone is the row of reflections that an axis keeps: h00, hh0, 00l.
func axisZone(row HKL) zone {
	z := zone{coefficient: [3]int{row.H, row.K, row.L}}
	for i := range 3 {
		if z.coefficient[i] != 0 {
			for j := range 3 {
				z.variable[j] = "hkl"[i]
			}
			break
		}
	}
	return z
}

// planeZone is the net of reflections perpendicular to a lattice direction:
// 0kl, hhl, h-hl.
func planeZone(normal [3]int) zone {
	z := zone{coefficient: [3]int{1, 1, 1}, variable: [3]byte{'h', 'k', 'l'}}
	var at []int
	for i := range 3 {
		if normal[i] != 0 {
			at = append(at, i)
		}
	}
	switch len(at) {
	case 1:
		z.coefficient[at[0]] = 0
		return z
	case 2:
		i, j := at[0], at[1]
		if normal[i]%normal[j] != 0 {
			i, j = j, i
		}
		if normal[i]%normal[j] == 0 {
			z.coefficient[j], z.variable[j] = -normal[i]/normal[j], "hkl"[i]
			return z
		}
	}
	z.extra = " with " + linear([3]int(normal)) + " = 0"
	return z
}

// linear writes a h + b k + c l without what is zero: "h+k", "-h+2l".
func linear(c [3]int) string {
	var b strings.Builder
	for i := range 3 {
		writeIndex(&b, c[i], "hkl"[i])
	}
	return b.String()
}

func writeIndex(b *strings.Builder, coefficient int, index byte) {
	if coefficient == 0 {
		return
	}
	if coefficient > 0 && b.Len() > 0 {
		b.WriteByte('+')
	}
	switch coefficient {
	case 1:
	case -1:
		b.WriteByte('-')
	default:
		b.WriteString(strconv.Itoa(coefficient))
	}
	b.WriteByte(index)
}

// condition writes "the sum of c times the indices is a multiple of unit" as
// "h+k = 2n", with the multiplier that gives the plainest coefficients. It is
// empty when it always holds.
func condition(c [3]int, unit int) string {
	g := gcd(gcd(c[0], c[1]), gcd(c[2], unit))
	n := unit / g
	if n == 1 {
		return ""
	}
	var best [3]int
	cost := 0
	for factor := 1; factor < n; factor++ {
		if gcd(factor, n) != 1 {
			continue
		}
		var v [3]int
		sum := 1
		for i := range 3 {
			v[i] = mod(c[i]/g*factor, n)
			if v[i] > n/2 {
				v[i] -= n
			}
			sum += 10 * abs(v[i])
			if v[i] < 0 {
				sum++
			}
		}
		if cost == 0 || sum < cost {
			best, cost = v, sum
		}
	}
	return fmt.Sprintf("%s = %dn", linear(best), n)
}

// zoneCondition is the reflection condition of an axis or plane.
func zoneCondition(p part) string {
	z := planeZone(p.direction)
	if p.kind == ScrewAxis {
		z = axisZone(p.row)
	}
	var texts []string
	for _, w := range p.glides {
		var c [3]int
		for i := range 3 {
			if z.coefficient[i] != 0 {
				c[strings.IndexByte("hkl", z.variable[i])] += z.coefficient[i] * w[i]
			}
		}
		texts = append(texts, condition(c, gliding))
	}
	return z.String() + ": " + strings.Join(texts, ", ")
}

// centringElement is the centring with its conditions; a vector that follows from
// those before it adds nothing, but the three of F are all written.
func centringElement(g *Group) Element {
	name := centringName(g.lattice)
	e := Element{Kind: CentringElement, Symbol: name, Name: name + " centring"}
	var texts []string
	reached := map[[3]int]bool{{}: true}
	for _, v := range g.lattice[1:] {
		if reached[v] && name != "F" {
			continue
		}
		texts = append(texts, condition(v, Twentyfourths))
		for grew := true; grew; {
			grew = false
			for u := range reached {
				sum := [3]int{mod(u[0]+v[0], Twentyfourths), mod(u[1]+v[1], Twentyfourths), mod(u[2]+v[2], Twentyfourths)}
				if !reached[sum] {
					reached[sum], grew = true, true
				}
			}
		}
	}
	if name == "F" {
		slices.Reverse(texts)
	}
	e.Conditions = []string{"hkl: " + strings.Join(texts, ", ")}
	return e
}
