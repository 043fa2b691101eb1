package simulate

import (
	"math"
	"reflect"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

func TestCountingNoise(t *testing.T) {
	// Var = signal + background + background/area + readout^2; mean is the signal.
	for _, c := range []struct{ signal, background, area, readout, constant float64 }{
		{0, 5, 4, 0, 0}, {3, 0, 4, 0, 0}, {40, 20, 4, 0, 0}, {400, 20, 2, 6, -12}, {1e5, 30, 4, 3, 7},
	} {
		p := Position{Background: c.background, BackgroundArea: c.area, Readout: c.readout}
		r := resample.NewSeed(1).Stream(0)
		const n = 40000
		x, v := make([]float64, n), make([]float64, n)
		for i := range x {
			got, sigma, want, err := p.count(r, c.signal, c.constant)
			if err != nil {
				t.Fatal(err)
			}
			floatcmp.Check(t, "expected", want, c.signal+c.constant, 0, 0)
			x[i], v[i] = got, sigma*sigma
		}
		theory := c.signal + c.background + c.background/c.area + c.readout*c.readout
		mean, sd := meanSD(x)
		floatcmp.Check(t, "mean", mean, c.signal+c.constant, 4.5*math.Sqrt(theory/n), 0)
		floatcmp.Check(t, "variance", sd*sd, theory, 0, 4.5*math.Sqrt((2+1/math.Max(theory, 1))/n))
		said, _ := meanSD(v)
		if c.signal+c.background > 30 {
			floatcmp.Check(t, "reported variance", said, theory, 0, 0.01)
		}
	}
}

func TestDeadCountsAndTooManyElectrons(t *testing.T) {
	p := Position{Noiseless: true, BackgroundArea: 4, DeadCounts: 1e-3}
	_, _, want, err := p.count(nil, 500, 0)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "counts", want, 500/1.5, 0, 1e-14)
	p.DeadCounts = 0
	if _, _, _, err := p.count(nil, 1e16, 0); err == nil {
		t.Error("1e16 electrons passed")
	}
}

func TestSigmaFactorAndSmallestSigma(t *testing.T) {
	p := small()
	p.Common.Noiseless, p.Common.Background = false, 10
	a := invent(t, p).Specimens[0].Positions[0].Rows
	p.Common.SigmaFactor = 0.5
	b := invent(t, p).Specimens[0].Positions[0].Rows
	for i := range a.Sigma {
		floatcmp.Check(t, "sigma", b.Sigma[i], a.Sigma[i]/2, 0, 1e-14)
		floatcmp.Check(t, "intensity", b.I[i], a.I[i], 0, 0)
	}
	p = small()
	p.Common.Counts = 1e-3
	for _, s := range invent(t, p).Specimens[0].Positions[0].Rows.Sigma {
		if s < 1 {
			t.Fatalf("sigma %g is below one electron", s)
		}
	}
}

func TestRowsScatterAsTheirSigmas(t *testing.T) {
	p := small()
	p.DMin = 1.1
	p.Common.Noiseless, p.Common.Background, p.Common.Counts = false, 50, 2000
	m := invent(t, p).Specimens[0].Positions[0]
	var z []float64
	for i := range m.Rows.I {
		z = append(z, (m.Rows.I[i]-m.Expected[i])/m.Rows.Sigma[i])
	}
	mean, sd := meanSD(z)
	n := math.Sqrt(float64(len(z)))
	// Sigmas from the noisy count make the mean of z a little negative, about -1/(2 sigma).
	floatcmp.Check(t, "mean z", mean, -0.04, 4/n+0.04, 0)
	floatcmp.Check(t, "sd z", sd, 1, 3/n+0.01, 0)
}

