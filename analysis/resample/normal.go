package resample

import (
	"math"

	"gonum.org/v1/gonum/mathext"
)

func normCDF(z float64) float64 { return 0.5 * math.Erfc(-z/math.Sqrt2) }

// normQuantile is the inverse of normCDF; 0 and 1 give -Inf and +Inf.
func normQuantile(p float64) float64 { return mathext.NormalQuantile(p) }
