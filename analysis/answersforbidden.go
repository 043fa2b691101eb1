package analysis

import (
	"fmt"
	"math"
	"strings"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/intensity"
)

func answerForbidden(r *Result, list []*ContrastResult) Answer {
	a := Answer{Question: "Are forbidden reflections filled?", Section: "forbidden", Verdict: VerdictUnknown}
	up, known := 0, 0
	none, only := forbidsNone(r)
	var z []float64
	worst := 0.0
	for _, c := range list {
		thin, thick := forbiddenIn(r, c, "all")
		if thin == nil || thick == nil {
			continue
		}
		known++
		su := math.Hypot(thick.SU, thin.SU)
		z, worst = append(z, rise(thin, thick)), math.Max(worst, su)
		a.Detail = append(a.Detail, fmt.Sprintf("%s thin %s, thick %s; %d and %d reflections", label(c), forbiddenSpan(thin), forbiddenSpan(thick), thin.N, thick.N))
	}
	f := asking(list, known)
	for _, v := range z {
		if v > zOf(0.95)*f {
			up++
		}
	}
	const below = " Below, their mean over the local mean."
	pair := list[0].ThickCrystal != ""
	null, lifted := centringNull(r, list, zOf(0.95)*f)
	switch {
	case none:
		a.Text = "The space group forbids no reflection, so there is nothing to look at."
	case only:
		a.Text = "No screw axis or glide plane forbids any. Where the centring does there is no lattice point, so nothing that scattering could fill."
	case known == 0:
		a.Text = "Not recorded: the lists hold no forbidden reflection of a screw axis or glide plane in both positions, so nothing can be said, and not that they are absent."
	case filledThroughout(r):
		a.Verdict = VerdictUnsure
		a.Text = "At every thickness they are about as strong as allowed ones: the space group is wrong, and says nothing of scattering more than once." + below
	case up > 0 && lifted:
		a.Verdict = VerdictUnsure
		a.Text = "They are stronger in the thick position, but so is what was measured where the centring forbids. There is no lattice point there to be filled: look for background and for spots that run into each other." + below
	case up > 0 && pair:
		a.Verdict = VerdictUnsure
		a.Text = fmt.Sprintf("Undecided as to thickness: they are stronger in the thick position in %s, but the two positions lie on two crystals, which can differ in other ways.", crystalsOf(up, list)) + below
	case up > 0:
		a.Verdict = VerdictYes
		a.Text = fmt.Sprintf("They rise with thickness in %d of %d crystals that recorded them in both positions. No scale can do this, but background left in the intensities and spots that run into each other can; a wrong space group fills them at every thickness.", up, known) + below
	default:
		a.Verdict = VerdictNo
		what := "No rise with thickness is seen"
		if pair {
			what = "They are not seen to be stronger in the thick position"
		}
		a.Text = fmt.Sprintf("%s; one of %s of the local mean would have been seen in each %s with 80 %% power.", what, short(visible(worst, f)), alike(pair)) + below
	}
	if null != "" {
		a.Detail = append(a.Detail, null)
	}
	return a
}

func alike(pair bool) string {
	if pair {
		return "pair"
	}
	return "crystal"
}

// forbidsNone reports that no reflection is forbidden, and that a centring alone forbids
// some.
func forbidsNone(r *Result) (none, only bool) {
	none, only = len(r.Forbidden) > 0, false
	for i := range r.Forbidden {
		f := &r.Forbidden[i]
		none = none && f.Why == intensity.NoneForbidden
		only = only || f.Why == intensity.OnlyCentring
	}
	return none, only
}

// centringNull says what was measured in both positions where the centring forbids
// reflections, and whether it is larger in the thick one by that many standard
// uncertainties in any contrast. Empty without such reflections.
func centringNull(r *Result, list []*ContrastResult, z float64) (text string, lifted bool) {
	name := ""
	for i := range r.Forbidden {
		if r.Forbidden[i].Centring {
			name = r.Forbidden[i].Element
			break
		}
	}
	var parts []string
	for _, c := range list {
		thin, thick := forbiddenIn(r, c, name)
		if thin == nil || thick == nil {
			continue
		}
		parts = append(parts, fmt.Sprintf("%s thin %s, thick %s; %d and %d reflections", label(c), forbiddenSpan(thin), forbiddenSpan(thick), thin.N, thick.N))
		lifted = lifted || rise(thin, thick) > z
	}
	if len(parts) == 0 {
		return "", false
	}
	return fmt.Sprintf("where the %s forbids, a null for background: %s", name, strings.Join(parts, "; ")), lifted
}

// filledThroughout reports whether the ledger calls the space group wrong.
func filledThroughout(r *Result) bool {
	for _, e := range r.Ledger {
		if e.Check == checkGroup && e.Verdict == VerdictFails {
			return true
		}
	}
	return false
}

// forbiddenIn gives the rows of an element in both positions of a contrast, nil where it
// was not measured.
func forbiddenIn(r *Result, c *ContrastResult, element string) (thin, thick *Forbidden) {
	crystal := c.Crystal
	if c.ThickCrystal != "" {
		crystal = c.ThickCrystal
	}
	return forbiddenOf(r.Forbidden, c.Crystal, c.Thin, element), forbiddenOf(r.Forbidden, crystal, c.Thick, element)
}

func forbiddenOf(list []Forbidden, crystal, position, element string) *Forbidden {
	for i := range list {
		f := &list[i]
		if f.Crystal == crystal && f.Position == position && f.Element == element && f.N > 0 {
			return f
		}
	}
	return nil
}

// rise is the difference of two ratios over its error, as the normal deviate that is as rare:
// errors from the scatter of a few reflections make large ratios likelier (Welch 1947,
// Biometrika 34:28).
func rise(thin, thick *Forbidden) float64 {
	a, b := thin.SU*thin.SU, thick.SU*thick.SU
	z := (thick.Ratio - thin.Ratio) / math.Sqrt(a+b)
	df := (a + b) * (a + b) / (a*a/float64(max(thin.N-1, 1)) + b*b/float64(max(thick.N-1, 1)))
	p := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: df}.Survival(math.Abs(z))
	return math.Copysign(math.Min(distuv.UnitNormal.Quantile(1-p), math.Abs(z)), z)
}

// forbiddenSpan writes a ratio with its 95 % interval.
func forbiddenSpan(f *Forbidden) string {
	half := f.SU * distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(max(f.N-1, 1))}.Quantile(0.975)
	return span(f.Ratio, f.Ratio-half, f.Ratio+half)
}