func TestFreshErrors(t *testing.T) {
	p := small()
	p.DMin, p.Common.OmitForbidden = 1.1, true
	ratio := func(p *Plan) []float64 {
		m := invent(t, p).Specimens[0].Positions[0]
		var out []float64
		for i, u := range m.Unique {
			out = append(out, m.Expected[i]/(200*m.Law[u]))
		}
		return out
	}
	p.Common.Scatter = 0.25
	x := ratio(p)
	n := math.Sqrt(float64(len(x)))
	mean, sd := meanSD(x)
	floatcmp.Check(t, "mean of scatter", mean, 1, 4*0.25/n, 0)
	floatcmp.Check(t, "sd of scatter", sd, 0.25, 4*0.25/n, 0)
	p.Common.Scatter, p.Common.OutlierShare, p.Common.OutlierFactor = 0, 0.1, 4
	hits := 0.0
	for _, r := range ratio(p) {
		if floatcmp.Equal(r, 4, 0, 1e-9) {
			hits++
		} else if !floatcmp.Equal(r, 1, 0, 1e-9) {
			t.Fatalf("ratio %g", r)
		}
	}
	floatcmp.Check(t, "outliers", hits/float64(len(x)), 0.1, 4*0.3/n, 0)
	p.Common.OutlierShare, p.Common.FrameJitter = 0, 0.2
	m := invent(t, p).Specimens[0].Positions[0]
	byFrame := map[int32]float64{}
	var factor []float64
	for i, u := range m.Unique {
		r := m.Expected[i] / (200 * m.Law[u])
		if f, ok := byFrame[m.Rows.Frame[i]]; ok {
			floatcmp.Check(t, "frame factor", r, f, 0, 1e-9)
		} else {
			byFrame[m.Rows.Frame[i]] = r
			factor = append(factor, r)
		}
	}
	_, sd = meanSD(factor)
	floatcmp.Check(t, "sd of frames", sd, 0.2, 4*0.2/math.Sqrt(float64(len(factor))), 0)
}

func TestCopiesAreIdentical(t *testing.T) {
	p := small()
	p.Common.Noiseless = false
	once := invent(t, p).Specimens[0].Positions[0]
	p.Common.Copies = 3
	m := invent(t, p).Specimens[0].Positions[0]
	if m.Rows.Len() != 3*once.Rows.Len() {
		t.Fatalf("%d rows from %d observations", m.Rows.Len(), once.Rows.Len())
	}
	for i := range m.Rows.I {
		o := int(m.Observation[i])
		if o != i/3 || m.Rows.I[i] != once.Rows.I[o] || m.Rows.Sigma[i] != once.Rows.Sigma[o] || m.Rows.H[i] != once.Rows.H[o] {
			t.Fatalf("row %d is no copy of observation %d", i, o)
		}
		if i%3 > 0 {
			if m.Rows.Frame[i] != m.Rows.Frame[i-1]+1 {
				t.Fatalf("row %d is not on the next frame", i)
			}
			floatcmp.Check(t, "angle step", m.Rows.Phi[i]-m.Rows.Phi[i-1], 0.5, 1e-9, 0)
		}
		if f := m.Rows.Frame[i]; f < 1 || f > 240 {
			t.Fatalf("row %d on frame %d", i, f)
		}
	}
}

func TestNegativesAreCut(t *testing.T) {
	p := small()
	p.Common.Noiseless, p.Common.Background, p.Common.Counts = false, 100, 30
	all := invent(t, p).Specimens[0].Positions[0]
	for _, k := range []float64{0, 2, -1} {
		p.Common.CutBelow = &k
		m := invent(t, p).Specimens[0].Positions[0]
		below := 0
		for i := range all.Rows.I {
			if all.Rows.I[i] < k*all.Rows.Sigma[i] {
				below++
			}
		}
		if below == 0 || m.Removed != below || m.Rows.Len() != all.Rows.Len()-below {
			t.Errorf("cut at %g: removed %d, want %d, left %d of %d", k, m.Removed, below, m.Rows.Len(), all.Rows.Len())
		}
		for i := range m.Rows.I {
			if m.Rows.I[i] < k*m.Rows.Sigma[i] {
				t.Fatalf("row %d of %g sigma is left", i, m.Rows.I[i]/m.Rows.Sigma[i])
			}
		}
	}
}

func TestForbiddenRecordedOrNot(t *testing.T) {
	count := func(m *Measured, s *Series) (n int) {
		for _, u := range m.Unique {
			if s.Truth.Absent[u] {
				n++
			}
		}
		return n
	}
	for _, c := range []struct {
		symbol     string
		omit, with bool
		some, most bool // some absences, more absences than a third of the rows
	}{
		{"P 21 21 21", false, false, true, false}, {"P 21 21 21", true, false, false, false},
		{"C 1 2/c 1", false, false, true, false}, {"C 1 2/c 1", false, true, true, true},
		{"C 1 2/c 1", true, true, true, true}, {"C 1 2/c 1", true, false, false, false},
	} {
		p := small()
		p.SpaceGroup, p.Common.OmitForbidden, p.Common.WithCentring = c.symbol, c.omit, c.with
		s := invent(t, p)
		m := &s.Specimens[0].Positions[0]
		n := count(m, s)
		if (n > 0) != c.some || (n > m.Rows.Len()/3) != c.most {
			t.Errorf("%+v: %d of %d rows are absent", c, n, m.Rows.Len())
		}
	}
}

