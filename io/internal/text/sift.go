package text

import (
	"math"

	"thinward/analysis/intensity"
)

// Aside counts the rows that were read and not used for one reason. FirstLine is
// the line of the first of them.
type Aside struct {
	Reason    string
	Count     int
	FirstLine int
}

// Marks of values that are null in a file, in columns that have no NaN.
const (
	NullIndex = math.MinInt16
	NullFrame = math.MinInt32
)

// The common reasons for setting a row aside, in the order in which they are tried.
const (
	ReasonNullIndex      = "index is null"
	ReasonZeroIndex      = "index is 0 0 0"
	ReasonNullIntensity  = "intensity is null"
	ReasonNullSigma      = "sigma is null"
	ReasonSigma          = "sigma is zero or negative"
	ReasonNullAngle      = "angle is null"
	ReasonNullFrame      = "frame is null"
	ReasonNullPartiality = "partiality is null"
)

// Sift returns the usable rows of raw and a count of the others by reason, in the
// order in which the reasons first occur. skip, where not nil, is asked first: a
// non-empty reason sets the row aside, and "\x00" leaves it out without a count
// (it belongs to another data set). line gives the line of a row. An angle, frame
// or partiality column that is null throughout is left out instead of costing
// every row. raw is not changed; it is returned as it is when every row is used.
func Sift(raw *intensity.Columns, skip func(row int) string, line func(row int) int) (*intensity.Columns, []Aside) {
	use := *raw
	use.Phi = unlessAllNaN(raw.Phi)
	use.Partiality = unlessAllNaN(raw.Partiality)
	use.Frame = unlessAllNull(raw.Frame)
	if skip == nil && faultless(&use) {
		return &use, nil
	}
	var asides []Aside
	keep := make([]int32, 0, len(raw.I))
	for i := range raw.I {
		reason := ""
		if skip != nil {
			reason = skip(i)
		}
		if reason == "" {
			reason = fault(&use, i)
		}
		switch reason {
		case "":
			keep = append(keep, int32(i))
		case OtherSet:
		default:
			asides = count(asides, reason, i, line)
		}
	}
	if len(keep) == len(raw.I) {
		return &use, nil
	}
	return pick(&use, keep), asides
}

// OtherSet is what skip of Sift returns for a row of a data set that was not asked for.
const OtherSet = "\x00"

// faultless reports that no row has a fault, a column at a time, as is usual.
func faultless(c *intensity.Columns) bool {
	h, k, l := c.H, c.K[:len(c.H)], c.L[:len(c.H)]
	for i := range h {
		if h[i]|k[i]|l[i] == 0 || h[i] == NullIndex || k[i] == NullIndex || l[i] == NullIndex {
			return false
		}
	}
	for _, x := range c.Sigma {
		if !(x > 0) {
			return false
		}
	}
	for _, column := range [...][]float64{c.I, c.Phi, c.Partiality} {
		for _, x := range column {
			if x != x {
				return false
			}
		}
	}
	for _, x := range c.Frame {
		if x == NullFrame {
			return false
		}
	}
	return true
}

func fault(c *intensity.Columns, i int) string {
	h, k, l := c.H[i], c.K[i], c.L[i]
	switch {
	case h == NullIndex || k == NullIndex || l == NullIndex:
		return ReasonNullIndex
	case h == 0 && k == 0 && l == 0:
		return ReasonZeroIndex
	case math.IsNaN(c.I[i]):
		return ReasonNullIntensity
	case !(c.Sigma[i] > 0):
		if math.IsNaN(c.Sigma[i]) {
			return ReasonNullSigma
		}
		return ReasonSigma
	case c.Phi != nil && math.IsNaN(c.Phi[i]):
		return ReasonNullAngle
	case c.Frame != nil && c.Frame[i] == NullFrame:
		return ReasonNullFrame
	case c.Partiality != nil && math.IsNaN(c.Partiality[i]):
		return ReasonNullPartiality
	}
	return ""
}

func count(asides []Aside, reason string, row int, line func(int) int) []Aside {
	for i := range asides {
		if asides[i].Reason == reason {
			asides[i].Count++
			return asides
		}
	}
	return append(asides, Aside{Reason: reason, Count: 1, FirstLine: line(row)})
}

func unlessAllNaN(x []float64) []float64 {
	for _, v := range x {
		if !math.IsNaN(v) {
			return x
		}
	}
	return nil
}

func unlessAllNull(x []int32) []int32 {
	for _, v := range x {
		if v != NullFrame {
			return x
		}
	}
	return nil
}

func pick(c *intensity.Columns, keep []int32) *intensity.Columns {
	return &intensity.Columns{
		H: pick16(c.H, keep), K: pick16(c.K, keep), L: pick16(c.L, keep),
		I: pickFloat(c.I, keep), Sigma: pickFloat(c.Sigma, keep),
		Phi: pickFloat(c.Phi, keep), Frame: pick32(c.Frame, keep), Partiality: pickFloat(c.Partiality, keep),
	}
}

func pick16(x []int16, keep []int32) []int16 {
	y := make([]int16, len(keep))
	for i, j := range keep {
		y[i] = x[j]
	}
	return y
}

func pick32(x, keep []int32) []int32 {
	if x == nil {
		return nil
	}
	y := make([]int32, len(keep))
	for i, j := range keep {
		y[i] = x[j]
	}
	return y
}

func pickFloat(x []float64, keep []int32) []float64 {
	if x == nil {
		return nil
	}
	y := make([]float64, len(keep))
	for i, j := range keep {
		y[i] = x[j]
	}
	return y
}
