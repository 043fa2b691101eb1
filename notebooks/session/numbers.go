package session

import (
	"fmt"
	"math"
	"strconv"

	"thinward/analysis"
)

// number writes v with the given decimals; not-a-number is a dash.
func number(v float64, decimals int) string {
	switch {
	case math.IsNaN(v):
		return "\u2013"
	case math.IsInf(v, 1):
		return "\u221e"
	case math.IsInf(v, -1):
		return "\u2212\u221e"
	}
	s := strconv.FormatFloat(math.Abs(v), 'f', decimals, 64)
	if v < 0 {
		for _, c := range s {
			if c != '0' && c != '.' {
				return "\u2212" + s
			}
		}
	}
	return s
}

// auto writes v with three digits that matter, a whole number from 1 on without
// decimals.
func auto(v float64) string {
	a := math.Abs(v)
	switch {
	case a == 0 || math.IsNaN(v) || math.IsInf(v, 0):
		return number(v, 0)
	case a >= 100 || a == math.Trunc(a):
		return number(v, 0)
	case a >= 10:
		return number(v, 1)
	case a >= 1:
		return number(v, 2)
	case a >= 0.001:
		return number(v, 3)
	}
	return strconv.FormatFloat(v, 'e', 1, 64)
}

// between writes an interval, "0.052 to 0.110".
func between(lo, hi float64, decimals int) string {
	if math.IsNaN(lo) && math.IsNaN(hi) {
		return "\u2013"
	}
	return number(lo, decimals) + " to " + number(hi, decimals)
}

// bounded takes both ends off an interval that is open on both sides: it bounds nothing.
func bounded(i analysis.Interval) analysis.Interval {
	if math.IsInf(i.Lo, -1) && math.IsInf(i.Hi, 1) {
		i.Lo, i.Hi = math.NaN(), math.NaN()
	}
	return i
}

// withInterval writes "0.081 (0.052 to 0.110)", or why there is none.
func withInterval(i analysis.Interval, decimals int) string {
	if math.IsNaN(i.Value) {
		if i.Why != "" {
			return "not estimable: " + i.Why
		}
		return "\u2013"
	}
	return fmt.Sprintf("%s (%s)", number(i.Value, decimals), between(i.Lo, i.Hi, decimals))
}

// pvalue writes p, "< 0.001" below that.
func pvalue(p float64) string {
	switch {
	case math.IsNaN(p):
		return "\u2013"
	case p < 0.001:
		return "< 0.001"
	}
	return number(p, 3)
}

func percent(v float64, decimals int) string {
	if math.IsNaN(v) {
		return "\u2013"
	}
	return number(100*v, decimals) + " %"
}

func count(n int) string { return strconv.Itoa(n) }

// plural writes a number of things.
func plural(n int, thing string) string {
	if n == 1 {
		return "1 " + thing
	}
	return count(n) + " " + thing + "s"
}

// contrastName gives "L1: thin - thick".
func contrastName(c *analysis.ContrastResult) string {
	if c.ThickCrystal != "" {
		return c.Crystal + "/" + c.Thin + " \u2212 " + c.ThickCrystal + "/" + c.Thick
	}
	return c.Crystal + ": " + c.Thin + " \u2212 " + c.Thick
}
