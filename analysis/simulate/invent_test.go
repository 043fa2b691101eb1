package simulate

import (
	"context"
	"errors"
	"math"
	"reflect"
	"runtime"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
)

func TestSamePlanSameBits(t *testing.T) {
	one := runtime.GOMAXPROCS(1)
	a := invent(t, Tarn())
	runtime.GOMAXPROCS(2)
	b := invent(t, Tarn())
	runtime.GOMAXPROCS(one)
	if !reflect.DeepEqual(a, b) {
		t.Error("two runs of one plan differ")
	}
	other := Tarn()
	other.Seed++
	if reflect.DeepEqual(a.Specimens[0].Positions[0].Rows.I, invent(t, other).Specimens[0].Positions[0].Rows.I) {
		t.Error("another seed gives the same rows")
	}
}

func TestPlanIsLeftAlone(t *testing.T) {
	p, same := Tarn(), Tarn()
	s := invent(t, p)
	if !reflect.DeepEqual(p, same) {
		t.Error("Invent changed its plan")
	}
	s.Plan.Crystals[0].Positions[0].TiltDeg[0] = 7
	s.Plan.Crystals[0].Positions[0].Cos[0] = 7
	if !reflect.DeepEqual(p, same) {
		t.Error("the series shares memory with the plan")
	}
	p.Kinematic()
	p.WithExchange(0.5, 0.5)
	if !reflect.DeepEqual(p, same) {
		t.Error("a twin changed its plan")
	}
}

func TestFilledPlanGivesTheSameSeries(t *testing.T) {
	a := invent(t, small())
	if b := invent(t, &a.Plan); !reflect.DeepEqual(a, b) {
		t.Error("the filled plan of a series does not make that series again")
	}
}

func TestOtherPositionsDoNotDependOnOne(t *testing.T) {
	p := Tarn()
	a := invent(t, p)
	p.Crystals[0].Positions[2].Counts *= 3
	p.Crystals[0].Positions = append(p.Crystals[0].Positions, Position{Name: "extra", ThicknessNM: 400})
	b := invent(t, p)
	for j := range 2 {
		if !reflect.DeepEqual(a.Specimens[0].Positions[j], b.Specimens[0].Positions[j]) {
			t.Errorf("position %d changed with another position", j)
		}
	}
}

func TestRowsLieInTheTiltRangeOnTheSphere(t *testing.T) {
	p := small()
	p.Common.TiltDeg, p.Common.GapDeg, p.Common.FrameDeg = []float64{-50, 40}, []float64{-5, 10}, 0.25
	p.Common.MisorientedDeg = 0.3
	s := invent(t, p)
	cell := crystal.Cell(s.Plan.Cell)
	for _, m := range s.Specimens[0].Positions {
		g := Geometry{Wavelength: s.Wavelength, Reciprocal: reciprocalBasis(cell), Orientation: m.Orientation}
		k := 1 / s.Wavelength
		if m.Orientation == s.Specimens[0].Orientation {
			t.Error("the position is not misoriented")
		}
		for i, phi := range m.Rows.Phi {
			if !(phi >= -50 && phi <= 40) || (phi >= -5 && phi <= 10) {
				t.Fatalf("row %d lies at %g", i, phi)
			}
			h := crystal.HKL{H: int(m.Rows.H[i]), K: int(m.Rows.K[i]), L: int(m.Rows.L[i])}
			v := g.At(h, phi)
			floatcmp.Check(t, "|k+g|", math.Sqrt(v[0]*v[0]+v[1]*v[1]+(k+v[2])*(k+v[2])), k, 1e-9, 0)
			if want := int32(math.Floor((phi+50)/0.25)) + 1; m.Rows.Frame[i] != want {
				t.Fatalf("row %d at %g is on frame %d, want %d", i, phi, m.Rows.Frame[i], want)
			}
			if got := s.Group.Canonical(h); got != s.Truth.HKL[m.Unique[i]] {
				t.Fatalf("row %d is %v, its unique reflection %v", i, got, s.Truth.HKL[m.Unique[i]])
			}
		}
	}
}

func TestRecordedShareIsThatOfTheTiltRange(t *testing.T) {
	// Each index crosses twice in a full turn, so 120 degrees record 2/3 of them.
	s := invent(t, small())
	n := 0
	for h := -6; h <= 6; h++ {
		for k := -8; k <= 8; k++ {
			for l := -9; l <= 9; l++ {
				hkl := crystal.HKL{H: h, K: k, L: l}
				if q := crystal.Cell(s.Plan.Cell).InvD2(hkl); q > 0 && q <= 1/(1.5*1.5) {
					n++
				}
			}
		}
	}
	rows := s.Specimens[0].Positions[0].Rows.Len()
	floatcmp.Check(t, "share recorded", float64(rows)/float64(n), 2.0/3, 0.03, 0)
	// Without symmetry but Friedel's a third of the unique reflections lies in the
	// unmeasured wedge.
	p := small()
	p.SpaceGroup = "P 1"
	s = invent(t, p)
	seen := map[int32]bool{}
	for _, u := range s.Specimens[0].Positions[0].Unique {
		seen[u] = true
	}
	floatcmp.Check(t, "completeness in P 1", float64(len(seen))/float64(len(s.Truth.J)), 2.0/3, 0.04, 0)
}

func TestEquivalentsComeAtDifferentAngles(t *testing.T) {
	m := invent(t, small()).Specimens[0].Positions[0]
	first := map[int32]int{}
	apart, pairs, mates := 0, 0, 0
	for i, u := range m.Unique {
		f, ok := first[u]
		if !ok {
			first[u] = i
			continue
		}
		gap := math.Abs(m.Rows.Phi[f] - m.Rows.Phi[i])
		if m.Rows.H[f] == -m.Rows.H[i] && m.Rows.K[f] == -m.Rows.K[i] && m.Rows.L[f] == -m.Rows.L[i] {
			// A Friedel mate crosses on the other side of the nearly flat sphere:
			// soon after, but never at the same angle.
			mates++
			if gap == 0 {
				t.Errorf("row %d and its mate cross together", i)
			}
			continue
		}
		pairs++
		if gap > 2 {
			apart++
		}
	}
	if mates < 100 || pairs < 500 || apart < pairs*9/10 {
		t.Errorf("%d mates; %d of %d other equivalents lie more than 2 degrees apart", mates, apart, pairs)
	}
}

func TestCancelledContextEndsInvent(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Invent(ctx, Tarn()); !errors.Is(err, context.Canceled) {
		t.Errorf("got %v", err)
	}
}

func TestLawTakesThePlace(t *testing.T) {
	p := small()
	p.Law = func(_, position int, h crystal.HKL) (float64, bool) {
		return float64(position+1) * float64(h.H*h.H), h.K != 1
	}
	s := invent(t, p)
	for j, m := range s.Specimens[0].Positions {
		if m.Law != nil || m.Rows.Len() == 0 {
			t.Fatal("no rows, or a law where none was used")
		}
		for i, want := range m.Expected {
			if m.Rows.K[i] == 1 {
				t.Fatal("an index that was not excited is recorded")
			}
			floatcmp.Check(t, "intensity", want, 200*float64(j+1)*float64(m.Rows.H[i])*float64(m.Rows.H[i]), 0, 1e-12)
		}
	}
	floatcmp.Check(t, "exchange under a law", s.ExchangeBetween(0, 0, 1), math.NaN(), 0, 0)
	p.Law = func(int, int, crystal.HKL) (float64, bool) { return math.NaN(), true }
	if _, err := Invent(context.Background(), p); err == nil {
		t.Error("a law that gives NaN passed")
	}
}
