package analysis

import (
	"context"
	"fmt"
	"math"
	"os"
	"strconv"
	"testing"

	"thinward/analysis/internal/parallel"
	"thinward/analysis/simulate"
)

// cell is one kind of series of the calibration. sigma is the factor on the
// reported sigmas of the thin position, offset and curb are those of the thick one.
type cell struct{ m, deviation, sigma, offset, curb float64 }

func cells() []cell {
	var out []cell
	for _, deviation := range []float64{0, 0.3} {
		for _, sigma := range []float64{1, 0.5, 2} {
			for _, offset := range []float64{0, 0.01} {
				for _, curb := range []float64{0, 0.02} {
					for _, m := range []float64{0, 0.05, 0.15} {
						out = append(out, cell{m, deviation, sigma, offset, curb})
					}
				}
			}
		}
	}
	return out
}

// plan is a null series, its middle position half way to the thick one.
func (c cell) plan(seed uint64) *simulate.Plan {
	p := simulate.Null(seed)
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

// hits gathers intervals of one number.
type hits struct {
	n, held            int
	sum, square, claim float64
}

func (a *hits) add(v, lo, hi, truth float64) {
	a.n++
	if lo <= truth && truth <= hi {
		a.held++
	}
	d := v - truth
	a.sum += d
	a.square += d * d
	a.claim += (hi - lo) / (2 * zOf(0.95))
}

func (a *hits) share() float64 { return float64(a.held) / float64(a.n) }
func (a *hits) bias() float64  { return a.sum / float64(a.n) }
func (a *hits) ratio() float64 {
	n := float64(a.n)
	return a.claim / n / math.Sqrt(a.square/n-a.bias()*a.bias())
}

func (a *hits) join(b *hits) {
	a.n, a.held = a.n+b.n, a.held+b.held
	a.sum, a.square, a.claim = a.sum+b.sum, a.square+b.square, a.claim+b.claim
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

// repeats is the number of series of each kind, THINWARD_REPEATS or otherwise.
func repeats(otherwise int) int {
	if n, err := strconv.Atoi(os.Getenv("THINWARD_REPEATS")); err == nil && n > 0 {
		return n
	}
	return otherwise
}

// three, two and one are the crystals of the series.
type covered struct{ three, two, one hits }

func (c cell) measure(t *testing.T, n int, first uint64) *covered {
	out := &covered{}
	type answers struct{ three, two, one []Exchange }
	got := make([]answers, n)
	err := parallel.For(context.Background(), n, 0, func(ctx context.Context, k int) error {
		s, err := New(seriesOf(t, c.plan(first+uint64(k))), &Settings{Workers: 1, Replicates: 50, Flips: 50})
		if err != nil {
			return err
		}
		if _, err := s.Scale(ctx); err != nil {
			return err
		}
		read := func(s *Study, into *[]Exchange) error {
			for _, contrast := range s.primaryContrasts() {
				x, err := s.paired(ctx, contrast)
				if err != nil {
					return err
				}
				if err := s.sizes(ctx, x); err != nil {
					return err
				}
				*into = append(*into, x.Result.Exchange)
			}
			return nil
		}
		if err := read(s, &got[k].three); err != nil {
			return err
		}
		if err := read(some(t, s, 0, 2), &got[k].two); err != nil {
			return err
		}
		for i := range s.Series.Crystals {
			if err := read(some(t, s, i, i+1), &got[k].one); err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	for k := range got {
		for _, e := range got[k].three {
			out.three.add(e.M, e.Lo, e.Hi, c.m)
		}
		for _, e := range got[k].two {
			out.two.add(e.M, e.Lo, e.Hi, c.m)
		}
		for _, e := range got[k].one {
			out.one.add((e.Lo+e.Hi)/2, e.Lo, e.Hi, c.m)
		}
	}
	return out
}

func (v *covered) join(w *covered) {
	v.three.join(&w.three)
	v.two.join(&w.two)
	v.one.join(&w.one)
}

func (v *covered) row() string {
	return fmt.Sprintf("%d | %.3f | %+.4f | %.2f | %.3f | %+.4f | %.3f |", v.three.n, v.three.share(), v.three.bias(), v.three.ratio(), v.two.share(), v.two.bias(), v.one.share())
}

// The interval of m covers the truth in every kind of series. THINWARD_REPEATS sets
// the number of series of each kind; the tables are those of DEVELOPERS.md, first of
// every kind, then of all kinds that have one thing in common.
func TestCoverageGrid(t *testing.T) {
	if !full() {
		t.Skip("THINWARD_FULL=1 runs it")
	}
	n := repeats(8)
	rows, common := "", map[string]*covered{}
	var names []string
	for k, c := range cells() {
		t.Run(fmt.Sprintf("m=%g/deviation=%g/sigma=%g/offset=%g/curb=%g", c.m, c.deviation, c.sigma, c.offset, c.curb), func(t *testing.T) {
			// Series of their own: kinds that share them would not be so many repeats.
			v := c.measure(t, n, uint64(1000*k+1))
			rows += fmt.Sprintf("\n| %.2f | %.0f %% | %g | %.0f %% | %g | %s", c.m, 100*c.deviation, c.sigma, 100*c.offset, c.curb, v.row())
			for _, name := range []string{"all", fmt.Sprintf("m = %g", c.m), fmt.Sprintf("deviations of %.0f %%", 100*c.deviation), fmt.Sprintf("thin sigmas times %g", c.sigma),
				fmt.Sprintf("offset of %.0f %%", 100*c.offset), fmt.Sprintf("curb of %g", c.curb)} {
				if common[name] == nil {
					common[name] = &covered{}
					names = append(names, name)
				}
				common[name].join(v)
			}
			if s := v.three.share(); s < 0.92-limit(0.92, v.three.n) || s > 0.98+limit(0.98, v.three.n) {
				t.Logf("%s covers in %.3f", t.Name(), s)
			}
		})
	}
	t.Log(rows)
	rows = ""
	for _, name := range names {
		rows += fmt.Sprintf("\n| %s | %s", name, common[name].row())
		v := common[name]
		if s := v.three.share(); s < 0.92-limit(0.92, v.three.n) || s > 0.98+limit(0.98, v.three.n) {
			t.Errorf("%s: the interval of m covers in %.3f", name, s)
		}
	}
	t.Log(rows)
}

// Curves of null series: the test rejects at its level, the simultaneous band holds
// 0 everywhere at its own.
func TestNullCurves(t *testing.T) {
	if !full() {
		t.Skip("THINWARD_FULL=1 runs it")
	}
	n := repeats(400)
	for _, kind := range []struct {
		name string
		plan func(seed uint64) *simulate.Plan
	}{
		{"deviations of 30 %", simulate.Null},
		{"deviations of 10, 20, 30 %", rising},
		{"no deviations", func(seed uint64) *simulate.Plan { return cell{sigma: 1}.plan(seed) }},
		{"thin sigmas halved", func(seed uint64) *simulate.Plan { return cell{deviation: 0.3, sigma: 0.5}.plan(seed) }},
	} {
		t.Run(kind.name, func(t *testing.T) {
			first, any, all, held := make([]int, n), make([]int, n), make([]int, n), make([]int, n)
			err := parallel.For(context.Background(), n, 0, func(ctx context.Context, k int) error {
				s, err := New(seriesOf(t, kind.plan(uint64(k+1))), &Settings{Workers: 1, Replicates: 400, Flips: 1000})
				if err != nil {
					return err
				}
				if _, err := s.Scale(ctx); err != nil {
					return err
				}
				for i, c := range s.primaryContrasts() {
					x, err := s.paired(ctx, c)
					if err != nil {
						return err
					}
					if err := s.curves(ctx, x); err != nil {
						return err
					}
					v := x.Result.Strength
					if v.P < 0.05 {
						any[k] = 1
						all[k]++
						if i == 0 {
							first[k] = 1
						}
					}
					if within(v.LoSim, v.HiSim) {
						held[k]++
					}
				}
				return nil
			})
			if err != nil {
				t.Fatal(err)
			}
			share := func(v []int, of int) float64 { return float64(total(v)) / float64(of) }
			t.Logf("| %s | %d | %.3f | %.3f | %.3f | %.3f |", kind.name, n, share(first, n), share(all, 3*n), share(any, n), share(held, 3*n))
			if p := share(all, 3*n); p < 0.03-limit(0.05, 3*n) || p > 0.08+limit(0.05, 3*n) {
				t.Errorf("p < 0.05 in %.3f", p)
			}
			if h := share(held, 3*n); h < 0.90-limit(0.95, 3*n) || h > 0.98+limit(0.95, 3*n) {
				t.Errorf("bands hold in %.3f", h)
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

func total(v []int) int {
	sum := 0
	for _, x := range v {
		sum += x
	}
	return sum
}
