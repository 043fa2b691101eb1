package pool

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Design says what was measured and how well m came out of it.
type Design struct {
	SE           float64 // standard error of m of one crystal
	Pairs        float64 // pairs behind it
	Multiplicity float64 // observations a reflection and position
	NoiseShare   float64 // share of SE^2 that counting noise makes; the rest is deviations, which more counting does not remove
	Tau          float64 // spread of m between crystals, 0 when not known
}

// Visible returns the smallest m that a two-sided test of the given level
// (0 = 0.05) sees with the given power (0 = 0.8):
//
//	m = (z_(1-level/2) + z_power) SE
func Visible(se, level, power float64) float64 {
	if level == 0 {
		level = 0.05
	}
	if power == 0 {
		power = 0.8
	}
	return (distuv.UnitNormal.Quantile(1-level/2) + distuv.UnitNormal.Quantile(power)) * se
}

// SEFor returns the standard error of the mean m over crystals, each with pairs
// pairs at the given multiplicity, if noise and deviations are as in d: both
// parts fall with the number of pairs, the noise part also with multiplicity,
// and the spread between crystals with their number only.
func (d Design) SEFor(crystals, pairs, multiplicity float64) float64 {
	v := d.SE * d.SE * d.Pairs / pairs
	v *= d.NoiseShare*d.Multiplicity/multiplicity + 1 - d.NoiseShare
	return math.Sqrt((v + d.Tau*d.Tau) / crystals)
}

// Crystals returns the smallest number of crystals like those of d, measured
// the same way, with which m is seen at the level and power of Visible.
func (d Design) Crystals(m, level, power float64) (int, error) {
	if !(m > 0) || !(d.SE > 0) || !(d.Pairs > 0) || !(d.Multiplicity > 0) || !(d.NoiseShare >= 0 && d.NoiseShare <= 1) || !(d.Tau >= 0) {
		return 0, errors.New("pool: a plan needs a positive m, SE, pairs and multiplicity, a share between 0 and 1 and a spread of 0 or more")
	}
	one := Visible(d.SEFor(1, d.Pairs, d.Multiplicity), level, power)
	return int(math.Ceil((one/m)*(one/m) - 1e-9)), nil
}
