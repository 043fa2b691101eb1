package intensity

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// Sigmas says whether reported uncertainties look like uncertainties, before
// anything is scaled.
//
// Near equivalents are pairs of observations of one unique reflection that lie
// within WindowDeg of rotation of each other, so that the scale between them is
// nearly one; for electrons Friedel mates are mostly such pairs, since the sphere
// is nearly flat. Each observation is in one pair at most. Of them those count
// that are weak, (I1+I2)/2 < 5 sqrt((sigma1^2+sigma2^2)/2), where errors
// proportional to the intensity, what is left of the scale, and Friedel
// differences are small beside sigma; where there are fewer than 30 such pairs,
// all. Then
//
//	Chi2 = median of (I1-I2)^2/(sigma1^2+sigma2^2) / 0.454936
//
// the divisor being the median of chi squared with one degree of freedom. It is 1
// for right sigmas and f^2 for sigmas that are too small by f. Its standard error
// is Chi2 times 2.333/sqrt(n), the asymptotic one of a sample median. It cannot see
// what both observations share (background, the error of a frame they lie on) nor
// errors in proportion to strong intensities: these are for the noise model.
type Sigmas struct {
	N int
	// Same is the share of observations that carry the commonest sigma, SameValue.
	Same, SameValue float64
	// Proportional is the share of observations whose sigma/|I| lies within one
	// percent of its median, Relative.
	Proportional, Relative float64
	// Middle, Ceiling and Highest are the median, the 99th percentile and the largest I/sigma.
	Middle, Ceiling, Highest float64
	// Pairs counts the near equivalents behind Chi2, of NearPairs in all; WeakOnly
	// says that the weak ones sufficed. AnyAngle says that there are no angles, and
	// that equivalents count as near wherever they lie: Chi2 then holds changes of the
	// scale too and is an upper bound.
	Pairs, NearPairs   int
	WeakOnly, AnyAngle bool
	Chi2, Chi2SE       float64 // NaN with fewer than 10 pairs
	// Warnings call sigmas too small or too large when Chi2 is off by a factor of two
	// and by three standard errors of its logarithm, and say what is made up.
	Warnings []Warning
}

// WindowDeg is the rotation within which equivalents count as near, and over
// which a scale seldom changes by more than a few percent (common practice, no
// source).
const WindowDeg = 5

const (
	weakPair     = 5.0       // I/sigma of a pair below which it is weak
	fewestWeak   = 30        // weak pairs that suffice alone
	fewestPairs  = 10        // pairs below which nothing is said
	medianOfChi2 = 0.4549364 // of one degree of freedom
	medianSpread = 2.333     // relative standard error of that median times sqrt(n): 1/(2 f(m) m) with f the density
	tooFewSigmas = 20        // observations below which shares mean nothing
	// A ceiling of 300 is 90000 electrons in more than one reflection of a hundred,
	// in every observation of it; chosen, no source.
	highestCeiling = 300
)

// CheckSigmas looks at the sigmas of one position: unique as of
// Catalogue.Assign, parallel to the observations. Allowed and forbidden
// reflections count alike. It panics when the lengths differ. No observations:
// zero counts and NaN.
func CheckSigmas(unique []int32, c *Columns) *Sigmas {
	if len(unique) != c.Len() {
		panic("intensity: CheckSigmas: columns differ in length")
	}
	s := &Sigmas{N: c.Len(), AnyAngle: c.Phi == nil, Chi2: math.NaN(), Chi2SE: math.NaN()}
	s.shares(c)
	s.pairs(unique, c)
	s.warn()
	return s
}

