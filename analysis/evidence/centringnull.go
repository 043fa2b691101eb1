package evidence

import (
	"fmt"
	"math"
)

// CentringNull judges what was measured where a centring forbids reflections, as ratios to
// the local mean of allowed ones in the thin and the thick position with their standard
// uncertainties. There is no lattice point there, so that no scattering in the crystal
// fills them: they are a null. Caution when they rise by more than 3.5 standard
// uncertainties and by more than 0.01, as what lifts them lifts weak reflections too.
func CentringNull(thin, thinSU, thick, thickSU float64) Finding {
	d := thick - thin
	z := d / math.Hypot(thinSU, thickSU)
	if math.IsNaN(z) {
		return unknown("what the centring forbids was not measured in both positions")
	}
	f := Finding{Value: d, Unit: "of the allowed, thick minus thin", Verdict: Fine, Why: "where the centring forbids reflections nothing rises with thickness, so that no background does"}
	if z > clearZ && d > 0.01 {
		f.Verdict = Caution
		f.Why = fmt.Sprintf("where the centring forbids reflections there is no lattice point to be filled, and yet intensity rises from %s to %s of the allowed: background left in the thick position (see offset), spots that run into each other (see bleed), a second lattice or another centring. What lifts these lifts weak reflections too", num(thin), num(thick))
	}
	return f
}
