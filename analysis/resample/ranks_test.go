package resample

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

var depression = func() []float64 { // Hollander & Wolfe 1973, p. 29: x - y
	x := []float64{1.83, 0.50, 1.62, 2.48, 1.68, 1.88, 1.55, 3.06, 1.30}
	y := []float64{0.878, 0.647, 0.598, 2.05, 1.06, 1.29, 1.06, 3.14, 1.29}
	for i := range x {
		x[i] -= y[i]
	}
	return x
}()

type check struct {
	what           string
	got, want, tol float64
}

func checkAll(t *testing.T, list []check) {
	t.Helper()
	for _, c := range list {
		floatcmp.Check(t, c.what, c.got, c.want, c.tol, 0)
	}
}

// Sources: Fisher 1935 (863 of 32768), R 4.2.2 wilcox.test, exactRankTests.
func TestSigns(t *testing.T) {
	flips := must[*RankTest](t)(SignFlips(darwin))
	sign := must[*RankTest](t)(SignTest(darwin))
	rank := must[*RankTest](t)(SignedRank(darwin))
	small := must[*RankTest](t)(SignFlips(sleep))
	dep := must[*RankTest](t)(SignedRank(depression))
	depSum := must[*RankTest](t)(SignFlips(depression))
	three := must[*RankTest](t)(SignTest([]float64{1, 2, 3}))
	checkAll(t, []check{
		{"darwin sum", flips.Stat, 314, 0},
		{"darwin upper", flips.Upper, 863.0 / 32768, 0},
		{"darwin two-sided", flips.P, 1726.0 / 32768, 0},
		{"darwin lower", flips.Lower, 1 - 835.0/32768, 0},
		{"sign test, 13 of 15", sign.P, 0.00738525390625, 1e-16},
		{"darwin V", rank.Stat, 96, 0},
		{"darwin signed rank", rank.P, 1352.0 / 32768, 1e-15},
		{"darwin signed rank normal", 2 * normCDF(-rank.Z), 0.0408881329, 1e-9},
		{"sleep two-sided", small.P, 4.0 / 1024, 0},
		{"depression V", dep.Stat, 40, 0},
		{"depression upper", dep.Upper, 0.01953125, 0},
		{"depression two-sided", dep.P, 0.0390625, 0},
		{"depression sum, upper", depSum.Upper, 7.0 / 512, 0},
		{"depression Hodges-Lehmann", must[float64](t)(HodgesLehmann(depression)), 0.46, 1e-12},
		{"darwin Hodges-Lehmann", must[float64](t)(HodgesLehmann(darwin)), 25, 0},
		{"three crystals cannot be significant by sign", three.Smallest, 0.25, 0},
		{"three crystals", three.P, 0.25, 0},
		{"three differences, flips", must[*RankTest](t)(SignFlips([]float64{1, 2, 3})).Smallest, 0.25, 0},
	})
}

// The exact signed-rank law against flipping the ranks one by one.
func TestSignedRankTies(t *testing.T) {
	d := []float64{1, -1, 2, 2, -3, 0, 4, 4, 5}
	got := must[*RankTest](t)(SignedRank(d))
	if got.N != 8 {
		t.Errorf("%d differences", got.N)
	}
	r, _ := MidRanks([]float64{1, 1, 2, 2, 3, 4, 4, 5})
	for i, v := range []float64{1, -1, 2, 2, -3, 4, 4, 5} {
		r[i] = math.Copysign(r[i], v)
	}
	by := must[*RankTest](t)(SignFlips(r))
	floatcmp.Check(t, "upper", got.Upper, by.Upper, 1e-14, 0)
	floatcmp.Check(t, "lower", got.Lower, by.Lower, 1e-14, 0)
	big := normals(250, 3)
	if n := must[*RankTest](t)(SignedRank(big)); n.Exact || !math.IsNaN(n.Smallest) {
		t.Error("250 differences said to be exact")
	}
	near := must[*RankTest](t)(SignedRank(big[:200]))
	floatcmp.Check(t, "exact against normal at n = 200", near.Upper, normCDF(-near.Z), 0.002, 0)
}

func TestPageExample(t *testing.T) {
	rows := [][]float64{{3, 4, 3}, {2, 2, 4}, {3, 3, 5}, {1, 3, 2}, {2, 3, 2}, {2, 4, 5}, {1, 2, 4}, {3, 4, 4}, {2, 4, 5}, {1, 3, 4}}
	p := must[*RankTest](t)(Page(rows))
	checkAll(t, []check{
		{"L (scipy documentation)", p.Stat, 133.5, 0},
		{"mean", p.Expected, 120, 1e-12},
		{"variance given ties", p.Var, 17.5, 1e-12},
		{"exact given ties", p.Upper, 0.000384214805, 1e-12},
	})
	for _, r := range rows { // a fall is a rise read backwards
		r[0], r[2] = r[2], r[0]
	}
	q := must[*RankTest](t)(Page(rows))
	floatcmp.Check(t, "mirrored", q.Lower, p.Upper, 1e-15, 0)
	floatcmp.Check(t, "mirrored", q.Z, -p.Z, 1e-12, 0)
}

