package evidence

import (
	"fmt"
	"math"
)

// Move is what leaving out the LeftOut reflections that are stronger than Above local
// means changes of m, with the standard error of that change.
type Move struct {
	Above      float64
	LeftOut    int
	Change, SE float64
}

// GiantsOf judges whether m, which is lead with all reflections, hangs on the strongest.
// Estimates with and without them share their data, so that the change is judged by an
// error of its own (Hausman 1978, Econometrica 46:1251, whose variance of it, the
// difference of both, needs an efficient estimate, which this is not). Caution when a
// change is beyond 3.5 of its standard errors and 0.01.
func GiantsOf(lead float64, moves []Move) Finding {
	if math.IsNaN(lead) {
		return unknown("m without the strongest reflections is not estimable")
	}
	if len(moves) == 0 {
		return Finding{Value: 0, Unit: "change of m", Verdict: Fine, Why: "no reflection is stronger than four local means"}
	}
	worst := moves[0]
	for _, m := range moves {
		if math.Abs(m.Change)/m.SE > math.Abs(worst.Change)/worst.SE {
			worst = m
		}
	}
	f := Finding{Value: worst.Change, Unit: "change of m", Verdict: Fine,
		Why: fmt.Sprintf("m, read by one slope, is %s with all reflections and changes by %s +- %s without the %d reflections above %g local means", num(lead), num(worst.Change), num(worst.SE), worst.LeftOut, worst.Above)}
	if math.Abs(worst.Change) > clearZ*worst.SE && math.Abs(worst.Change) > 0.01 {
		f.Verdict = Caution
		f.Why += ": it hangs on the strongest, as a curb, a loss at high counts or an outlier makes it; look at the curve and at the models with a curb"
	}
	return f
}
