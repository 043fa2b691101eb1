package intensity

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

// Len returns the number of rows.
func (c *Columns) Len() int { return len(c.I) }

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
