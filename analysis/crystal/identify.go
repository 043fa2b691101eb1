package crystal

import (
	"slices"
	"sync"
)

// fingerprint is the same for two lists that hold the same operators.
func fingerprint(ops []Op) string {
	keys := make([][12]byte, len(ops))
	for i, o := range ops {
		n := 0
		for r := range 3 {
			for c := range 3 {
				keys[i][n] = byte(o.R[r][c] + 8)
				n++
			}
		}
		for r := range 3 {
			keys[i][n] = byte(o.T[r])
			n++
		}
	}
	slices.SortFunc(keys, func(a, b [12]byte) int { return slices.Compare(a[:], b[:]) })
	text := make([]byte, 0, 12*len(keys))
	for _, k := range keys {
		text = append(text, k[:]...)
	}
	return string(text)
}

// expanded holds every tabulated setting expanded, in the order that symbols
// without a choice are understood; made once, never changed.
var expanded = sync.OnceValue(func() (e struct {
	groups []*Group
	byOps  map[string]int
}) {
	e.byOps = map[string]int{}
	all := table()
	for _, i := range preferred(all) {
		g, err := expandHall(all[i].Hall)
		if err != nil {
			panic("crystal: settings.tsv: " + err.Error())
		}
		g.setting = all[i]
		f := fingerprint(g.ops)
		if _, taken := e.byOps[f]; !taken {
			e.byOps[f] = len(e.groups)
		}
		e.groups = append(e.groups, g)
	}
	return e
})

// identify finds the tabulated setting with the same operators, or the one from
// which a shift of the origin in 24ths leads to them; the zero Setting when there
// is none.
func identify(g *Group) (Setting, [3]int) {
	e := expanded()
	if i, ok := e.byOps[fingerprint(g.ops)]; ok {
		return e.groups[i].setting, [3]int{}
	}
	for _, s := range e.groups {
		if s.Order() != g.Order() || s.point.oriented != g.point.oriented || !sameLattice(s, g) {
			continue
		}
		if shift, ok := originShift(s, g); ok {
			return s.setting, shift
		}
	}
	return Setting{}, [3]int{}
}

func sameLattice(s, g *Group) bool {
	if len(s.lattice) != len(g.lattice) {
		return false
	}
	for _, v := range s.lattice {
		if !slices.Contains(g.lattice, v) {
			return false
		}
	}
	return true
}

// originShift looks for v with T_g = T_s + (1 - R) v, up to a lattice
// translation, for every rotation part.
func originShift(s, g *Group) ([3]int, bool) {
	type pair struct {
		r    [3][3]int8
		diff [3]int
	}
	var pairs []pair
	for _, o := range g.coset[1:] {
		i := slices.IndexFunc(s.coset, func(q Op) bool { return q.R == o.R })
		if i < 0 {
			return [3]int{}, false
		}
		p := pair{r: o.R}
		for j := range 3 {
			p.diff[j] = int(o.T[j]) - int(s.coset[i].T[j])
		}
		pairs = append(pairs, p)
	}
	fits := func(v [3]int) bool {
		for i := range pairs {
			p := &pairs[i]
			var rest [3]int
			for j := range 3 {
				rest[j] = mod(p.diff[j]-v[j]+int(p.r[j][0])*v[0]+int(p.r[j][1])*v[1]+int(p.r[j][2])*v[2], Twentyfourths)
			}
			if !slices.Contains(g.lattice, rest) {
				return false
			}
		}
		return true
	}
	for a := range Twentyfourths {
		for b := range Twentyfourths {
			for c := range Twentyfourths {
				if v := [3]int{a, b, c}; fits(v) {
					return v, true
				}
			}
		}
	}
	return [3]int{}, false
}

// centringName names a lattice by its translations.
func centringName(lattice [][3]int) string {
	for _, letter := range []byte("pabcifrth") {
		vectors := latticeTranslations[letter]
		if len(vectors)+1 != len(lattice) {
			continue
		}
		all := true
		for _, v := range vectors {
			all = all && slices.Contains(lattice, v)
		}
		if !all {
			continue
		}
		if letter == 't' {
			return "R (reverse)"
		}
		return string(letter - 'a' + 'A')
	}
	text := ""
	for i, v := range lattice {
		if i > 0 {
			text += "; "
		}
		o := Op{T: [3]int8{int8(v[0]), int8(v[1]), int8(v[2])}}
		text += o.String()
	}
	return text
}
