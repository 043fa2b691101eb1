package evidence

import (
	"errors"
	"math"
	"strings"
	"testing"
)

// Each rule on either side of its stated thresholds.
func TestRules(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	weak := CurbForm{Name: "intensity", Q: 0.01, Lo: -0.01, Hi: 0.03, J: 5}
	seen := CurbForm{Name: "intensity", Q: 0.05, Lo: 0.035, Hi: 0.065, J: 5}
	refused := seen
	refused.Refused = true
	rate := func(j float64, refused bool) CurbForm {
		return CurbForm{Name: CountRate, Q: 0.05, Lo: 0.035, Hi: 0.065, J: j, Refused: refused}
	}
	for _, c := range []struct {
		name string
		got  Finding
		want Verdict
		says string
	}{
		{"rows alone", Rows(1000, 1000, "repeats"), Fine, "of its own"},
		{"copied rows", Rows(3000, 1000, "copies"), Caution, "copies"},
		{"smooth at zero", Negatives([3]int{100, 110, 95}, []int{400}, []float64{390}), Fine, "400 (390)"},
		{"filled floor", Negatives([3]int{17, 37, 62}, nil, nil), Fine, "smooth"},
		{"negatives gone", Negatives([3]int{0, 120, 110}, nil, nil), Fails, "step at zero"},
		{"set to zero", Negatives([3]int{0, 400, 110}, nil, nil), Fails, "step at zero"},
		{"half the negatives gone", Negatives([3]int{150, 500, 520}, nil, nil), Caution, "fewer"},
		{"too few near zero", Negatives([3]int{0, 19, 30}, nil, nil), Fine, "too few"},
		{"no offset", OffsetOf(0.004, -0.001, 0.009), Fine, "no additive offset"},
		{"offset at two errors", OffsetOf(0.004, 0.0001, 0.0079), Fine, ""},
		{"offset", OffsetOf(0.01, 0.005, 0.015), Caution, "offset is seen"},
		{"large offset", OffsetOf(0.08, 0.07, 0.09), Fails, "large"},
		{"no offset in the model", OffsetOf(nan, -inf, inf), NotKnown, "not part"},
		{"alike", Deviations(0.99, 0.97, 1.01, 0.02, 0.01, -0.01, true), Fine, "r = 0.99"},
		{"deviations, own axis", Deviations(0.9, 0.88, 0.92, 0.3, 0.1, -0.1, true), Caution, "does not share"},
		{"deviations, shared axis", Deviations(0.9, 0.88, 0.92, 0.3, 0.1, -0.1, false), Caution, "shares that"},
		{"no correlation", Deviations(nan, nan, nan, 0, 0, 0, true), NotKnown, ""},
		{"no loss", HighCounts([]CurbForm{weak}), Fine, "no loss"},
		{"loss at 3.5 errors", HighCounts([]CurbForm{{Name: "intensity", Q: 0.02, Lo: 0.0087, Hi: 0.0313}}), Fine, "no loss"},
		{"loss beyond 3.5 errors", HighCounts([]CurbForm{{Name: "intensity", Q: 0.02, Lo: 0.0090, Hi: 0.0310}}), Caution, "not known"},
		{"loss of a form that fits worse", HighCounts([]CurbForm{{Name: "intensity", Q: 0.02, Lo: -0.02, Hi: 0.06, J: 4}, rate(9, true)}), Fine, "no loss"},
		{"loss, rate unknown", HighCounts([]CurbForm{seen}), Caution, "not known"},
		{"loss, rate refused", HighCounts([]CurbForm{seen, rate(20, true)}), Fine, "refuse"},
		{"loss with the rate, the other open", HighCounts([]CurbForm{seen, rate(2, false)}), Caution, "cannot tell"},
		{"loss with the rate", HighCounts([]CurbForm{refused, rate(1, false)}), Caution, "dead time"},
		{"loss, not told", HighCounts([]CurbForm{seen, rate(6, false)}), Caution, "cannot tell"},
		{"no forms", HighCounts(nil), NotKnown, ""},
		{"no bleed", BleedOf(&Slope{Value: 0.01, SE: 0.004, Z: 2.5}, nil), Fine, "do not gain"},
		{"bleed", BleedOf(&Slope{Value: 0.02, SE: 0.004, Z: 5}, nil), Caution, "gain beside"},
		{"much bleed", BleedOf(&Slope{Value: 0.06, SE: 0.004, Z: 15}, nil), Fails, "gain beside"},
		{"no frames", BleedOf(nil, errors.New("no frames")), NotKnown, "no frames"},
		{"double scattering has no verdict", DoubleOf(&Slope{Z: 9}, nil), NotKnown, "not judged: scale errors of frames"},
		{"no tilt", TiltOf(0.02, 0.01, 400), Fine, "alike"[:0]},
		{"tilt", TiltOf(0.04, 0.01, 400), Caution, "second sign of thickness"},
		{"tilt the wrong way", TiltOf(-0.04, 0.01, 400), Caution, "wrong way"},
		{"tilt at 3.4 errors", TiltOf(0.034, 0.01, 400), Fine, "are like those"},
		{"blocks alike", BlocksOf(1.1, 0.03, 2.5, ""), Fine, "1.10 times"},
		{"blocks wider", BlocksOf(1.12, 0.03, 2.5, ""), Caution, "claim too much"},
		{"blocks wider, by chance", BlocksOf(1.12, 0.04, 2.5, ""), Fine, "1 +- 0.04"},
		{"blocks wider, a little", BlocksOf(1.09, 0.01, 2.5, ""), Fine, ""},
		{"blocks narrower", BlocksOf(0.8, 0.03, 2.5, ""), Fine, ""},
		{"no blocks", BlocksOf(nan, nan, 2.5, "8 blocks"), NotKnown, "8 blocks"},
		{"giants alike", GiantsOf(0.05, []Move{{10, 2, 0.012, 0.004}, {4, 30, -0.02, 0.006}}), Fine, "changes by -0.02 +- 0.006 without the 30 reflections above 4"},
		{"giants matter", GiantsOf(0.05, []Move{{10, 2, 0.012, 0.004}, {4, 30, -0.03, 0.006}}), Caution, "hangs on the strongest"},
		{"giants clear but small", GiantsOf(0.05, []Move{{4, 30, -0.009, 0.001}}), Fine, ""},
		{"no giants", GiantsOf(0.05, nil), Fine, "no reflection is stronger"},
		{"giants unknown", GiantsOf(nan, nil), NotKnown, "not estimable"},
		{"scale in step", ScaleRatio(2.1, 2.2), Fine, ""},
		{"scale too large", ScaleRatio(4.4, 2.2), Caution, "does not go"},
		{"scale too small", ScaleRatio(0.4, 2.2), Caution, "does not go"},
		{"no scale", ScaleRatio(nan, 2.2), Caution, ""},
		{"scatter alike", Scatter(0.04, 0.03, 0.05, 0.05, 0.04, 0.06), Fine, ""},
		{"scatter apart", Scatter(0.04, 0.03, 0.05, 0.2, 0.19, 0.21), Caution, "mosaicity"},
		{"frames keep", JitterOf(&Jitter{Tau: 0.04, Q: 900, DF: 200}, nil), Fine, ""},
		{"frames jump", JitterOf(&Jitter{Tau: 0.2, Q: 900, DF: 200}, nil), Caution, "off their scale"},
		{"frames by chance", JitterOf(&Jitter{Tau: 0.2, Q: 230, DF: 200}, nil), Fine, ""},
		{"sigmas right", Sigmas(1.02, 0.98, 1.06), Fine, ""},
		{"sigmas small", Sigmas(1.5, 1.45, 1.55), Caution, "do not fit"},
		{"sigmas large", Sigmas(0.6, 0.55, 0.65), Caution, "do not fit"},
		{"curve not significant", TippingOf(0.3, 1, 1, 0.9, 1.1), Fine, "not significant"},
		{"tips within the range", TippingOf(0.01, 1.05, 0, 0.9, 1.1), Caution, "not separable"},
		{"tips downward within", TippingOf(0.01, inf, 0.95, 0.9, 1.1), Caution, "not separable"},
		{"tips beyond the range", TippingOf(0.01, 1.4, 0.6, 0.9, 1.1), Fine, "1.40"},
		{"no noise model", TippingOf(0.001, inf, 0, 0, inf), Caution, "not estimable in one"},
		{"never tips", TippingOf(0.001, inf, 0, 0.9, 1.1), Fine, "no factor"},
		{"choices agree", ChoiceOf("scale", 0.08, 0.015, Turn{Lo: 0.075, Hi: 0.09, N: 3}), Fine, "3 other choices"},
		{"one choice agrees", ChoiceOf("scale", 0.08, 0.015, Turn{Lo: 0.09, Hi: 0.09, N: 1}), Fine, "m is 0.09 with another scale (0.08)"},
		{"one named choice", ChoiceOf("mates", 0.08, 0.015, Turn{Lo: 0.074, Hi: 0.074, N: 1, Only: "mates apart", Leading: "together"}), Fine, "m is 0.074 with mates apart (0.08 together)"},
		{"one choice apart", ChoiceOf("scale", 0.08, 0.015, Turn{Lo: 0.05, Hi: 0.05, N: 1}), Caution, "more than"},
		{"choices disagree", ChoiceOf("scale", 0.08, 0.015, Turn{Lo: 0.05, Hi: 0.09, N: 3}), Caution, "more than"},
		{"precise but alike", ChoiceOf("scale", 0.08, 0.001, Turn{Lo: 0.074, Hi: 0.085, N: 3}), Fine, ""},
		{"no choices", ChoiceOf("scale", 0.08, 0.001, Turn{}), NotKnown, ""},
		{"indexed alike", Indexing(20, false, false, "x"), Fine, "x"},
		{"re-indexed", Indexing(20, false, true, "x"), Caution, ""},
		{"not decided", Indexing(1, true, false, "x"), Fails, ""},
		{"all common", Coverage(Common{Share: 1}), Fine, "all reflections"},
		{"half common", Coverage(Common{Share: 0.6, Lost: 40}), Caution, "may not represent"},
		{"few common", Coverage(Common{Share: 0.1, Lost: 90}), Fails, "small part"},
		{"weak ones lost", Coverage(Common{Share: 0.9, Lost: 90, Strength: -0.5, StrengthSE: 0.05}), Caution, "stronger or weaker"},
		{"no ice", IceOf([]Ring{{D: 3.9, Excess: 0.1, Z: 1}}), Fine, "no ring"},
		{"ice in thick", IceOf([]Ring{{D: 3.9, Excess: 0.1, Z: 1}, {D: 2.25, Excess: -0.3, Z: -6}}), Caution, "thick"},
		{"much ice in thin", IceOf([]Ring{{D: 3.9, Excess: 0.8, Z: 9}}), Fails, "thin"},
		{"no rings", IceOf(nil), NotKnown, ""},
		{"orders differ", DoseOrder(1, 3, 0.2, 0.01), Fine, "1 of 3"},
		{"in step", DoseOrder(3, 3, 0.01, 0.01), Caution, "no analysis"},
		{"in step with damage", DoseOrder(3, 3, 0.2, 0.01), Fails, "damage"},
		{"in step, B unknown", DoseOrder(3, 3, nan, nan), Caution, "no analysis"},
		{"order not given", DoseOrder(0, 0, nan, nan), NotKnown, "manifest"},
		{"no damage", DoseGrowth(0.02, 0.01), Fine, ""},
		{"damage", DoseGrowth(0.2, 0.01), Caution, "damage"},
		{"no doses", DoseGrowth(nan, nan), NotKnown, ""},
		{"one crystal", Crystals(1), Caution, "one crystal"},
		{"three crystals", Crystals(3), Caution, "0.25"},
		{"five crystals", Crystals(5), Fine, ""},
		{"no replicate", ReplicateOf(0, 0), NotKnown, "no replicate was measured"},
		{"replicates agree", ReplicateOf(3, 0), Fine, ""},
		{"one replicate differs", ReplicateOf(3, 1), Caution, "differ"},
		{"all replicates differ", ReplicateOf(3, 3), Fails, "differ"},
		{"forbidden ones stand there", Recorded(20), Fine, "stand in the lists"},
		{"forbidden ones do not", Recorded(0), NotKnown, "not recorded"},
		{"own axis", AxisOf(0.95, "crystals", true), Fine, "other crystals"},
		{"poor axis", AxisOf(0.6, "crystals", true), Caution, "poorly"},
		{"shared axis", AxisOf(nan, "bracket", false), Caution, "bracket"},
		{"lie apart", LyingOf(40, "L2"), Fine, "another axis"},
		{"lie alike", LyingOf(2, "L2"), Caution, "same orientations"},
		{"not told", LyingOf(math.NaN(), ""), NotKnown, "do not tell"},
		{"axes agree", AgainstLeading(0.02, -0.01, 0.05, math.NaN(), "why"), Fine, "agrees"},
		{"axes differ", AgainstLeading(-0.05, -0.07, -0.03, -0.002, "why"), Caution, "by one slope m differs from that on the leading axis, most likely by why: take no m from this axis; by the leading model, whose m is the one to quote, the axis moves m by -0.002 only"},
		{"axes differ by both", AgainstLeading(-0.05, -0.07, -0.03, -0.02, "why"), Caution, "moves m by -0.02 too"},
		{"axes differ by nothing much", AgainstLeading(-0.005, -0.007, -0.003, math.NaN(), "why"), Fine, ""},
		{"described", Describes(0.05, 2), Fine, ""},
		{"not described", Describes(0.0005, 2), Caution, "look at it"},
		{"not tested", Describes(1, 0), NotKnown, ""},
		{"ghost, own axis", GhostOf(30, true), Fine, "shares no noise"},
		{"ghost, shared axis", GhostOf(30, false), Caution, "not independent"},
		{"no ghost", GhostOf(1.2, false), Fine, "little"},
	} {
		if c.got.Verdict != c.want || !strings.Contains(c.got.Why, c.says) || c.got.Why == "" {
			t.Errorf("%s: %s (%g): %s", c.name, c.got.Verdict, c.got.Value, c.got.Why)
		}
	}
}

func TestVerdictWords(t *testing.T) {
	for v, want := range map[Verdict]string{NotKnown: "not known", Fine: "fine", Caution: "caution", Fails: "fails", 9: "Verdict(9)"} {
		if v.String() != want {
			t.Errorf("got %q, want %q", v, want)
		}
	}
	if Worse(Fine, Caution) != Caution || Worse(Fails, NotKnown) != Fails {
		t.Error("worse is not the graver one")
	}
}
