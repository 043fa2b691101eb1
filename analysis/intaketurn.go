package analysis

import (
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
)

// Bounds of what is said of angles; chosen, no source. Rotation axes that one
// crystal shows in two positions lie within a degree or two of each other, since
// a lamella bends by that.
const (
	worstMisfitDeg = 3.0
	sameAxisDeg    = 5.0
	sameZeroDeg    = 2.0
	leastSpanDeg   = 20.0
	fewestTurned   = 50
)

// frame is a position's rotation as seen from the crystal: the beam at 0 degrees, what
// is square to it in the plane of rotation, and the axis.
type frame struct {
	beam, side, axis [3]float64
	sense            bool // the sign of beam is known
}

// frameOf makes the two directions of the beam square to each other.
func frameOf(a *evidence.Axis) frame {
	f := frame{axis: a.Direction, sense: a.Sense}
	// The middle of the two, so that neither is preferred.
	var mid [3]float64
	for k := range 3 {
		// Beam90 turned back by 90 degrees about the axis is -(axis x Beam90).
		mid[k] = a.Beam[k] - cross(a.Direction, a.Beam90)[k]
	}
	n := math.Sqrt(inner(mid[:], mid[:]))
	for k := range 3 {
		f.beam[k] = mid[k] / n
	}
	f.side = cross(f.axis, f.beam)
	return f
}

func cross(a, b [3]float64) [3]float64 {
	return [3]float64{a[1]*b[2] - a[2]*b[1], a[2]*b[0] - a[0]*b[2], a[0]*b[1] - a[1]*b[0]}
}

// turned is f seen from a crystal whose vectors were changed by t.
func (f frame) turned(t [3][3]float64) frame {
	by := func(v [3]float64) (w [3]float64) {
		for i := range 3 {
			for j := range 3 {
				w[i] += float64(t[i][j] * v[j])
			}
		}
		return w
	}
	return frame{by(f.beam), by(f.side), by(f.axis), f.sense}
}

// reversed is f with angles that run the other way.
func (f frame) reversed() frame {
	for k := range 3 {
		f.side[k], f.axis[k] = -f.side[k], -f.axis[k]
	}
	return f
}

// inverted is f seen from indices of the opposite sign: what crosses the sphere
// then crosses it from the other side.
func (f frame) inverted() frame {
	for k := range 3 {
		f.beam[k], f.side[k] = -f.beam[k], -f.side[k]
	}
	return f
}

// against gives the angle between the axes of two frames, and how many degrees must
// be added to the angles of f to count them as g does: the beam of f at phi is that
// of g at phi plus zero. It is in -180 to 180, and in -90 to 90 when the sense of either is not
// known.
func (f frame) against(g frame) (axis, zero float64) {
	axis = math.Acos(math.Max(-1, math.Min(1, inner(f.axis[:], g.axis[:])))) * 180 / math.Pi
	zero = math.Atan2(inner(f.beam[:], g.side[:]), inner(f.beam[:], g.beam[:])) * 180 / math.Pi
	if !f.sense || !g.sense {
		zero -= 180 * math.Round(zero/180)
	}
	return axis, zero
}

// turn compares the angles of every position of a crystal with those of its thinnest
// one, by geometry alone: it needs no index in common. It changes nothing.
func (s *Study) turn(i int, list []Accepted) ([]TurnResult, []intensity.Warning) {
	c := &s.Series.Crystals[i]
	first := c.byThickness()[0]
	order := []int{first}
	for j := range list {
		if j != first {
			order = append(order, j)
		}
	}
	var out []TurnResult
	var warnings []intensity.Warning
	var reference *frame
	for _, j := range order {
		r := TurnResult{Crystal: c.Name, Position: c.Positions[j].Name, MisfitDeg: math.NaN(), AxisDeg: math.NaN(), ZeroDeg: math.NaN(), Verdict: evidence.NotKnown.String()}
		own := s.ownTurn(list[j].Observations, &r)
		switch {
		case own == nil:
		case reference == nil:
			reference = own
			r.Verdict, r.Why = evidence.Fine.String(), "the angles are those of one rotation; the other positions of the crystal are compared with it"
		default:
			s.sameTurn(*own, *reference, &r)
		}
		if r.Verdict == evidence.Caution.String() || r.Verdict == evidence.Fails.String() {
			warnings = append(warnings, intensity.Warning{Code: "angles", Where: s.place(i, j), Text: r.Why})
		}
		out = append(out, r)
	}
	return out, warnings
}

// ownTurn finds the rotation of one position; nil when its angles do not tell it, r
// saying why.
func (s *Study) ownTurn(o *intensity.Columns, r *TurnResult) *frame {
	if o.Phi == nil {
		r.Why = "no rotation angles"
		return nil
	}
	lo, hi, _ := coverage(o.Phi)
	switch {
	case o.Len() < fewestTurned:
		r.Why = fmt.Sprintf("%d observations are too few to find the rotation", o.Len())
		return nil
	case hi-lo < leastSpanDeg && hi-lo > 2*math.Pi:
		r.Why = fmt.Sprintf("%.3g degrees are too few to find the rotation", hi-lo)
		return nil
	}
	x, phi := s.sampled(o)
	axis, err := evidence.RotationAxis(x, phi)
	if err == nil {
		r.MisfitDeg = axis.ResidualDeg
	}
	if err != nil || axis.ResidualDeg > worstMisfitDeg {
		if factor, misfit := otherUnit(x, phi); factor != 0 {
			r.Verdict = evidence.Fails.String()
			r.Why = fmt.Sprintf("the angles fit the cell and the indices only when multiplied by %.4g (misfit %.1f degrees): write angle_factor = %.6g for this position", factor, misfit, factor)
			return nil
		}
		if hi-lo < leastSpanDeg {
			r.Why = fmt.Sprintf("%.3g degrees are too few to find the rotation", hi-lo)
			return nil
		}
		r.Verdict = evidence.Caution.String()
		r.Why = "the angles are not those of one rotation of a crystal with these indices and this cell: indices brought to one asymmetric unit, another column, or several scans joined. Observations cannot be matched by angle, and a scale against it means nothing; give the indices as measured, or leave the angles out"
		if err == nil {
			r.Why = fmt.Sprintf("reflections miss the sphere by %.1f degrees at their angles: %s", axis.ResidualDeg, r.Why)
		}
		return nil
	}
	f := frameOf(axis)
	return &f
}