func (s *Sigmas) shares(c *Columns) {
	nan := math.NaN()
	s.Same, s.SameValue, s.Proportional, s.Relative, s.Middle, s.Ceiling, s.Highest = nan, nan, nan, nan, nan, nan, nan
	if s.N == 0 {
		return
	}
	sorted := slices.Clone(c.Sigma)
	slices.Sort(sorted)
	run, best := 0, 0
	for i, v := range sorted {
		if i == 0 || v != sorted[i-1] {
			run = 0
		}
		if run++; run > best {
			best, s.SameValue = run, v
		}
	}
	s.Same = float64(best) / float64(s.N)
	ratio, relative := make([]float64, s.N), make([]float64, s.N)
	for r := range ratio {
		ratio[r] = c.I[r] / c.Sigma[r]
		relative[r] = c.Sigma[r] / math.Abs(c.I[r]) // +Inf for I = 0
	}
	slices.Sort(ratio)
	slices.Sort(relative)
	s.Middle, s.Ceiling, s.Highest = ratio[s.N/2], ratio[min(s.N-1, 99*s.N/100)], ratio[s.N-1]
	s.Relative = relative[s.N/2]
	near := 0
	for _, v := range relative {
		if math.Abs(v/s.Relative-1) <= 0.01 {
			near++
		}
	}
	s.Proportional = float64(near) / float64(s.N)
}

// pairs fills Chi2 from near equivalents.
func (s *Sigmas) pairs(unique []int32, c *Columns) {
	order := make([]int32, len(unique))
	for r := range order {
		order[r] = int32(r)
	}
	slices.SortFunc(order, func(a, b int32) int {
		along := 0
		if c.Phi != nil {
			along = cmp.Compare(c.Phi[a], c.Phi[b])
		}
		return cmp.Or(cmp.Compare(unique[a], unique[b]), along, cmp.Compare(a, b))
	})
	var weak, all []float64
	for i := 0; i+1 < len(order); i++ {
		a, b := order[i], order[i+1]
		if unique[a] != unique[b] || c.Phi != nil && c.Phi[b]-c.Phi[a] > WindowDeg {
			continue
		}
		i++ // both are used
		v := c.Sigma[a]*c.Sigma[a] + c.Sigma[b]*c.Sigma[b]
		d := c.I[a] - c.I[b]
		all = append(all, d*d/v)
		if c.I[a]+c.I[b] < weakPair*math.Sqrt(2*v) {
			weak = append(weak, d*d/v)
		}
	}
	s.NearPairs = len(all)
	if s.WeakOnly = len(weak) >= fewestWeak; s.WeakOnly {
		all = weak
	}
	if s.Pairs = len(all); s.Pairs < fewestPairs {
		return
	}
	s.Chi2 = median(all) / medianOfChi2
	s.Chi2SE = s.Chi2 * medianSpread / math.Sqrt(float64(s.Pairs))
}

func (s *Sigmas) warn() {
	add := func(code, format string, args ...any) {
		s.Warnings = append(s.Warnings, Warning{Code: code, Text: fmt.Sprintf(format, args...)})
	}
	if s.N < tooFewSigmas {
		return
	}
	switch {
	case s.Same > 0.5:
		add("sigma-same", "%.0f %% of the sigmas are exactly %g: one number in place of an uncertainty; give the column of uncertainties", 100*s.Same, s.SameValue)
	case s.Proportional > 0.5:
		add("sigma-proportional", "%.0f %% of the sigmas are %.3g of the intensity: they were made from it, and weak reflections, whose true errors are larger, get too much weight", 100*s.Proportional, s.Relative)
	case s.Ceiling > highestCeiling:
		add("sigma-tiny", "one observation in a hundred has I/sigma above %.0f, which takes %.2g electrons each: the sigmas look too small, or in another unit than the intensities", s.Ceiling, s.Ceiling*s.Ceiling)
	}
	which := "equivalents measured close together"
	if s.AnyAngle {
		which = "equivalents (at any angle, none being given)"
	}
	off := math.Log(s.Chi2)
	if !(math.Abs(off) > math.Ln2 && math.Abs(off) > 3*s.Chi2SE/s.Chi2) {
		return
	}
	switch {
	case off > 0 && !s.AnyAngle:
		add("sigma-small", "%s differ by %.1f times what their sigmas say (%d pairs): sigmas are too small; the noise model scales them up", which, math.Sqrt(s.Chi2), s.Pairs)
	case off < 0:
		add("sigma-large", "%s differ by %.2f times what their sigmas say (%d pairs): sigmas are too large, or the observations are no independent ones", which, math.Sqrt(s.Chi2), s.Pairs)
	}
}