// Page 1963, Table 2, and Odeh 1977: the least L whose tail is at most alpha, 0
// where there is none.
func TestPageTable(t *testing.T) {
	for _, c := range []struct {
		k, n int
		want [3]int
	}{
		{3, 2, [3]int{28, 0, 0}}, {3, 3, [3]int{41, 42, 0}}, {3, 4, [3]int{54, 55, 56}}, {3, 5, [3]int{66, 68, 70}},
		{3, 6, [3]int{79, 81, 83}}, {3, 7, [3]int{91, 93, 96}}, {3, 8, [3]int{104, 106, 109}}, {3, 9, [3]int{116, 119, 121}},
		{3, 10, [3]int{128, 131, 134}}, {3, 12, [3]int{153, 156, 160}}, {3, 15, [3]int{190, 194, 197}}, {3, 20, [3]int{251, 256, 260}},
		{4, 2, [3]int{58, 60, 0}}, {4, 3, [3]int{84, 87, 89}}, {4, 4, [3]int{111, 114, 117}}, {4, 5, [3]int{137, 141, 145}},
		{4, 6, [3]int{163, 167, 172}}, {4, 7, [3]int{189, 193, 198}}, {4, 8, [3]int{214, 220, 225}}, {4, 9, [3]int{240, 246, 252}},
		{4, 10, [3]int{266, 272, 278}},
	} {
		ties := make([]int, c.k)
		for i := range ties {
			ties[i] = 1
		}
		row, total := pageRow(ties, c.k), point(0)
		for range c.n {
			total = total.plus(row)
		}
		for i, alpha := range []float64{.05, .01, .001} {
			if c.want[i] == 0 {
				continue
			}
			if at, under := total.upper(2*c.want[i]), total.upper(2*(c.want[i]-1)); !(at <= alpha && under > alpha) {
				t.Errorf("k %d n %d alpha %g: P(L >= %d) = %g, one less %g", c.k, c.n, alpha, c.want[i], at, under)
			}
		}
		if c.k == 3 && c.n == 10 {
			floatcmp.Check(t, "P(L >= 134)", total.upper(268), 0.000737, 5e-7, 0)
		}
		if c.k == 3 && c.n == 5 {
			floatcmp.Check(t, "P(L >= 66)", total.upper(132), 0.039352, 5e-7, 0)
		}
	}
}

func TestPageManyColumns(t *testing.T) {
	rows := make([][]float64, 6)
	for i := range rows {
		rows[i] = normals(11, uint64(i))
	}
	wide := must[*RankTest](t)(Page(rows))
	if wide.Exact {
		t.Error("eleven columns said to be exact")
	}
	for i := range rows {
		rows[i] = rows[i][:10]
	}
	ten := must[*RankTest](t)(Page(rows))
	if !ten.Exact {
		t.Error("ten columns not exact")
	}
	floatcmp.Check(t, "exact against normal", ten.Upper, normCDF(-ten.Z), 0.01, 0)
}

// Hundal 1969; Hollander & Wolfe, Table 6.6. Exact value by enumeration.
func TestJonckheere(t *testing.T) {
	j := must[*RankTest](t)(Jonckheere([][]float64{{40, 35, 38, 43, 44, 41}, {38, 40, 47, 44, 40, 42}, {48, 40, 45, 43, 46, 44}}))
	_, noTies := jonckheereMoments([]int{6, 6, 6}, nil, 18)
	checkAll(t, []check{
		{"J", j.Stat, 79, 0},
		{"mean", j.Expected, 54, 1e-12},
		{"variance with ties", j.Var, 150.286764706, 1e-9},
		{"variance without", noTies, 153, 1e-12},
		{"z", j.Z, 2.03929305884, 1e-10},
		{"normal p", normCDF(-j.Z), 0.0207103940, 1e-9},
		{"exact p", j.Upper, 359641.0 / 17153136, 1e-12},
	})
	var big [][]float64
	for i := range 4 {
		big = append(big, normals(30, uint64(i)))
	}
	n := must[*RankTest](t)(Jonckheere(big))
	if n.Exact {
		t.Error("four groups of 30 said to be exact")
	}
	floatcmp.Check(t, "normal", n.Upper+n.Lower, 1, 1e-12, 0)
}

// Cloud seeding (Smith 1967; Hollander & Wolfe, example 9.1); Nile flow 1871-1970.
func TestTrend(t *testing.T) {
	cloud := []float64{1.26, 1.27, 1.12, 1.16, 1.03}
	k := must[*RankTest](t)(MannKendall(cloud))
	slope, _, err := TheilSen([]float64{1, 2, 3, 4, 5}, cloud)
	if err != nil {
		t.Fatal(err)
	}
	river := must[*RankTest](t)(MannKendall(nile))
	year := make([]float64, len(nile))
	for i := range year {
		year[i] = float64(i)
	}
	sen, at0, err := TheilSen(year, nile)
	if err != nil {
		t.Fatal(err)
	}
	checkAll(t, []check{
		{"S", k.Stat, -6, 0},
		{"tau", must[float64](t)(TauB(cloud)), -0.6, 1e-15},
		{"exact p", k.Lower, 14.0 / 120, 1e-15},
		{"slope", slope, -0.05625, 1e-12},
		{"Nile S", river.Stat, -1387, 0},
		{"Nile variance", river.Var, 112728.333333, 1e-6},
		{"Nile z", river.Z, -4.13104492582, 1e-10},
		{"Nile tau-b", must[float64](t)(TauB(nile)), -0.280741334725, 1e-11},
		{"Nile slope", sen, -2.6, 1e-12},
		{"Nile intercept, median - slope median", at0, 893.5 + 2.6*49.5, 1e-9},
	})
}

