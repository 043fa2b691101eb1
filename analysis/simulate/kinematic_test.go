package simulate

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/electron"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

func TestKinematicAgainstDirectSum(t *testing.T) {
	cell := crystal.Cell{A: 7.1, B: 9.3, C: 11.2, Alpha: 90, Beta: 103, Gamma: 90}
	group := lookup(t, "P 1 21 1")
	atoms := []Atom{{"C", 0.11, 0.27, 0.83, 2}, {"O", 0.41, 0.05, 0.33, 3}, {"C", 0.71, 0.61, 0.13, 2}}
	hkl := []crystal.HKL{{H: 1, K: 2, L: 3}, {H: -4, K: 1, L: 2}, {H: 0, K: 2, L: 0}, {H: 0, K: 3, L: 0}}
	got, err := KinematicIntensities(context.Background(), cell, group, atoms, hkl)
	if err != nil {
		t.Fatal(err)
	}
	for i, h := range hkl {
		s2 := cell.InvD2(h) / 4
		re, im := 0.0, 0.0
		for _, a := range atoms {
			f, _ := electron.ScatteringFactor(a.Element, math.Sqrt(s2))
			f *= math.Exp(-a.B * s2)
			// P 21: x,y,z and -x,y+1/2,-z.
			for _, x := range [][3]float64{{a.X, a.Y, a.Z}, {-a.X, a.Y + 0.5, -a.Z}} {
				s, c := math.Sincos(2 * math.Pi * (float64(h.H)*x[0] + float64(h.K)*x[1] + float64(h.L)*x[2]))
				re, im = re+f*c, im+f*s
			}
		}
		floatcmp.Check(t, "|F|^2", got[i], re*re+im*im, 1e-12, 1e-11)
	}
	floatcmp.Check(t, "0 3 0 of P 21", got[3], 0, 1e-20, 0)
}

func TestAbsencesAreZeroAndEquivalentsEqual(t *testing.T) {
	for _, symbol := range []string{"P 21 21 21", "P 1 21/c 1", "C 1 2/c 1", "P 41", "F d d 2"} {
		p := &Plan{SpaceGroup: symbol, Cell: Cell{A: 9, B: 9, C: 13}, DMin: 1.5, Crystals: []Crystal{{Wedge: &Wedge{}}}}
		f := p.filled()
		if err := f.check(); err != nil {
			t.Fatal(err)
		}
		group, cell := lookup(t, symbol), crystal.Cell(f.Cell)
		list, truth, err := enumerate(context.Background(), cell, group, f.DMin)
		if err != nil {
			t.Fatal(err)
		}
		atoms, err := placeAtoms(context.Background(), &f.Structure, cell, group, resample.NewSeed(5).Stream(0))
		if err != nil {
			t.Fatal(err)
		}
		raw, err := KinematicIntensities(context.Background(), cell, group, atoms, list.raw)
		if err != nil {
			t.Fatal(err)
		}
		unique, err := KinematicIntensities(context.Background(), cell, group, atoms, truth.HKL)
		if err != nil {
			t.Fatal(err)
		}
		absent := 0
		for i, u := range list.unique {
			floatcmp.Check(t, symbol+" equivalent", raw[i], unique[u], 1e-9, 1e-9)
			if (list.absent[i] != 0) != truth.Absent[u] {
				t.Errorf("%s: %v absent %d, its representative %v", symbol, list.raw[i], list.absent[i], truth.Absent[u])
			}
			if truth.Absent[u] {
				absent++
				floatcmp.Check(t, symbol+" absence", raw[i], 0, 1e-18, 0)
			}
		}
		if absent == 0 {
			t.Errorf("%s: no absences", symbol)
		}
	}
}

