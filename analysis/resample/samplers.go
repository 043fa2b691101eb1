package resample

import "math"

// Normal returns a standard normal number (polar method: Marsaglia & Bray 1964,
// SIAM Rev. 6:260).
func (s *Stream) Normal() float64 {
	if s.hasSpare {
		s.hasSpare = false
		return s.spare
	}
	for {
		u := float64(2*s.Open()) - 1
		v := float64(2*s.Open()) - 1
		q := float64(u*u) + float64(v*v)
		if q >= 1 || q == 0 {
			continue
		}
		f := math.Sqrt(-2 * math.Log(q) / q)
		s.spare, s.hasSpare = v*f, true
		return u * f
	}
}

// Exponential returns an exponential number of mean 1.
func (s *Stream) Exponential() float64 { return -math.Log(s.Open()) }

// Gamma returns a gamma number of the given shape and scale, mean shape*scale
// (Marsaglia & Tsang 2000, ACM Trans. Math. Softw. 26:363). It panics unless
// both are positive and finite.
func (s *Stream) Gamma(shape, scale float64) float64 {
	if !(shape > 0) || !(scale > 0) || math.IsInf(shape, 0) || math.IsInf(scale, 0) {
		panic("resample: Stream.Gamma: shape and scale must be positive and finite")
	}
	if shape < 1 {
		return s.Gamma(shape+1, scale) * math.Pow(s.Open(), 1/shape)
	}
	d := shape - 1.0/3
	c := 1 / math.Sqrt(9*d)
	for {
		x := s.Normal()
		v := 1 + float64(c*x)
		if v <= 0 {
			continue
		}
		v = float64(v*v) * v
		if math.Log(s.Open()) < float64(0.5*x*x)+d-float64(d*v)+float64(d*math.Log(v)) {
			return d * v * scale
		}
	}
}

// ChiSquared returns a chi-squared number with df > 0 degrees of freedom.
func (s *Stream) ChiSquared(df float64) float64 {
	if !(df > 0) {
		panic("resample: Stream.ChiSquared: df must be positive")
	}
	return s.Gamma(df/2, 2)
}

// StudentT returns a Student-t number with df > 0 degrees of freedom.
func (s *Stream) StudentT(df float64) float64 {
	if !(df > 0) {
		panic("resample: Stream.StudentT: df must be positive")
	}
	if math.IsInf(df, 1) {
		return s.Normal()
	}
	z := s.Normal()
	return z / math.Sqrt(s.ChiSquared(df)/df)
}

// Poisson returns a Poisson number of the given mean: inversion below 10, above
// it the transformed rejection PTRS (Hoermann 1993, Insur. Math. Econ. 12:39).
// It panics unless 0 <= mean < 2^53; mean 0 gives 0.
func (s *Stream) Poisson(mean float64) int {
	if !(mean >= 0 && mean < 0x1p53) {
		panic("resample: Stream.Poisson: mean must be at least 0 and below 2^53")
	}
	if mean < 10 {
		return s.poissonSmall(mean)
	}
	b := 0.931 + 2.53*math.Sqrt(mean)
	a := -0.059 + 0.02483*b
	invAlpha := 1.1239 + 1.1328/(b-3.4)
	vr := 0.9277 - 3.6224/(b-2)
	lnMean := math.Log(mean)
	for {
		u := s.Float64() - 0.5
		v := s.Open()
		us := 0.5 - math.Abs(u)
		k := math.Floor(float64((2*a/us+b)*u) + mean + 0.43)
		if us >= 0.07 && v <= vr {
			return int(k)
		}
		if k < 0 || (us < 0.013 && v > us) {
			continue
		}
		lg, _ := math.Lgamma(k + 1)
		if math.Log(v*invAlpha/(a/(us*us)+b)) <= float64(k*lnMean)-mean-lg {
			return int(k)
		}
	}
}

func (s *Stream) poissonSmall(mean float64) int {
	u := s.Float64()
	p := math.Exp(-mean)
	k, f := 0, p
	// The bound is far beyond any mass at mean 10; it stops a sum of rounded terms
	// that never reaches a u next to 1.
	for u >= f && k < 200 {
		k++
		p *= mean / float64(k)
		f += p
	}
	return k
}

// Binomial returns the number of successes in n trials of probability p:
// inversion when n*min(p,1-p) < 10, else the transformed rejection BTRS
// (Hoermann 1993, J. Stat. Comput. Simul. 46:101). It panics unless n >= 0 and
// 0 <= p <= 1.
func (s *Stream) Binomial(n int, p float64) int {
	if n < 0 || !(p >= 0 && p <= 1) {
		panic("resample: Stream.Binomial: need n >= 0 and 0 <= p <= 1")
	}
	if p > 0.5 {
		return n - s.binomialHalf(n, 1-p)
	}
	return s.binomialHalf(n, p)
}

func (s *Stream) binomialHalf(n int, p float64) int {
	if n == 0 || p == 0 {
		return 0
	}
	nf, q := float64(n), 1-p
	if nf*p < 10 {
		u := s.Float64()
		f := math.Exp(nf * math.Log1p(-p))
		sum, k := f, 0
		for u >= sum && k < n && k < 300 {
			k++
			f *= (nf - float64(k) + 1) / float64(k) * (p / q)
			sum += f
		}
		return k
	}
	spq := math.Sqrt(nf * p * q)
	b := 1.15 + 2.53*spq
	a := -0.0873 + 0.0248*b + 0.01*p
	c := nf*p + 0.5
	vr := 0.92 - 4.2/b
	alpha := (2.83 + 5.1/b) * spq
	lpq := math.Log(p / q)
	m := math.Floor((nf + 1) * p)
	lgm, _ := math.Lgamma(m + 1)
	lgn, _ := math.Lgamma(nf - m + 1)
	h := lgm + lgn
	for {
		u := s.Float64() - 0.5
		v := s.Open()
		us := 0.5 - math.Abs(u)
		k := math.Floor(float64((2*a/us+b)*u) + c)
		if k < 0 || k > nf {
			continue
		}
		if us >= 0.07 && v <= vr {
			return int(k)
		}
		l1, _ := math.Lgamma(k + 1)
		l2, _ := math.Lgamma(nf - k + 1)
		if math.Log(v*alpha/(a/(us*us)+b)) <= h-l1-l2+float64((k-m)*lpq) {
			return int(k)
		}
	}
}
