package analysis

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
)

// Mates made unequal by 20 % of an amplitude in the thick position and not in the thin come
// back as the root mean square of the intensities that were put in, whatever the sigmas; centric
// mates stay equal.
func TestFriedelMatesComeBack(t *testing.T) {
	const polarity = 0.2
	p := simulate.Sound(5)
	p.Crystals, p.Structure = p.Crystals[:1], simulate.Structure{Wilson: true, B: 4}
	at := p.Crystals[0].Positions
	at[len(at)-1].Polarity = polarity
	for j := range at {
		at[j].SigmaFactor = 3
	}
	v := invented(t, p)
	s, err := New(readOf(v), quick())
	if err != nil {
		t.Fatal(err)
	}
	// The mates are J + a and max(0, J - a), a = P sqrt(J <J>).
	var d2, j2 float64
	for u, j := range v.Truth.J {
		if v.Truth.Centric[u] || v.Truth.Absent[u] {
			continue
		}
		y := j / v.Truth.Local[u]
		a := polarity * math.Sqrt(y)
		plus, minus := y+a, math.Max(0, y-a)
		d2, j2 = d2+(plus-minus)*(plus-minus), j2+(plus+minus)*(plus+minus)/4
	}
	want := math.Sqrt(d2 / j2)
	list, err := s.FriedelMates(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	if len(list) != 2*len(at) {
		t.Fatalf("%d rows of %d positions", len(list), len(at))
	}
	for _, f := range list {
		t.Logf("%+v", f)
		thick := f.Position == at[len(at)-1].Name
		switch {
		case f.Kind == "acentric" && thick:
			floatcmp.Check(t, "share put in", f.Share, want, math.Max(0.03*want, 2*(f.Hi-f.Lo)/3.92), 0)
			if f.Z < 5 || f.N < 300 {
				t.Errorf("hardly seen: %+v", f)
			}
		case math.Abs(f.Z) > 4:
			t.Errorf("equal mates: %+v", f)
		}
	}
}

// In a group with a centre all mates are equivalents: there is only the null.
func TestFriedelMatesNeedNoCentre(t *testing.T) {
	p := simulate.Sound(6)
	p.Crystals, p.SpaceGroup, p.Structure.Wilson = p.Crystals[:1], "P m m m", true
	s := studyOf(t, p, quick())
	list, err := s.FriedelMates(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range list {
		if f.Kind != "centric" || f.Why == "" && math.Abs(f.Z) > 4 {
			t.Errorf("%+v", f)
		}
	}
}