// mostTurned is the number of observations beyond which every so many-th is looked at:
// six numbers follow from far fewer.
const mostTurned = 50000

// sampled gives scattering vectors and angles, evenly thinned out.
func (s *Study) sampled(o *intensity.Columns) (x [][3]float64, phi []float64) {
	x, phi = s.scatteringVectors(o), o.Phi
	stride := 1 + len(x)/mostTurned
	if stride == 1 {
		return x, phi
	}
	n := 0
	thin := make([]float64, 0, len(phi)/stride+1)
	for r := 0; r < len(phi); r += stride {
		x[n] = x[r]
		thin = append(thin, phi[r])
		n++
	}
	return x[:n], thin
}

// otherUnit looks for a factor that makes angles fit: radians, and steps of a frame
// that are not one degree. 0 when none does.
func otherUnit(x [][3]float64, phi []float64) (factor, misfit float64) {
	misfit = worstMisfitDeg / 2
	scaled := make([]float64, len(phi))
	for _, f := range []float64{180 / math.Pi, 0.1, 0.2, 0.25, 0.3, 0.5, 2, 3, 4, 5, 10} {
		for o := range phi {
			scaled[o] = f * phi[o]
		}
		if axis, err := evidence.RotationAxis(x, scaled); err == nil && axis.ResidualDeg < misfit {
			factor, misfit = f, axis.ResidualDeg
		}
	}
	return factor, misfit
}

// sameTurn compares a position with the reference and fills r.
func (s *Study) sameTurn(own, reference frame, r *TurnResult) {
	axis, zero := own.against(reference)
	r.AxisDeg, r.ZeroDeg = axis, zero
	if axis < sameAxisDeg && math.Abs(zero) < sameZeroDeg {
		r.Verdict, r.Why = evidence.Fine.String(), "the angles agree with those of the reference"
		return
	}
	r.Verdict = evidence.Caution.String()
	for _, op := range s.equivalents(own.sense && reference.sense) {
		seen := own.turned(op.cartesian(s.Series.Cell))
		if op.inverts {
			seen = seen.inverted()
		}
		if a, z := seen.against(reference); a < sameAxisDeg && math.Abs(z) < sameZeroDeg {
			r.AxisDeg, r.ZeroDeg, r.Reindex = a, z, op.String()
			r.Why = fmt.Sprintf("is indexed on other, equivalent axes than the reference: write reindex = %q for this position, or observations cannot be matched by index and angle", op)
			return
		}
	}
	back, ahead := own.reversed().against(reference)
	switch {
	case axis < sameAxisDeg:
		r.Why = fmt.Sprintf("its angles are counted from another zero than those of the reference: write angle_shift_deg = %.2f for this position, or observations cannot be matched by angle", zero)
	case back < sameAxisDeg:
		r.AxisDeg, r.ZeroDeg, r.Reversed = back, ahead, true
		r.Why = fmt.Sprintf("its angles run the other way than those of the reference: write angle_factor = -1.0 and angle_shift_deg = %.2f for this position, or observations cannot be matched by angle", ahead)
	default:
		r.Why = fmt.Sprintf("the crystal was turned about another axis of its own than in the reference (%.0f degrees away): the position lies on another grain, or is indexed apart; it can be compared after merging only", axis)
	}
}

// equivalent is a change of indices by the Laue class. Where it inverts, M is the
// negative of a rotation.
type equivalent struct {
	crystal.Reindexing
	inverts bool
}

// equivalents lists the changes of the Laue class but the identity, the proper ones
// first; those that invert only where the data tell them apart and Friedel mates are
// one.
func (s *Study) equivalents(inverting bool) []equivalent {
	var proper, improper []equivalent
	seen := map[[3][3]int]bool{}
	for _, op := range s.Series.Group.Operators() {
		sign := op.Det()
		var m, minus [3][3]int
		for a := range 3 {
			for b := range 3 {
				m[a][b] = sign * int(op.R[a][b])
				minus[a][b] = -m[a][b]
			}
		}
		if seen[m] {
			continue
		}
		seen[m] = true
		if e := (equivalent{crystal.Reindexing{M: m, Den: 1}, false}); !e.Identity() {
			proper = append(proper, e)
		}
		improper = append(improper, equivalent{crystal.Reindexing{M: minus, Den: 1}, true})
	}
	if inverting && !s.Series.FriedelApart {
		return append(proper, improper...)
	}
	return proper
}

// cartesian is the rotation of scattering vectors that goes with the change of
// indices, its sign left out: a row h goes to h M, a column to the transpose of M
// times it.
func (e equivalent) cartesian(c crystal.Cell) [3][3]float64 {
	m := c.Reciprocal().Orthogonal()
	sign := 1
	if e.inverts {
		sign = -1
	}
	var t [3][3]float64
	for a := range 3 {
		for b := range 3 {
			t[a][b] = float64(sign * e.M[b][a])
		}
	}
	return multiply(multiply(m, t), invertUpper(m))
}
