package simulate

import (
	"bytes"
	"compress/gzip"
	"fmt"
	"math"
	"reflect"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func TestTarnIsTheDemonstration(t *testing.T) {
	s := invent(t, Tarn())
	allowed := 0
	for _, a := range s.Truth.Absent {
		if !a {
			allowed++
		}
	}
	if allowed < 700 || allowed > 1500 || len(s.Specimens) != 3 {
		t.Errorf("%d unique reflections, %d crystals", allowed, len(s.Specimens))
	}
	total := 0
	for c, x := range s.Specimens {
		last := 0.0
		for j, m := range x.Positions {
			if !(m.Plan.Exchange > last && m.Plan.ThicknessNM > 0) {
				t.Errorf("%s: exchange does not rise at position %d", x.Name, j)
			}
			last = m.Plan.Exchange
			var text bytes.Buffer
			z := gzip.NewWriter(&text)
			for i := range m.Rows.I {
				fmt.Fprintf(z, "%d %d %d %.1f %.1f %.2f %d\n", m.Rows.H[i], m.Rows.K[i], m.Rows.L[i], m.Rows.I[i], m.Rows.Sigma[i], m.Rows.Phi[i], m.Rows.Frame[i])
			}
			if err := z.Close(); err != nil {
				t.Fatal(err)
			}
			total += text.Len()
		}
		if m := s.ExchangeBetween(c, 0, 2); !(m > 0.08 && m < 0.12) {
			t.Errorf("%s: exchange of the contrast is %g", x.Name, m)
		}
	}
	t.Logf("%d allowed unique reflections, %d rows in the first position, nine files of %d bytes", allowed, s.Specimens[0].Positions[0].Rows.Len(), total)
	if total > 700_000 {
		t.Errorf("the nine files take %d bytes", total)
	}
}

func TestTarnFillsForbiddenReflections(t *testing.T) {
	s := invent(t, Tarn())
	for _, x := range s.Specimens {
		mean := func(m Measured) float64 {
			sum, n := 0.0, 0.0
			for i, u := range m.Unique {
				if s.Truth.Absent[u] {
					sum += m.Rows.I[i] / (m.Plan.Counts * s.Truth.Local[u])
					n++
				}
			}
			return sum / n
		}
		if thin, thick := mean(x.Positions[0]), mean(x.Positions[2]); !(thick > thin+0.04) {
			t.Errorf("%s: forbidden reflections hold %.3f of the shell mean thin, %.3f thick", x.Name, thin, thick)
		}
	}
}

func TestKinematicTwin(t *testing.T) {
	s, twin := invent(t, Tarn()), invent(t, Tarn().Kinematic())
	if !reflect.DeepEqual(s.Truth, twin.Truth) {
		t.Error("the twin has another structure")
	}
	for c, x := range twin.Specimens {
		for j, m := range x.Positions {
			if !reflect.DeepEqual(m.Rows.Phi, s.Specimens[c].Positions[j].Rows.Phi) || !reflect.DeepEqual(m.LnK, s.Specimens[c].Positions[j].LnK) {
				t.Error("the twin has other angles or scales")
			}
			floatcmp.CheckSlice(t, "law", m.Law, twin.Truth.J, 0, 1e-14)
			for _, d := range m.LnDeviation {
				floatcmp.Check(t, "deviation", d, 0, 0, 0)
			}
		}
	}
}

func TestNullHasNoEffectOfThickness(t *testing.T) {
	s := invent(t, Null(3))
	if n := len(s.Truth.J); n < 1400 || n > 1700 {
		t.Errorf("%d unique reflections", n)
	}
	for _, x := range s.Specimens {
		for _, m := range x.Positions {
			floatcmp.CheckSlice(t, "law", m.Law, s.Truth.J, 0, 1e-14)
			_, sd := meanSD(m.LnDeviation)
			floatcmp.Check(t, "deviation", sd, 0.3, 0, 0.1)
		}
	}
}

func TestReplicatesShareTheirThickness(t *testing.T) {
	s := invent(t, Replicates(2))
	for _, x := range s.Specimens {
		a, b := x.Positions[0], x.Positions[1]
		if len(x.Positions) != 4 || b.Plan.ReplicateOf != a.Plan.Name || b.Plan.ThicknessNM != a.Plan.ThicknessNM || reflect.DeepEqual(a.Rows.I, b.Rows.I) {
			t.Errorf("%s: got %+v", x.Name, b.Plan)
		}
		floatcmp.CheckSlice(t, "law", b.Law, a.Law, 0, 0)
	}
}

func TestWithExchange(t *testing.T) {
	p := Null(1).WithExchange(0.01, 0.03)
	for _, c := range p.Crystals {
		floatcmp.CheckSlice(t, "exchange", []float64{c.Positions[0].Exchange, c.Positions[1].Exchange, c.Positions[2].Exchange}, []float64{0.01, 0.03, 0}, 0, 0)
	}
}

func TestEveryFlawIsAChange(t *testing.T) {
	plain := Sound(4)
	plain.DMin = 1.8
	sound := invent(t, plain)
	for _, f := range Flaws() {
		p := Flawed(f, 4)
		p.DMin = 1.8
		if err := p.Check(); err != nil {
			t.Errorf("%v: %v", f, err)
			continue
		}
		s := invent(t, p)
		if reflect.DeepEqual(s.Specimens, sound.Specimens) && s.Group.HM() == sound.Group.HM() {
			t.Errorf("%v changes nothing", f)
		}
	}
	if Flaw(99).String() != "Flaw(99)" || FlawIce.String() != "ice" {
		t.Error("wrong names of flaws")
	}
	defer func() {
		if got := recover(); got != "simulate: Flawed: unknown flaw" {
			t.Errorf("got %v", got)
		}
	}()
	Flawed(-1, 0)
}

func TestFlawsAreWhatTheySay(t *testing.T) {
	sound := invent(t, Sound(4))
	of := func(f Flaw, c, j int) Measured { return invent(t, Flawed(f, 4)).Specimens[c].Positions[j] }
	a, b := sound.Specimens[1].Positions[0], of(FlawSigma, 1, 0)
	floatcmp.Check(t, "sigma", b.Rows.Sigma[5], a.Rows.Sigma[5]/1.5, 0, 1e-12)
	cut := of(FlawNegatives, 0, 2)
	for _, v := range cut.Rows.I {
		if v < 0 {
			t.Fatalf("%g is left", v)
		}
	}
	if cut.Removed == 0 {
		t.Error("nothing was removed")
	}
	c := of(FlawCoverage, 0, 2)
	for _, phi := range c.Rows.Phi {
		if !(math.Abs(phi) <= 20) {
			t.Fatalf("a row at %g", phi)
		}
	}
	for _, u := range of(FlawForbidden, 0, 1).Unique {
		if sound.Truth.Absent[u] {
			t.Fatal("a forbidden reflection is recorded")
		}
	}
}

func BenchmarkInvent(b *testing.B) {
	for _, c := range []struct {
		name string
		dMin float64
	}{{"unique=1500", 1.2}, {"unique=4500", 0.83}} {
		b.Run(c.name, func(b *testing.B) {
			b.ReportAllocs()
			p := Null(1)
			p.DMin = c.dMin
			rows := 0
			for b.Loop() {
				rows = invent(b, p).Specimens[0].Positions[0].Rows.Len()
			}
			b.ReportMetric(float64(rows), "rows/position")
		})
	}
}
