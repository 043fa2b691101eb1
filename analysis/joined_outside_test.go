package analysis

import (
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// pooledFrom is a study whose primary contrasts have given m and variances.
func pooledFrom(m, variance []float64) *Study {
	s := &Study{settings: (*Settings)(nil).filled(), compared: map[Contrast]*Compared{}}
	for i := range m {
		c := Contrast{Crystal: i, ThickCrystal: i, Thick: 1, Primary: true}
		s.list = append(s.list, c)
		s.compared[c] = &Compared{Contrast: c, Result: ContrastResult{Crystal: string(rune('A' + i)), AxisAgreement: math.NaN(), Exchange: Exchange{M: m[i], SE: math.Sqrt(variance[i])}}}
	}
	return s
}

// The BCG trials (Colditz et al. 1994) in place of crystals; values by metafor 3.8: fixed
// effect, DerSimonian-Laird with the interval of Knapp and Hartung (t.975 with 12 degrees
// of freedom is 2.17881282967, R qt), Q, tau^2, I^2.
func TestJoinedCrystals(t *testing.T) {
	y := []float64{-0.88931133392, -1.58538865720, -1.34807314830, -1.44155119002, -0.21754732221, -0.78611558582, -1.62089822360, 0.01195233352, -0.46941764874, -1.37134480347, -0.33935882834, 0.44591340057, -0.01731394822}
	v := []float64{0.325584765004, 0.194581121398, 0.415367965368, 0.020010031902, 0.051210172170, 0.006905618456, 0.223017247572, 0.003961579298, 0.056434210463, 0.073024793613, 0.012412213972, 0.532505845200, 0.071404659684}
	r := pooledFrom(y, v).poolCrystals()
	const z, t12, hk = 1.95996398454, 2.17881282967, 0.180696628336
	for _, c := range []struct {
		what           string
		got, want, tol float64
	}{
		{"in these", r.InThese.Value, -0.430285163654, 1e-8},
		{"in these, from", r.InThese.Lo, -0.430285163654 - z*0.0404987517109, 1e-8},
		{"in these, to", r.InThese.Hi, -0.430285163654 + z*0.0404987517109, 1e-8},
		{"like these", r.LikeThese.Value, -0.714117222073, 1e-8},
		{"like these, from", r.LikeThese.Lo, -0.714117222073 - t12*hk, 1e-8},
		{"like these, to", r.LikeThese.Hi, -0.714117222073 + t12*hk, 1e-8},
		{"Q", r.Q, 152.233008082, 1e-6},
		{"tau^2", r.Tau2, 0.308760262862, 1e-8},
		{"I^2", r.I2, 0.921173468546, 1e-8},
		{"same sign, two-sided", r.SignP, 2 * (1 + 13 + 78) / 8192.0, 1e-12}, // binomial: 11 of 13
		{"smallest p by sign", r.SmallestP, 2 / 8192.0, 1e-15},
	} {
		floatcmp.Check(t, c.what, c.got, c.want, c.tol, 0)
	}
	if r.N != 13 || r.SameSign != 11 || len(r.LeaveOut) != 13 {
		t.Errorf("%+v", r)
	}
	few := pooledFrom(y[:3], v[:3]).poolCrystals()
	if !math.IsNaN(few.Tau2) || !math.IsNaN(few.I2) || !strings.Contains(few.Why, "five are needed") {
		t.Errorf("three crystals: %+v", few)
	}
	floatcmp.Check(t, "three crystals of one sign", few.SignP, 0.25, 1e-15, 0)
}

// Beside a no stands the largest of the smallest m that each crystal would have shown, three
// being asked (R qnorm(1-.025/3) + qnorm(.8) = 3.2356 for 2.8016), and that of the crystals together: 2.8016 standard errors of the fixed effect (R
// qnorm(.975) + qnorm(.8)).
func TestNothingFoundSaysWhatWouldBeSeen(t *testing.T) {
	list, pooled := crystalsWith(0.001, -0.002, 0.001)
	for i, c := range list {
		c.MinimumM = 0.0281 + 0.01*float64(i)
	}
	a := answerExchange(&Result{Crystals: pooled}, list)
	if a.Verdict != VerdictNo || !strings.Contains(a.Text, "m = 0.056 would have been seen in each crystal with 80 % power") || !strings.Contains(a.Text, "of 0.016 in the crystals together") {
		t.Errorf("%s: %s", a.Verdict, a.Text)
	}
}
