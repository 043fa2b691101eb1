package analysis

import (
	"context"
	"fmt"
	"math"
	"slices"
	"testing"

	"thinward/analysis/internal/parallel"
	"thinward/analysis/resample"
	"thinward/analysis/simulate"
)

// cell is one kind of series of the calibration. sigma is the factor on the
// reported sigmas of the thin position, offset and curb are those of the thick one. The
// exchange is with the mean of the law, as the interval takes it; with sample it is with that
// of just these reflections.
type cell struct {
	m, deviation, sigma, offset, curb float64
	sample                            bool
}

func cells() []cell {
	var out []cell
	for _, deviation := range []float64{0, 0.3} {
		for _, sigma := range []float64{1, 0.5, 2} {
			for _, offset := range []float64{0, 0.01} {
				for _, curb := range []float64{0, 0.02} {
					for _, m := range []float64{0, 0.05, 0.15} {
						out = append(out, cell{m: m, deviation: deviation, sigma: sigma, offset: offset, curb: curb})
					}
				}
			}
		}
	}
	return out
}

func (c cell) String() string {
	return fmt.Sprintf("m=%g/deviation=%g/sigma=%g/offset=%g/curb=%g", c.m, c.deviation, c.sigma, c.offset, c.curb)
}

// plan is a null series, its middle position half way to the thick one. Intensities are
// those of Wilson's law, whose shell means fall by 8 times to the resolution limit as
// those of atoms do.
func (c cell) plan(seed uint64) *simulate.Plan {
	p := simulate.Null(seed)
	p.Structure = simulate.Structure{Wilson: true, B: 7}
	p.Population = !c.sample
	p.Common.Deviation = math.Max(c.deviation, 1e-9)
	for i := range p.Crystals {
		at := p.Crystals[i].Positions
		at[0].SigmaFactor = c.sigma
		for j := range at {
			share := float64(j) / 2
			at[j].Exchange, at[j].Offset, at[j].Curb = share*c.m, share*c.offset, share*c.curb
		}
	}
	return p
}

// some is a study of the first crystals of s, on the scales of s.
func some(t testing.TB, s *Study, from, to int) *Study {
	t.Helper()
	series := s.Series
	series.Crystals = series.Crystals[from:to]
	set := s.settings
	out, err := New(series, &set)
	if err != nil {
		t.Fatal(err)
	}
	in := *s.intake
	in.Positions = in.Positions[from:to]
	out.intake, out.scaled = &in, s.scaled[from:to]
	return out
}

// paired is one contrast as far as its pairs and their strengths.
func (s *Study) paired(ctx context.Context, c Contrast) (*Compared, error) {
	x := &Compared{Contrast: c}
	sc := s.scaled[c.Crystal]
	x.thin, x.thick = sc.Positions[c.Thin], sc.Positions[c.Thick]
	x.b = [2]float64{sc.Fit.B[sc.slot[c.Thin]], sc.Fit.B[sc.slot[c.Thick]]}
	if err := s.pair(ctx, x); err != nil {
		return nil, err
	}
	if err := s.chooseAxis(x); err != nil {
		return nil, err
	}
	if err := x.refit(ctx); err != nil {
		return nil, err
	}
	s.describe(x)
	return x, nil
}

// nullKinds are the kinds of series in which nothing changes with thickness.
func nullKinds() []nullKind {
	return []nullKind{
		{"no deviations", func(seed uint64) *simulate.Plan { return cell{sigma: 1}.plan(seed) }},
		{"sound: deviations of 5 %, scatter of 4 %", simulate.Sound},
		{"deviations of 30 % in every position", simulate.Null},
		{"deviations of 10, 20, 30 % from thin to thick", rising},
		{"deviations of 30 %, thin sigmas halved", func(seed uint64) *simulate.Plan { return cell{deviation: 0.3, sigma: 0.5}.plan(seed) }},
	}
}

type nullKind struct {
	name string
	plan func(seed uint64) *simulate.Plan
}

// nullSeen counts what the curves of null series say: p < 0.05 in the first crystal, in
// all contrasts, in any of a series and after Holm's correction over its contrasts; and
// simultaneous bands that hold 0 everywhere.
type nullSeen struct {
	first, any, holm int
	all, held        hits
}

func (v *nullSeen) take(p []float64, held []bool) error {
	adjusted, err := resample.Holm(p)
	if err != nil {
		return err
	}
	v.all.open()
	v.held.open()
	if p[0] < 0.05 {
		v.first++
	}
	if slices.Min(p) < 0.05 {
		v.any++
	}
	if slices.Min(adjusted) < 0.05 {
		v.holm++
	}
	for i := range p {
		v.all.add(0, 0, p[i], 0.05-1e-12) // held when p is at least 0.05
		v.held.add(0, 0, map[bool]float64{false: -1}[held[i]], 0)
	}
	return nil
}

func (k nullKind) measure(t *testing.T, n int) *nullSeen {
	p, held := make([][]float64, n), make([][]bool, n)
	err := parallel.For(context.Background(), n, 0, func(ctx context.Context, i int) error {
		s, err := New(seriesOf(t, k.plan(uint64(i+1))), &Settings{Workers: 1, Replicates: 400, Flips: 1000})
		if err != nil {
			return err
		}
		if _, err := s.Scale(ctx); err != nil {
			return err
		}
		for _, c := range s.primaryContrasts() {
			c.Primary = false // no angle blocks
			x, err := s.paired(ctx, c)
			if err != nil {
				return err
			}
			if err := s.curves(ctx, x); err != nil {
				return err
			}
			v := x.Result.Strength
			p[i], held[i] = append(p[i], v.P), append(held[i], within(v.LoSim, v.HiSim))
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	out := &nullSeen{}
	for i := range p {
		if err := out.take(p[i], held[i]); err != nil {
			t.Fatal(err)
		}
	}
	return out
}

// Curves of null series: the test rejects at its level, the simultaneous band holds
// 0 everywhere at its own.
func TestNullCurves(t *testing.T) {
	if !full() {
		t.Skip("THINWARD_FULL=1 runs it")
	}
	n := repeats(400)
	for _, kind := range nullKinds() {
		t.Run(kind.name, func(t *testing.T) {
			v := kind.measure(t, n)
			p, h := 1-v.all.share(), v.held.share()
			lo, hi := v.all.interval()
			share := func(k int) float64 { return float64(k) / float64(n) }
			t.Logf("| %s | %d | %.3f | %.3f | %.3f-%.3f | %.3f | %.3f | %.3f |", kind.name, n, share(v.first), p, 1-hi, 1-lo, share(v.any), share(v.holm), h)
			if p < 0.03-limit(0.05, 3*n) || p > 0.08+limit(0.05, 3*n) {
				t.Errorf("p < 0.05 in %.3f", p)
			}
			if h < 0.90-limit(0.95, 3*n) || h > 0.98+limit(0.95, 3*n) {
				t.Errorf("bands hold in %.3f", h)
			}
			if w := share(v.holm); w > 0.05+limit(0.05, n) {
				t.Errorf("after Holm a curve is called not flat in %.3f of series", w)
			}
		})
	}
}

// limit is two standard errors of a share of n.
func limit(p float64, n int) float64 { return 2 * math.Sqrt(p*(1-p)/float64(n)) }

func within(lo, hi []float64) bool {
	for g := range lo {
		if lo[g] > 0 || hi[g] < 0 {
			return false
		}
	}
	return true
}
