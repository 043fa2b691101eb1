package intensity

import (
	"fmt"
	"math"
)

// Columns holds the rows or observations of one position as parallel columns of
// equal length. Phi is the rotation angle in degrees, nil when the source gives
// none; Frame is the image number, nil when there is none (frame numbers are
// not angles, and those of two positions have nothing to do with each other).
// Partiality is the recorded share of each row, nil when the source has no such
// column.
type Columns struct {
	H, K, L    []int16
	I, Sigma   []float64
	Phi        []float64
	Frame      []int32
	Partiality []float64
}

// MaxIndex is the largest absolute value of a Miller index that Columns takes.
const MaxIndex = math.MaxInt16

// RowError is a fault in one row. Row counts from 0; Column names the column
// and Reason says what is wrong with it.
type RowError struct {
	Row    int
	Column string
	Reason string
}

// Error names the row (from 0), the column and the reason.
func (e *RowError) Error() string {
	return fmt.Sprintf("row %d: %s: %s", e.Row, e.Column, e.Reason)
}

// NewColumns makes columns from indices of any size and copies them; the other
// columns are kept, not copied. An index beyond MaxIndex is a *RowError, as is
// everything that Check refuses.
func NewColumns(h, k, l []int, i, sigma []float64) (*Columns, error) {
	c := &Columns{I: i, Sigma: sigma}
	for _, x := range []struct {
		name string
		src  []int
		dst  *[]int16
	}{{"h", h, &c.H}, {"k", k, &c.K}, {"l", l, &c.L}} {
		*x.dst = make([]int16, len(x.src))
		for r, v := range x.src {
			if v < -MaxIndex || v > MaxIndex {
				return nil, &RowError{r, x.name, fmt.Sprintf("index %d lies outside -%d to %d", v, MaxIndex, MaxIndex)}
			}
			(*x.dst)[r] = int16(v)
		}
	}
	return c, c.Check()
}

// Len returns the number of rows.
func (c *Columns) Len() int { return len(c.I) }

// Check refuses columns that cannot be used: unequal lengths (nil stands for an
// absent Phi, Frame or Partiality), the index 0 0 0, an index of -32768, an
// intensity that is not finite, a sigma that is not finite and above zero, an
// angle that is not finite, a partiality that is not finite or below zero. All
// but unequal lengths are a *RowError with the first such row. No rows is fine.
func (c *Columns) Check() error {
	if err := c.checkLengths(); err != nil {
		return err
	}
	for r := range c.I {
		if err := c.checkRow(r); err != nil {
			return err
		}
	}
	return nil
}

func (c *Columns) checkLengths() error {
	n := len(c.I)
	for _, x := range []struct {
		name     string
		n        int
		optional bool
	}{
		{"h", len(c.H), false}, {"k", len(c.K), false}, {"l", len(c.L), false}, {"sigma", len(c.Sigma), false},
		{"phi", len(c.Phi), c.Phi == nil}, {"frame", len(c.Frame), c.Frame == nil}, {"partiality", len(c.Partiality), c.Partiality == nil},
	} {
		if x.n != n && !x.optional {
			return fmt.Errorf("columns differ in length: %d of %s, %d of intensity", x.n, x.name, n)
		}
	}
	return nil
}

func (c *Columns) checkRow(r int) error {
	h, k, l := c.H[r], c.K[r], c.L[r]
	switch {
	case h == 0 && k == 0 && l == 0:
		return &RowError{r, "index", "0 0 0 is the direct beam, no reflection"}
	case h < -MaxIndex || k < -MaxIndex || l < -MaxIndex:
		return &RowError{r, "index", fmt.Sprintf("%d %d %d lies outside -%d to %d", h, k, l, MaxIndex, MaxIndex)}
	case !finite(c.I[r]):
		return &RowError{r, "intensity", fmt.Sprintf("%g is not a finite number", c.I[r])}
	case !finite(c.Sigma[r]):
		return &RowError{r, "sigma", fmt.Sprintf("%g is not a finite number", c.Sigma[r])}
	case c.Sigma[r] <= 0:
		return &RowError{r, "sigma", fmt.Sprintf("%g is not above zero", c.Sigma[r])}
	case c.Phi != nil && !finite(c.Phi[r]):
		return &RowError{r, "phi", fmt.Sprintf("%g is not a finite number", c.Phi[r])}
	case c.Partiality != nil && !(c.Partiality[r] >= 0 && finite(c.Partiality[r])):
		return &RowError{r, "partiality", fmt.Sprintf("%g is not a finite number from zero up", c.Partiality[r])}
	}
	return nil
}

// Select returns a copy of the rows for which keep, parallel to the rows, is
// true. It panics when keep has another length.
func (c *Columns) Select(keep []bool) *Columns {
	if len(keep) != c.Len() {
		panic("intensity: Columns.Select: keep is not parallel to the rows")
	}
	var rows []int32
	for r, k := range keep {
		if k {
			rows = append(rows, int32(r))
		}
	}
	spans := make([]span, len(rows))
	for i := range spans {
		spans[i] = span{int32(i), int32(i) + 1}
	}
	return build(c, rows, spans, func(out *Columns, o int, rows []int32) {
		out.I[o], out.Sigma[o] = c.I[rows[0]], c.Sigma[rows[0]]
		out.placeMiddle(c, o, rows)
	})
}

// FrameWidth estimates the rotation per frame in degrees: the median of
// |d phi / d frame| over neighbouring rows, in the order of frames, that lie
// one to three frames apart. It is 0 when angles or frames are missing or
// nothing can be said. NaN angles are not expected (Check refuses them).
func (c *Columns) FrameWidth() float64 {
	if c.Phi == nil || c.Frame == nil {
		return 0
	}
	mean := map[int32][2]float64{}
	lo, hi := int32(math.MaxInt32), int32(math.MinInt32)
	for r, f := range c.Frame {
		m := mean[f]
		mean[f] = [2]float64{m[0] + c.Phi[r], m[1] + 1}
		lo, hi = min(lo, f), max(hi, f)
	}
	var steps []float64
	for f := int64(lo); f < int64(hi) && len(mean) > 1; f++ {
		a, ok := mean[int32(f)]
		if !ok {
			continue
		}
		for gap := int64(1); gap <= 3; gap++ {
			if b, ok := mean[int32(f+gap)]; ok {
				steps = append(steps, math.Abs(b[0]/b[1]-a[0]/a[1])/float64(gap))
				break
			}
		}
	}
	return median(steps)
}

// Warning is something that a reader of the result must know. Code is a short
// stable word, Text a sentence, Where the crystal, position or item concerned.
type Warning struct{ Code, Text, Where string }

// Scaled holds the observations of one position on the common scale: Unique
// indexes the catalogue, Raw the table of indices as measured. Var is the
// variance at the expected, not the observed, intensity, noise model included.
// Phi is nil when there are no real angles.
type Scaled struct {
	Unique, Raw []int32
	I, Var, Phi []float64
}

// Merged holds one intensity a unique reflection, dense over the catalogue.
// N is the number of observations behind it; where N is 0 the reflection was
// not measured and J is 0, Var +Inf.
type Merged struct {
	J, Var []float64
	N      []int32
}
