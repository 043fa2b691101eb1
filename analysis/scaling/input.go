package scaling

import (
	"fmt"
	"math"
)

// Input holds the observations of one crystal, all its positions, as columns of
// equal length. S2 is sin^2(theta)/lambda^2 = 1/(4 d^2) in 1/angstrom^2, the same
// for all observations of one unique reflection; I and Var the measured
// intensity and its reported variance; Phi the rotation angle in degrees (nil
// when no position has one). Unique numbers the reflection under the Laue
// class, Raw the index as measured, Position the place on the crystal, ordered
// so that 0 is the thinnest. HasAngle, one a position, says that its Phi are
// real angles; nil means all when Phi is there.
//
// Rows may stand in any order. No column is changed or kept sorted.
type Input struct {
	S2, I, Var, Phi       []float64
	Unique, Raw, Position []int32
	Positions             int
	HasAngle              []bool
}

// Len returns the number of observations.
func (in *Input) Len() int { return len(in.I) }

func (in *Input) angled(p int) bool {
	return in.Phi != nil && (in.HasAngle == nil || in.HasAngle[p])
}

func (in *Input) check() error {
	n := len(in.I)
	for _, c := range []struct {
		name string
		n    int
	}{{"S2", len(in.S2)}, {"Var", len(in.Var)}, {"Unique", len(in.Unique)}, {"Raw", len(in.Raw)}, {"Position", len(in.Position)}} {
		if c.n != n {
			return fmt.Errorf("scaling: column %s has %d rows, I has %d", c.name, c.n, n)
		}
	}
	if in.Phi != nil && len(in.Phi) != n {
		return fmt.Errorf("scaling: column Phi has %d rows, I has %d", len(in.Phi), n)
	}
	if n == 0 {
		return fmt.Errorf("scaling: no observations")
	}
	if in.Positions < 1 || in.Positions > 1000 {
		return fmt.Errorf("scaling: %d positions, want 1 to 1000", in.Positions)
	}
	if in.HasAngle != nil && len(in.HasAngle) != in.Positions {
		return fmt.Errorf("scaling: HasAngle has %d entries for %d positions", len(in.HasAngle), in.Positions)
	}
	if int64(n) > math.MaxInt32 {
		return fmt.Errorf("scaling: %d observations are more than can be numbered", n)
	}
	return in.checkRows()
}

func (in *Input) checkRows() error {
	for i := range in.I {
		switch {
		case in.Position[i] < 0 || int(in.Position[i]) >= in.Positions:
			return fmt.Errorf("scaling: row %d: position %d outside 0 to %d", i, in.Position[i], in.Positions-1)
		case in.Unique[i] < 0 || in.Raw[i] < 0:
			return fmt.Errorf("scaling: row %d: negative number of a reflection (%d, %d)", i, in.Unique[i], in.Raw[i])
		case !finite(in.I[i]):
			return fmt.Errorf("scaling: row %d: intensity is %g", i, in.I[i])
		case !(in.Var[i] > 0) || math.IsInf(in.Var[i], 1):
			return fmt.Errorf("scaling: row %d: variance is %g, must be positive", i, in.Var[i])
		case !(in.S2[i] >= 0) || math.IsInf(in.S2[i], 1):
			return fmt.Errorf("scaling: row %d: s^2 is %g", i, in.S2[i])
		case in.Phi != nil && in.angled(int(in.Position[i])) && !finite(in.Phi[i]):
			return fmt.Errorf("scaling: row %d: angle is %g", i, in.Phi[i])
		}
	}
	return nil
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
