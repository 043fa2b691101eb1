package simulate

import (
	"math"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// slopes regresses y on x over the allowed reflections of each shell.
func slopes(tr *Truth, x, y []float64) []float64 {
	var out []float64
	for shell := int32(0); shell <= tr.Shell[len(tr.Shell)-1]; shell++ {
		var a, b []float64
		for i, s := range tr.Shell {
			if s == shell && !tr.Absent[i] {
				a, b = append(a, x[i]), append(b, y[i])
			}
		}
		_, sa := meanSD(a)
		_, sb := meanSD(b)
		out = append(out, correlation(a, b)*sb/sa)
	}
	return out
}

func TestExchangeIsExactWithinShells(t *testing.T) {
	p := small()
	p.Crystals[0].Positions[0].Exchange, p.Crystals[0].Positions[1].Exchange = 0.02, 0.12
	s := invent(t, p)
	thin, thick := s.Specimens[0].Positions[0].Law, s.Specimens[0].Positions[1].Law
	m := s.ExchangeBetween(0, 0, 1)
	floatcmp.Check(t, "m of the contrast", m, 1-0.88/0.98, 0, 1e-14)
	got := slopes(&s.Truth, thin, thick)
	if len(got) < 3 {
		t.Fatalf("%d shells", len(got))
	}
	for _, b := range got {
		floatcmp.Check(t, "slope of thick on thin", b, 1-m, 0, 1e-10)
	}
	for _, b := range slopes(&s.Truth, s.Truth.J, thick) {
		floatcmp.Check(t, "slope of thick on truth", b, 0.88, 0, 1e-10)
	}
	floatcmp.CheckSlice(t, "shell means", s.Truth.shellMean(thick), s.Truth.Local, 0, 1e-12)
	for i, a := range s.Truth.Absent {
		if a {
			floatcmp.Check(t, "forbidden", thick[i], 0.12*s.Truth.Local[i], 0, 1e-12)
			floatcmp.Check(t, "forbidden truth", s.Truth.J[i], 0, 0, 0)
		}
	}
}

func TestIntensitiesFollowTheFalloff(t *testing.T) {
	p := small()
	p.DMin, p.Structure = 0.6, Structure{Wilson: true, B: 3}
	s := invent(t, p)
	// <J> exp(2 B s^2) is flat: the same mean in the lower and the upper half.
	var low, high []float64
	sum, n := 0.0, 0
	for i, j := range s.Truth.J {
		if s.Truth.Absent[i] {
			continue
		}
		flat := j * math.Exp(6*s.Truth.S2[i])
		if i < len(s.Truth.J)/2 {
			low = append(low, flat)
		} else {
			high = append(high, flat)
		}
	}
	a, sa := meanSD(low)
	b, sb := meanSD(high)
	floatcmp.Check(t, "falloff", a/b, 1, 4*math.Hypot(sa/a, sb/b)/math.Sqrt(float64(len(low))), 0)
	if len(low) < 2000 {
		t.Errorf("only %d reflections in the lower half", len(low))
	}
	allowed := 0
	for _, x := range s.Truth.Absent {
		if !x {
			allowed++
		}
	}
	for i := 0; n < allowed/3; i++ {
		if !s.Truth.Absent[i] {
			sum, n = sum+s.Truth.J[i], n+1
		}
	}
	floatcmp.Check(t, "mean of the lowest third", sum/float64(n), 1, 0, 1e-12)
	for i := 1; i < len(s.Truth.S2); i++ {
		if s.Truth.S2[i] < s.Truth.S2[i-1]-1e-12 || s.Truth.Shell[i] < s.Truth.Shell[i-1] {
			t.Fatalf("reflection %d is out of order", i)
		}
	}
}

func TestCurbForms(t *testing.T) {
	for _, form := range []CurbForm{CurbIntensity, CurbStrength, CurbRate} {
		p := small()
		p.Common.Sin = []float64{0.3}
		p.Crystals[0].Positions[1].Curb, p.Crystals[0].Positions[1].CurbForm = 0.02, form
		s := invent(t, p)
		m := s.Specimens[0].Positions[1]
		for i, u := range m.Unique {
			j := s.Truth.J[u]
			if s.Truth.Absent[u] {
				continue
			}
			k := math.Exp(0.3 * math.Sin(math.Pi*(m.Rows.Phi[i]+60)/120))
			var x float64
			switch form {
			case CurbIntensity:
				x = j
			case CurbStrength:
				x = j / s.Truth.Local[u]
			case CurbRate:
				x = k * j
			}
			floatcmp.Check(t, form.String(), m.Expected[i], 200*k*j*math.Exp(-0.02*x), 1e-12, 1e-12)
		}
	}
}

func TestExchangeKeepsTheShellMeanAfterTheCurb(t *testing.T) {
	p := small()
	p.Common.Exchange, p.Common.Curb = 0.2, 0.05
	s := invent(t, p)
	curbed := make([]float64, len(s.Truth.J))
	for i, j := range s.Truth.J {
		curbed[i] = j * math.Exp(-0.05*j)
	}
	law := s.Specimens[0].Positions[0].Law
	floatcmp.CheckSlice(t, "shell means", s.Truth.shellMean(law), s.Truth.shellMean(curbed), 0, 1e-12)
	for _, b := range slopes(&s.Truth, curbed, law) {
		floatcmp.Check(t, "slope", b, 0.8, 0, 1e-10)
	}
}

func TestWilsonMeanIsEpsilon(t *testing.T) {
	// <|F|^2> is epsilon, <|F|^4> 2 epsilon^2 acentric and 3 epsilon^2 centric (Wilson 1949).
	const n = 20000
	tr := Truth{HKL: make([]crystal.HKL, 2*n), Epsilon: make([]int8, 2*n), Centric: make([]bool, 2*n)}
	for i := range tr.HKL {
		tr.Epsilon[i], tr.Centric[i] = 4, i < n
	}
	j := tr.wilson(resample.NewSeed(1).Stream(0))
	for k, want := range []float64{3, 2} {
		mean, sd := meanSD(j[k*n : (k+1)*n])
		floatcmp.Check(t, "mean", mean, 4, 0, 4*math.Sqrt((want-1)/n))
		floatcmp.Check(t, "second moment", 1+sd*sd/(mean*mean), want, 0, 0.06)
	}
}

func TestTiltThickens(t *testing.T) {
	p := small()
	p.Common.Exchange, p.Common.TiltThickens, p.Common.TiltZeroDeg = 0.2, true, 5
	s := invent(t, p)
	m := s.Specimens[0].Positions[0]
	sum := 0.0
	for i, u := range m.Unique {
		left := math.Pow(0.8, 1/math.Cos((m.Rows.Phi[i]-5)*math.Pi/180))
		sum += left
		floatcmp.Check(t, "exchange at tilt", m.Expected[i], 200*(left*s.Truth.J[u]+(1-left)*s.Truth.Local[u]), 0, 1e-10)
	}
	floatcmp.Check(t, "mean over the rows", m.ExchangeMean(), 1-sum/float64(m.Rows.Len()), 0, 1e-12)
	if !(m.ExchangeMean() > 0.22) {
		t.Errorf("a tilted slab exchanges %g", m.ExchangeMean())
	}
}

func TestScaleBAndOffset(t *testing.T) {
	p := small()
	q := &p.Crystals[0].Positions[1]
	q.Counts = 300
	q.LnScale, q.Cos, q.B, q.DoseB, q.Dose, q.Gain, q.Offset = 0.4, []float64{0.1, -0.05}, 1.5, 0.2, 3, 2.5, -0.02
	s := invent(t, p)
	m := s.Specimens[0].Positions[1]
	floatcmp.Check(t, "B", m.B, 2.1, 0, 1e-14)
	for i, u := range m.Unique {
		x := math.Pi * (m.Rows.Phi[i] + 60) / 120
		lnK := 0.4 + 0.1*math.Cos(x) - 0.05*math.Cos(2*x)
		want := 2.5 * 300 * (math.Exp(lnK-2*2.1*s.Truth.S2[u])*s.Truth.J[u] - 0.02)
		floatcmp.Check(t, "expected", m.Expected[i], want, 1e-9, 1e-12)
		floatcmp.Check(t, "noiseless row", m.Rows.I[i], m.Expected[i], 0, 0)
	}
	for i, phi := range m.AngleDeg {
		x := math.Pi * (phi + 60) / 120
		floatcmp.Check(t, "sampled ln K", m.LnK[i], math.Log(750)+0.4+0.1*math.Cos(x)-0.05*math.Cos(2*x), 1e-12, 0)
	}
}

func TestBleedComesFromNeighboursOnTheFrame(t *testing.T) {
	p := small()
	p.Common.FrameDeg = 3
	clean := invent(t, p).Specimens[0].Positions[1]
	p.Crystals[0].Positions[1].Bleed = 0.1
	m := invent(t, p).Specimens[0].Positions[1]
	changed := 0
	for i := range m.Expected {
		want := clean.Expected[i]
		for j := range clean.Expected {
			step := abs(int(m.Rows.H[i])-int(m.Rows.H[j])) + abs(int(m.Rows.K[i])-int(m.Rows.K[j])) + abs(int(m.Rows.L[i])-int(m.Rows.L[j]))
			if step == 1 && math.Abs(m.Rows.Phi[i]-m.Rows.Phi[j]) < 3 {
				want += 0.1 * clean.Expected[j]
			}
		}
		if want > clean.Expected[i] {
			changed++
		}
		floatcmp.Check(t, "bleed", m.Expected[i], want, 1e-9, 1e-10)
	}
	if changed < 100 {
		t.Errorf("only %d rows gained", changed)
	}
}

func abs(n int) int { return max(n, -n) }