func TestReindexWritesOtherIndices(t *testing.T) {
	p := small()
	p.SpaceGroup, p.Cell.B = "P 41", p.Cell.A
	plain := invent(t, p).Specimens[0].Positions[1]
	p.Crystals[0].Positions[1].Reindex = "k,h,-l"
	m := invent(t, p).Specimens[0].Positions[1]
	for i := range m.Rows.H {
		got := crystal.HKL{H: int(m.Rows.H[i]), K: int(m.Rows.K[i]), L: int(m.Rows.L[i])}
		want := crystal.HKL{H: int(plain.Rows.K[i]), K: int(plain.Rows.H[i]), L: -int(plain.Rows.L[i])}
		if got != want || m.Rows.I[i] != plain.Rows.I[i] {
			t.Fatalf("row %d is %v, want %v", i, got, want)
		}
	}
	if reflect.DeepEqual(m.Rows.H, plain.Rows.H) {
		t.Error("nothing was re-indexed")
	}
}

func TestLorentzKeepsTheMeanAndChangesTheNoise(t *testing.T) {
	p := small()
	plain := invent(t, p).Specimens[0].Positions[0]
	p.Common.Lorentz = true
	m := invent(t, p).Specimens[0].Positions[0]
	if m.Rows.Len() >= plain.Rows.Len() {
		t.Error("nothing was too near the axis")
	}
	at := map[[4]float64]int{}
	for i := range plain.Rows.I {
		at[[4]float64{float64(plain.Rows.H[i]), float64(plain.Rows.K[i]), float64(plain.Rows.L[i]), plain.Rows.Phi[i]}] = i
	}
	better := 0
	for i := range m.Rows.I {
		j, ok := at[[4]float64{float64(m.Rows.H[i]), float64(m.Rows.K[i]), float64(m.Rows.L[i]), m.Rows.Phi[i]}]
		if !ok {
			t.Fatal("a row of its own")
		}
		floatcmp.Check(t, "expected", m.Expected[i], plain.Expected[j], 1e-12, 1e-12)
		if m.Rows.Sigma[i] < plain.Rows.Sigma[j] {
			better++
		}
	}
	if better < m.Rows.Len()*9/10 {
		t.Errorf("only %d of %d rows gained precision", better, m.Rows.Len())
	}
}

func TestIceRingsStandAtTheirPlaces(t *testing.T) {
	at := func(d float64) float64 { return iceAt(1 / (4 * d * d)) }
	floatcmp.Check(t, "on a ring", at(3.9), 1, 1e-3, 0)
	floatcmp.Check(t, "one width off", at(3.9*1.015), math.Exp(-0.5), 1e-3, 0)
	floatcmp.Check(t, "off all rings", at(3.0), 0, 1e-9, 0)
	p := small()
	plain := invent(t, p).Specimens[0].Positions[0]
	p.Common.Ice = 0.5
	s := invent(t, p)
	m := s.Specimens[0].Positions[0]
	for i, u := range m.Unique {
		floatcmp.Check(t, "ice", m.Expected[i]-plain.Expected[i], 100*iceAt(s.Truth.S2[u]), 1e-9, 0)
	}
}

// An exchange of 30 % fills what the glide of C 1 2/c 1 forbids, and nothing where the
// centring forbids, as no lattice point is there: only the offset, in units of Counts.
func TestExchangeFillsNoCentringAbsence(t *testing.T) {
	p := small()
	p.SpaceGroup, p.Common.WithCentring = "C 1 2/c 1", true
	p.Common.Exchange = 0.3
	for _, offset := range []float64{0, 0.05} {
		p.Common.Offset = offset
		s := invent(t, p)
		m := &s.Specimens[0].Positions[0]
		var sum, n [2]float64
		for i, u := range m.Unique {
			h := s.Truth.HKL[u]
			if !s.Truth.Absent[u] {
				continue
			}
			k := 0
			if (h.H+h.K)%2 != 0 {
				k = 1
			}
			sum[k] += m.Rows.I[i]
			n[k]++
		}
		if n[0] < 5 || n[1] < 500 {
			t.Fatalf("%g of the glide, %g of the centring", n[0], n[1])
		}
		counts := s.Plan.Crystals[0].Positions[0].Counts
		floatcmp.Check(t, "centring", sum[1]/n[1]/counts, offset, 1e-12, 0)
		if glide := sum[0]/n[0]/counts - offset; !(glide > 0.1 && glide < 0.4) {
			t.Errorf("the glide's are filled with %.3f of Counts", glide)
		}
	}
}
