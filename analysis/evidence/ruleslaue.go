package evidence

import (
	"fmt"
	"math"
	"strings"
)

// LaueAgreement is how well the intensities go with one operation: the correlation R of
// strengths that it makes equivalent, over N pairs that count as independent. Name is the
// operator.
type LaueAgreement struct {
	Name string
	N    int
	R    float64
}

const (
	// fewestEquivalents are asked of an operation before it is judged.
	fewestEquivalents = 50
	// leastReference is the agreement of what must agree below which an operation that does
	// not agree says nothing.
	leastReference = 0.3
	// brokenShare and wornShare are the parts of that agreement below which an operation is
	// refused or doubted; chosen, no source: strengths that have nothing to do with each
	// other correlate by 0, and those of a twin in two equal parts by as much as equals.
	brokenShare = 0.5
	wornShare   = 0.75
)

// upper is the limit below which the correlation lies by 3.5 standard errors of Fisher's
// (1921) z.
func (a LaueAgreement) upper() float64 {
	return math.Tanh(math.Atanh(math.Max(-1+1e-12, math.Min(1-1e-12, a.R))) + clearZ/math.Sqrt(float64(a.N-3)))
}

// known reports whether there are pairs enough.
func (a LaueAgreement) known() bool { return a.N >= fewestEquivalents && !math.IsNaN(a.R) }

// Refused reports that the intensities do not have the operation: its agreement, 3.5
// standard errors upward, is below half of the reference.
func (a LaueAgreement) Refused(reference float64) bool {
	return a.known() && reference >= leastReference && a.upper() < brokenShare*reference
}

// Agrees reports that strengths agree under the operation about as the reference: at nine tenths
// of it or more, with 3.5 standard errors to spare above half of it.
func (a LaueAgreement) Agrees(reference float64) bool {
	if !a.known() || !(reference >= leastReference) {
		return false
	}
	lower := math.Tanh(math.Atanh(math.Min(1-1e-12, a.R)) - clearZ/math.Sqrt(float64(a.N-3)))
	return a.R >= 0.9*reference && lower > brokenShare*reference
}

// LaueOf judges the operations of the Laue class against a reference, the best agreement
// of reflections that must be equal (repeats and Friedel mates of one position) or of any
// of the operations. Fails when an operation is refused: reflections are merged that are not
// equivalent; subgroup names what the intensities allow. Caution when one agrees, 3.5
// standard errors upward, by less than three quarters of the reference. beyond names
// operations of the lattice that the class lacks and that agree as well, which is
// information only: a twin has them, too.
func LaueOf(class string, reference float64, operators []LaueAgreement, subgroup string, beyond []string) Finding {
	f := Finding{Value: math.NaN(), Unit: "of the agreement that equals reach, worst operator", Verdict: Fine}
	var refused, worn []string
	judged := 0
	for _, o := range operators {
		if !o.known() {
			continue
		}
		judged++
		if share := o.R / reference; math.IsNaN(f.Value) || share < f.Value {
			f.Value = share
		}
		text := fmt.Sprintf("%s (%.2f)", o.Name, o.R)
		switch {
		case o.Refused(reference):
			refused = append(refused, text)
		case reference >= leastReference && o.upper() < wornShare*reference:
			worn = append(worn, text)
		}
	}
	switch {
	case len(operators) == 0:
		f.Why = "the Laue class is -1: Friedel's law alone makes reflections equivalent"
	case judged == 0:
		return unknown("too few pairs of equivalents of one position to ask whether the Laue class is right")
	case !(reference >= leastReference):
		return unknown("not even reflections that must be equal agree well enough (%.2f) to ask whether the Laue class is right", reference)
	case len(refused) > 0:
		f.Verdict = Fails
		f.Why = fmt.Sprintf("the intensities do not have the Laue class %s: strengths that must be equal correlate by %.2f, but under %s; reflections that are not equivalent are merged, and all that follows is of such means. The largest subgroup that the intensities allow is %s", class, reference, strings.Join(refused, ", "), subgroup)
	case len(worn) > 0:
		f.Verdict = Caution
		f.Why = fmt.Sprintf("strengths that must be equal correlate by %.2f, but under %s: a Laue class that is nearly kept, a twin in unequal parts, or a scale that changes between equivalents", reference, strings.Join(worn, ", "))
	default:
		f.Why = fmt.Sprintf("strengths agree under every operation of %s about as well as what must be equal (correlation %.2f)", class, reference)
	}
	if len(beyond) > 0 && f.Verdict == Fine {
		f.Why += fmt.Sprintf("; they agree as well under %s, which the class does not have: the true class may be higher, or the crystals are twins in equal parts", strings.Join(beyond, " and "))
	}
	return f
}