func TestWilsonMomentsOfRandomAtoms(t *testing.T) {
	// <z^2> is 2 for acentric and 3 for centric reflections (Wilson 1949) for many
	// atoms; for n equal atoms it is 2 - 1/n and 3 - 3/(2n) or so, within the sampling error below.
	for _, c := range []struct {
		symbol  string
		centric bool
		want    float64
	}{{"P 1", false, 2}, {"P 21 21 21", false, 2}, {"P 21 21 21", true, 3}, {"P -1", true, 3}} {
		for _, wilson := range []bool{false, true} {
			p := &Plan{SpaceGroup: c.symbol, Cell: Cell{A: 19, B: 22, C: 25}, DMin: 1.3, Seed: 8, Structure: Structure{Wilson: wilson}, Crystals: []Crystal{{Wedge: &Wedge{Steps: 1}}}}
			s := invent(t, p)
			sum, n := 0.0, 0.0
			mean := localMean(&s.Truth, c.centric)
			for i, j := range s.Truth.J {
				if s.Truth.Absent[i] || s.Truth.Centric[i] != c.centric || s.Truth.Epsilon[i] != 1 {
					continue
				}
				z := j / mean[i]
				sum += z * z
				n++
			}
			// Var(z^2) is 20 (acentric, 24-4) and 96 (centric, 105-9).
			se := math.Sqrt(20 / n)
			if c.centric {
				se = math.Sqrt(96 / n)
			}
			floatcmp.Check(t, c.symbol, sum/n, c.want, 4*se+0.03, 0)
			if n < 300 {
				t.Errorf("%s: only %g reflections", c.symbol, n)
			}
		}
	}
}

// localMean is the mean of J over the 200 nearest reflections in s^2 of the same kind.
func localMean(tr *Truth, centric bool) []float64 {
	var at []int
	for i := range tr.J {
		if !tr.Absent[i] && tr.Centric[i] == centric && tr.Epsilon[i] == 1 {
			at = append(at, i)
		}
	}
	out := make([]float64, len(tr.J))
	for k, i := range at {
		lo, hi := max(0, k-100), min(len(at), k+101)
		for _, j := range at[lo:hi] {
			out[i] += tr.J[j]
		}
		out[i] /= float64(hi - lo)
	}
	return out
}

func TestAtomsKeepTheirDistance(t *testing.T) {
	cell := crystal.Cell{A: 6, B: 7, C: 8, Alpha: 75, Beta: 100, Gamma: 110}
	group := lookup(t, "P -1")
	for seed := range uint64(10) {
		atoms, err := placeAtoms(context.Background(), &Structure{MinDistance: 1.3}, cell, group, resample.NewSeed(seed).Stream(0))
		if err != nil {
			t.Fatal(err)
		}
		if d := leastDistance(cell, group, atoms); !(d >= 1.3-1e-9) {
			t.Errorf("seed %d: two atoms are %g angstrom apart", seed, d)
		}
	}
	if _, err := placeAtoms(context.Background(), &Structure{MinDistance: 5, Atoms: []AtomKind{{Element: "C", Number: 40}}}, cell, group, resample.NewSeed(2).Stream(0)); err == nil {
		t.Error("forty atoms 5 angstrom apart found room")
	}
}

// leastDistance looks at every pair of atoms, copies and lattice translations.
func leastDistance(cell crystal.Cell, group *crystal.Group, atoms []Atom) float64 {
	m := cell.Orthogonal()
	var all [][3]float64
	for _, a := range atoms {
		for _, op := range group.Operators() {
			all = append(all, apply(op, [3]float64{a.X, a.Y, a.Z}))
		}
	}
	least := math.Inf(1)
	for i, x := range all {
		for j, y := range all {
			for n := range 125 {
				a, b, c := float64(n%5-2), float64(n/5%5-2), float64(n/25-2)
				if i == j && a == 0 && b == 0 && c == 0 {
					continue
				}
				v := times(m, [3]float64{x[0] - y[0] + a, x[1] - y[1] + b, x[2] - y[2] + c})
				least = math.Min(least, v[0]*v[0]+v[1]*v[1]+v[2]*v[2])
			}
		}
	}
	return math.Sqrt(least)
}
