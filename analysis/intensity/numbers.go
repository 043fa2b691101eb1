package intensity

import (
	"math"
	"slices"
)

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

// median returns the middle of x (mean of the two middle ones), 0 for none.
func median(x []float64) float64 {
	if len(x) == 0 {
		return 0
	}
	s := slices.Clone(x)
	slices.Sort(s)
	m := len(s) / 2
	if len(s)%2 == 1 {
		return s[m]
	}
	return s[m-1] + (s[m]-s[m-1])/2
}

// normalCDF is the standard normal distribution function.
func normalCDF(x float64) float64 { return 0.5 * math.Erfc(-x/math.Sqrt2) }

// mix is the finaliser of a splitmix64 step (Steele, Lea & Flood 2014,
// doi:10.1145/2660193.2660195): every bit of the result depends on every bit
// of x.
func mix(x uint64) uint64 {
	x += 0x9e3779b97f4a7c15
	x = (x ^ x>>30) * 0xbf58476d1ce4e5b9
	x = (x ^ x>>27) * 0x94d049bb133111eb
	return x ^ x>>31
}
