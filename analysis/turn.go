package analysis

import (
	"fmt"
	"math"
	"slices"

	"thinward/analysis/intensity"
)

// leastGapDeg is the unmeasured part of a full turn above which angles are taken
// modulo 360: without one there is no place to cut the circle.
const leastGapDeg = 30

// oneTurn brings the angles of one crystal to one turn where they are spread over more:
// lists that count from 0 to 360, or on from an earlier scan, name the same angle
// of the goniometer in two ways, and such observations would neither be matched
// nor share a scale curve. The circle is cut in the middle of its widest gap, and
// what results lies as near to 0 as it can. Columns are replaced, not changed.
// The text says what was done, empty when nothing was.
func oneTurn(list []Accepted) string {
	var all []float64
	for i := range list {
		all = append(all, list[i].Observations.Phi...)
	}
	if len(all) == 0 {
		return ""
	}
	lo, hi := slices.Min(all), slices.Max(all)
	if hi-lo <= 180 {
		return ""
	}
	for i, v := range all {
		all[i] = v - 360*math.Floor(v/360)
	}
	slices.Sort(all)
	gap, after := all[0]+360-all[len(all)-1], all[0]
	for i := 1; i < len(all); i++ {
		if g := all[i] - all[i-1]; g > gap {
			gap, after = g, all[i]
		}
	}
	if gap < leastGapDeg || 360-gap >= hi-lo {
		return ""
	}
	span := 360 - gap
	after -= 360 * math.Round((after+span/2)/360)
	cut := after - gap/2
	for i := range list {
		if list[i].Observations.Phi == nil {
			continue
		}
		c := *list[i].Observations
		c.Phi = slices.Clone(c.Phi)
		for o, v := range c.Phi {
			c.Phi[o] = v - 360*math.Floor((v-cut)/360)
		}
		list[i].Observations = &c
	}
	return fmt.Sprintf("rotation angles from %.4g to %.4g degrees were brought to one turn, %.4g to %.4g", lo, hi, after, after+span)
}

func turned(where, text string) intensity.Warning {
	return intensity.Warning{Code: "angles-turned", Where: where, Text: text}
}
