package intensity

import (
	"math"

	"thinward/analysis/crystal"
)

// FriedelMates says how unequal the mates h and -h of one position are.
//
// Share is the root mean square of their true difference over that of their mean,
//
//	S = sum (d^2 - v) / sum (j^2 - v/4),  d = I(h) - I(-h),  j = (I(h) + I(-h))/2,
//	v = s+^2/n+ + s-^2/n-,
//
// I and s^2 mean and variance of the observations of either mate over the local mean: noise
// is taken off by the scatter of each mate itself, so that neither the reported sigmas nor a
// noise model (which takes unequal mates for noise) matters. It needs two observations of both.
// Share is sqrt(S), with the sign of S; Lo and Hi are those of S at 95 % by the scatter of single
// reflections, Z is S over its error. Where one scattering makes an intensity, mates are equal
// (Friedel 1913, C. R. Acad. Sci. 157:1533); scattering more than once makes acentric ones unequal, and
// centric ones, whose mates are equivalents, stay equal: they are a null.
type FriedelMates struct {
	N                int
	Share, Lo, Hi, Z float64
	Why              string
}

// fewestMates is the number of pairs below which nothing is said.
const fewestMates = 20

// MeasureFriedel measures the mates of a position, acentric and centric ones apart; the shells
// must be of cat.Shells and m the merged position, whose means are the local ones. NaN with Why where
// there are too few. The raw indices of p are those of cat.
func MeasureFriedel(p *Scaled, m *Merged, cat *Catalogue, sh *Shells) (acentric, centric *FriedelMates) {
	mean, _ := cat.Means(m, sh)
	sides := mateSides(cat)
	type side struct{ n, sum, square float64 }
	of := make([][2]side, len(sides.hkl))
	local := make([]float64, len(sides.hkl))
	for o, raw := range p.Raw {
		u := p.Unique[o]
		if s := sh.Of[u]; s >= 0 && mean[s] > 0 && !cat.Absent[u] {
			k := sides.of[raw]
			local[k] = mean[s]
			v := p.I[o] / (mean[s] * float64(cat.Epsilon[u]))
			x := &of[k][sides.minus[raw]]
			x.n, x.sum, x.square = x.n+1, x.sum+v, x.square+v*v
		}
	}
	var d2, j2 [2][]float64
	for k := range of {
		a, b := &of[k][0], &of[k][1]
		if a.n < 2 || b.n < 2 {
			continue
		}
		v := 0.0
		for _, x := range []*side{a, b} {
			v += math.Max(0, x.square-x.sum*x.sum/x.n) / (x.n - 1) / x.n
		}
		d, j := a.sum/a.n-b.sum/b.n, (a.sum/a.n+b.sum/b.n)/2
		kind := 0
		if sides.centric[k] {
			kind = 1
		}
		d2[kind], j2[kind] = append(d2[kind], d*d-v), append(j2[kind], j*j-v/4)
	}
	return inequality(d2[0], j2[0]), inequality(d2[1], j2[1])
}

func inequality(d2, j2 []float64) *FriedelMates {
	out := &FriedelMates{N: len(d2), Share: math.NaN(), Lo: math.NaN(), Hi: math.NaN(), Z: math.NaN()}
	var a, b float64
	for i := range d2 {
		a, b = a+d2[i], b+j2[i]
	}
	if out.N < fewestMates || !(b > 0) {
		out.Why = "too few mates were both measured twice"
		return out
	}
	s, v := a/b, 0.0
	for i := range d2 {
		r := d2[i] - s*j2[i]
		v += r * r
	}
	se := math.Sqrt(v*float64(out.N)/float64(out.N-1)) / b
	root := func(x float64) float64 { return math.Copysign(math.Sqrt(math.Abs(x)), x) }
	out.Share, out.Lo, out.Hi, out.Z = root(s), root(s-1.959964*se), root(s+1.959964*se), s/se
	return out
}

// mates gives each raw index its pair of mates and the side it is of.
type mates struct {
	hkl     []crystal.HKL
	centric []bool
	of      []int32
	minus   []int8
}

// mateSides pairs raw indices under the Laue class. The side of a centric reflection, whose mates are
// equivalent, is that of the sign of its first index that is not 0.
func mateSides(cat *Catalogue) *mates {
	n := cat.RawLen()
	out := &mates{of: make([]int32, n), minus: make([]int8, n)}
	seen := map[crystal.HKL]int32{}
	for raw := range n {
		h := cat.RawHKL(int32(raw))
		rep := cat.Group.Canonical(h)
		k, ok := seen[rep]
		if !ok {
			k = int32(len(out.hkl))
			seen[rep] = k
			out.hkl, out.centric = append(out.hkl, rep), append(out.centric, cat.Group.Centric(rep))
		}
		out.of[raw] = k
		plus := h.H > 0 || h.H == 0 && (h.K > 0 || h.K == 0 && h.L > 0)
		if !out.centric[k] {
			_, plus = cat.Group.CanonicalApart(h)
		}
		if !plus {
			out.minus[raw] = 1
		}
	}
	return out
}