// With ties: every arrangement of the same values.
func TestMannKendallTies(t *testing.T) {
	values := []float64{3, 1, 2, 2, 5, 1, 2}
	got := must[*RankTest](t)(MannKendall(values))
	var ge, le, all float64
	var walk func(i int)
	x := append([]float64(nil), values...)
	walk = func(i int) {
		if i == len(x) {
			s := 0.0
			for a := range x {
				for b := range a {
					switch {
					case x[a] > x[b]:
						s++
					case x[a] < x[b]:
						s--
					}
				}
			}
			all++
			if s >= got.Stat {
				ge++
			}
			if s <= got.Stat {
				le++
			}
			return
		}
		for j := i; j < len(x); j++ {
			x[i], x[j] = x[j], x[i]
			walk(i + 1)
			x[i], x[j] = x[j], x[i]
		}
	}
	walk(0)
	floatcmp.Check(t, "upper", got.Upper, ge/all, 1e-14, 0)
	floatcmp.Check(t, "lower", got.Lower, le/all, 1e-14, 0)
}

func TestMidRanks(t *testing.T) {
	r, err := MidRanks([]float64{3, 1, 3, 2, 3})
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.CheckSlice(t, "ranks", r, []float64{4, 1, 4, 2, 4}, 0, 0)
}

func TestRankErrors(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		want string
		err  error
	}{
		{"resample: MidRanks: value 1 is NaN", second(MidRanks([]float64{1, nan}))},
		{"resample: SignTest: no difference other than zero", second(SignTest([]float64{0}))},
		{"resample: SignedRank: difference 0 is NaN", second(SignedRank([]float64{nan}))},
		{"resample: SignFlips: 0 differences, need 1 to 24", second(SignFlips(nil))},
		{"resample: SignFlips: difference 1 is +Inf", second(SignFlips([]float64{1, math.Inf(1)}))},
		{"resample: HodgesLehmann: no values", second(HodgesLehmann(nil))},
		{"resample: HodgesLehmann: value 0 is NaN", second(HodgesLehmann([]float64{nan}))},
		{"resample: Page: need at least one row of two columns", second(Page(nil))},
		{"resample: Page: row 1 has 1 columns, the first 2", second(Page([][]float64{{1, 2}, {1}}))},
		{"resample: Page: row 0: resample: MidRanks: value 1 is NaN", second(Page([][]float64{{1, nan}}))},
		{"resample: Jonckheere: 1 groups, need two", second(Jonckheere([][]float64{{1}}))},
		{"resample: Jonckheere: group 1 is empty", second(Jonckheere([][]float64{{1}, {}}))},
		{"resample: Jonckheere: group 1 value 0 is NaN", second(Jonckheere([][]float64{{1}, {nan}}))},
		{"resample: MannKendall: 1 points, need two", second(MannKendall([]float64{1}))},
		{"resample: MannKendall: value 1 is NaN", second(MannKendall([]float64{1, nan}))},
		{"resample: Holm: p-value 1 is 1.5", second(Holm([]float64{0, 1.5}))},
		{"resample: BenjaminiHochberg: p-value 0 is NaN", second(BenjaminiHochberg([]float64{nan}))},
	} {
		if c.err == nil || c.err.Error() != c.want {
			t.Errorf("error %v, want %q", c.err, c.want)
		}
	}
	if _, _, err := TheilSen([]float64{1, 1}, []float64{1, 2}); err == nil || err.Error() != "resample: TheilSen: no two different x" {
		t.Errorf("error %v", err)
	}
}

func second[T any](_ T, err error) error { return err }

// R `Nile`, annual flow 1871-1970.
var nile = []float64{1120, 1160, 963, 1210, 1160, 1160, 813, 1230, 1370, 1140, 995, 935, 1110, 994, 1020, 960, 1180, 799, 958, 1140, 1100, 1210, 1150, 1250, 1260, 1220, 1030, 1100, 774, 840, 874, 694, 940, 833, 701, 916, 692, 1020, 1050, 969, 831, 726, 456, 824, 702, 1120, 1100, 832, 764, 821, 768, 845, 864, 862, 698, 845, 744, 796, 1040, 759, 781, 865, 845, 944, 984, 897, 822, 1010, 771, 676, 649, 846, 812, 742, 801, 1040, 860, 874, 848, 890, 744, 749, 838, 1050, 918, 986, 797, 923, 975, 815, 1020, 906, 901, 1170, 912, 746, 919, 718, 714, 740}
