package crystal

import "slices"

// packing says how three indices become one sortable number: the first 21 bits
// from the top hold h, or h+k on hexagonal axes, so that the largest image of a
// reflection is the one with indices that are not negative where there is one.
type packing bool

const (
	onesK = int64(1) << 21
	onesH = int64(1) << 42
	// maxPacked keeps every image of a reflection, with matrix entries up to 3
	// and h+k taken, under 2^20.
	maxPacked = 50000
)

func (p packing) base() [3]int64 {
	if p {
		return [3]int64{onesH + onesK, onesH, 1}
	}
	return [3]int64{onesH, onesK, 1}
}

func (p packing) pack(h HKL) int64 {
	b := p.base()
	return int64(h.H)*b[0] + int64(h.K)*b[1] + int64(h.L)*b[2]
}

func (p packing) unpack(key int64) HKL {
	c := (key+onesK/2)&(onesK-1) - onesK/2
	key = (key - c) >> 21
	b := (key+onesK/2)&(onesK-1) - onesK/2
	a := (key - b) >> 21
	if p {
		return HKL{int(b), int(a - b), int(c)}
	}
	return HKL{int(a), int(b), int(c)}
}

// weights turn a reflection into the packed image under one rotation by three
// multiplications, because both steps are linear.
type weights [3]int64

func (w *weights) of(h, k, l int64) int64 { return h*w[0] + k*w[1] + l*w[2] }

// turn is one rotation part as it acts on reflections, with the translation that
// comes with it.
type turn struct {
	w weights
	t [3]int64
}

// prepare sets the tables that the reflection methods run through: half holds
// one of each pair R, -R of the Laue class, in the point group itself where the
// group has no inversion; turns holds the whole point group.
func (g *Group) prepare() {
	g.packing = packing(g.point.hexagonal)
	base := g.packing.base()
	seen := map[[3][3]int8]bool{}
	for _, o := range g.coset {
		var w weights
		for i := range 3 {
			for j := range 3 {
				w[i] += int64(o.R[i][j]) * base[j]
			}
		}
		g.turns = append(g.turns, turn{w, [3]int64{int64(o.T[0]), int64(o.T[1]), int64(o.T[2])}})
		if !seen[Inversion().Compose(o).R] {
			seen[o.R] = true
			g.half = append(g.half, w)
		}
	}
}

func packable(h HKL) bool {
	return abs(h.H) <= maxPacked && abs(h.K) <= maxPacked && abs(h.L) <= maxPacked
}

// Canonical returns the one representative of the reflections equivalent to h
// under the Laue class (Friedel mates together): the image with the largest h,
// then k, then l; on hexagonal axes the largest h+k, then h, then l. It does not
// allocate. Indices beyond 50000 are returned as they are.
func (g *Group) Canonical(h HKL) HKL {
	if !packable(h) {
		return h
	}
	key, _ := g.best(int64(h.H), int64(h.K), int64(h.L))
	return g.packing.unpack(key)
}

// best returns the packed canonical representative, and whether an operator of
// the point group, without Friedel's law, leads there.
func (g *Group) best(h, k, l int64) (int64, bool) {
	hi := g.half[0].of(h, k, l)
	lo := hi
	for i := 1; i < len(g.half); i++ {
		v := g.half[i].of(h, k, l)
		hi, lo = max(hi, v), min(lo, v)
	}
	if hi >= -lo {
		return hi, true
	}
	return -lo, g.point.inversion
}

// CanonicalApart returns the representative that Canonical returns and, for
// Friedel mates kept apart, on which side h lies: plus is true when the point
// group takes h to the representative, false when it takes h to its Friedel
// mate. Centric reflections, and all of a centrosymmetric group, are plus.
func (g *Group) CanonicalApart(h HKL) (rep HKL, plus bool) {
	if !packable(h) {
		return h, true
	}
	key, plus := g.best(int64(h.H), int64(h.K), int64(h.L))
	return g.packing.unpack(key), plus
}

