package resample

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
)

// accelerate runs the jackknife over units or groups of units.
func (b *ScalarBoot) accelerate(ctx context.Context, u units, n int, stat func([]float64) ([]float64, error), s *Settings) error {
	if s.Accel != nil {
		b.Accel = slices.Clone(s.Accel)
		return nil
	}
	k := len(b.Estimate)
	groups := min(u.n, s.JackknifeGroups)
	b.Accel = make([]float64, k)
	if groups < 2 {
		return nil
	}
	left := make([][]float64, groups)
	quiet := *s
	quiet.Progress = nil
	scratch := func() []float64 { return make([]float64, n) }
	err := eachReplicate(ctx, groups, &quiet, scratch, func(w []float64, g int) error {
		for i := range w {
			j := i
			if u.of != nil {
				j = int(u.of[i])
			}
			w[i] = 1
			if j%groups == g {
				w[i] = 0
			}
		}
		v, err := stat(w)
		if err == nil && (len(v) != k || !finite(v)) {
			err = errors.New("not finite")
		}
		if err != nil {
			return fmt.Errorf("resample: Scalars: without group %d of %d: %w", g, groups, err)
		}
		left[g] = slices.Clone(v)
		return nil
	})
	if err != nil {
		return err
	}
	b.JackSE, b.JackBias = make([]float64, k), make([]float64, k)
	influence := make([]float64, groups)
	for j := range k {
		mean := 0.0
		for _, v := range left {
			mean += (v[j] - b.Estimate[j]) / float64(groups)
		}
		ss := 0.0
		for g, v := range left {
			influence[g] = mean + b.Estimate[j] - v[j]
			ss += float64(influence[g] * influence[g])
		}
		f := float64(groups - 1)
		b.JackSE[j] = math.Sqrt(f / float64(groups) * ss)
		b.JackBias[j] = f * mean
		b.Accel[j] = Acceleration(influence)
	}
	return nil
}

// Acceleration returns a = sum l^3 / (6 (sum l^2)^1.5) of centred influence
// values l (Efron 1987, eq. 6.6), 0 when they are all 0. For a weighted mean
// sum(w y)/sum(w) the influence values are l_i = w_i (y_i - mean).
func Acceleration(influence []float64) float64 {
	scale := 0.0
	for _, l := range influence {
		scale = math.Max(scale, math.Abs(l))
	}
	if !(scale > 0) {
		return 0
	}
	var two, three float64
	for _, l := range influence {
		x := l / scale
		two += float64(x * x)
		three += float64(float64(x*x) * x)
	}
	return three / (6 * math.Pow(two, 1.5))
}

func (b *ScalarBoot) bca() {
	alpha := (1 - b.Level) / 2
	for j, e := range b.Estimate {
		l := newLaw(b.column(j), b.Prob)
		z0 := normQuantile(l.below(e, 1e-10*b.SE[j]))
		p1, p2 := bcaLevels(z0, b.Accel[j], alpha)
		lo, hi := l.lower(p1), l.upper(p2)
		if b.Units < UnitsNeeded(b.Level) || math.IsInf(z0, 0) {
			lo, hi = math.Inf(-1), math.Inf(1)
		}
		b.Z0 = append(b.Z0, z0)
		b.LoBCa, b.HiBCa = append(b.LoBCa, lo), append(b.HiBCa, hi)
	}
}

// below returns the share of draws under e, those within tol of it by half.
func (l law) below(e, tol float64) float64 {
	sum, total := 0.0, 0.0
	for i, v := range l.x {
		p := 1.0
		if l.prob != nil {
			p = l.prob[i]
		}
		total += p
		switch {
		case math.Abs(v-e) <= tol:
			sum += p / 2
		case v < e:
			sum += p
		}
	}
	return sum / total
}

// bcaLevels are the levels of the BCa interval with tails alpha: Efron &
// Tibshirani 1993, eq. 14.10. Where 1 - a(z0 + z) is not positive the level runs
// to the end.
func bcaLevels(z0, a, alpha float64) (lo, hi float64) {
	level := func(z float64) float64 {
		d := 1 - a*(z0+z)
		if d <= 0 {
			if z < 0 {
				return 0
			}
			return 1
		}
		return normCDF(z0 + (z0+z)/d)
	}
	z := normQuantile(1 - alpha)
	return level(-z), level(z)
}