// CanonicalKeys writes to dst the packed representative of each row, the same
// for equivalent reflections and sortable; KeyHKL unpacks it. minus, when not
// nil, is set to true for rows on the Friedel side (see CanonicalApart). All
// slices must be of equal length, or it panics. It does not allocate.
func (g *Group) CanonicalKeys(dst []int64, minus []bool, h, k, l []int16) {
	n := len(dst)
	if len(h) != n || len(k) != n || len(l) != n || minus != nil && len(minus) != n {
		panic("crystal: Group.CanonicalKeys: slices differ in length")
	}
	for i := range dst {
		key, plus := g.best(int64(h[i]), int64(k[i]), int64(l[i]))
		dst[i] = key
		if minus != nil {
			minus[i] = !plus
		}
	}
}

// KeyHKL returns the reflection that a key of CanonicalKeys stands for.
func (g *Group) KeyHKL(key int64) HKL { return g.packing.unpack(key) }

// Absent reports whether the reflection is forbidden: an operator (R, t) with
// h R = h for which h t is no whole number (International Tables A, 2.1.3.13).
// 000 is not absent. It does not allocate.
func (g *Group) Absent(h HKL) bool {
	a, b, c := int64(h.H), int64(h.K), int64(h.L)
	if g.centringForbids(a, b, c) {
		return true
	}
	key := g.turns[0].w.of(a, b, c)
	for i := 1; i < len(g.turns); i++ {
		t := &g.turns[i]
		if t.w.of(a, b, c) == key && (a*t.t[0]+b*t.t[1]+c*t.t[2])%Twentyfourths != 0 {
			return true
		}
	}
	return false
}

func (g *Group) centringForbids(a, b, c int64) bool {
	for _, v := range g.lattice[1:] {
		if (a*int64(v[0])+b*int64(v[1])+c*int64(v[2]))%Twentyfourths != 0 {
			return true
		}
	}
	return false
}

// Centric reports whether an operator takes h to -h, which restricts its phase
// to two values. All reflections of a centrosymmetric group are centric.
func (g *Group) Centric(h HKL) bool {
	a, b, c := int64(h.H), int64(h.K), int64(h.L)
	key := g.turns[0].w.of(a, b, c)
	for i := range g.turns {
		if g.turns[i].w.of(a, b, c) == -key {
			return true
		}
	}
	return false
}

// Epsilon is the number of rotations R of the point group with h R = h, centring
// not counted: the factor by which the mean intensity of the reflection exceeds
// that of a general one (Wilson 1949).
func (g *Group) Epsilon(h HKL) int {
	a, b, c := int64(h.H), int64(h.K), int64(h.L)
	key := g.turns[0].w.of(a, b, c)
	n := 0
	for i := range g.turns {
		if g.turns[i].w.of(a, b, c) == key {
			n++
		}
	}
	return n
}

// Multiplicity is the number of different reflections equivalent to h under the
// Laue class, Friedel mates included; 1 for 000.
func (g *Group) Multiplicity(h HKL) int {
	if h == (HKL{}) {
		return 1
	}
	a, b, c := int64(h.H), int64(h.K), int64(h.L)
	key := g.half[0].of(a, b, c)
	same := 0
	for i := range g.half {
		if v := g.half[i].of(a, b, c); v == key || v == -key {
			same++
		}
	}
	return 2 * len(g.half) / same
}

// Equivalents returns the different reflections equivalent to h under the Laue
// class, Friedel mates included, in descending order of the packed value: the
// first is Canonical(h).
func (g *Group) Equivalents(h HKL) []HKL {
	keys := make([]int64, 0, 2*len(g.half))
	for i := range g.half {
		v := g.half[i].of(int64(h.H), int64(h.K), int64(h.L))
		keys = append(keys, v, -v)
	}
	slices.Sort(keys)
	keys = slices.Compact(keys)
	slices.Reverse(keys)
	out := make([]HKL, len(keys))
	for i, key := range keys {
		out[i] = g.packing.unpack(key)
	}
	return out
}
