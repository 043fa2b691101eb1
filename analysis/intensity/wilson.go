package intensity

import "math"

// WilsonBelow is the share of reflections with intensity below z, in units of
// the local mean (Wilson 1949; Howells, Phillips & Rogers 1950):
//
//	acentric 1 - exp(-z),  centric erf(sqrt(z/2))
//
// 0 for z <= 0; NaN gives NaN.
func WilsonBelow(z float64, centric bool) float64 {
	switch {
	case z <= 0:
		return 0
	case centric:
		return math.Erf(math.Sqrt(z / 2))
	}
	return -math.Expm1(-z)
}

// TwinBelow is the same for acentric reflections of a perfect twin of two
// domains, 1 - (1 + 2z) exp(-2z).
func TwinBelow(z float64) float64 {
	if z <= 0 {
		return 0
	}
	return 1 - (1+2*z)*math.Exp(-2*z)
}

// WilsonMoment is the n-th moment of intensity over the n-th power of its mean:
// n! acentric, 1 3 5 ... (2n-1) centric. n below 0 panics.
func WilsonMoment(n int, centric bool) float64 {
	if n < 0 {
		panic("intensity: WilsonMoment: negative order")
	}
	m := 1.0
	for k := 1; k <= n; k++ {
		if centric {
			m *= float64(2*k - 1)
		} else {
			m *= float64(k)
		}
	}
	return m
}

// WilsonNoisyBelow is the share of reflections observed below z when normal
// noise of standard deviation sigma, in the same units, is added to
// intensities of Wilson's law; sigma 0 is WilsonBelow. Acentric it is
//
//	Phi(z/sigma) - exp(sigma^2/2 - z) Phi(z/sigma - sigma)
//
// centric a quadrature over the structure factor, good to 1e-8. NaN or a
// negative sigma gives NaN.
func WilsonNoisyBelow(z, sigma float64, centric bool) float64 {
	switch {
	case sigma == 0:
		return WilsonBelow(z, centric)
	case !(sigma > 0) || math.IsNaN(z):
		return math.NaN()
	case centric:
		return centricNoisyBelow(z, sigma)
	}
	t := z / sigma
	if t > sigma {
		return normalCDF(t) - math.Exp(0.5*sigma*sigma-z)*normalCDF(t-sigma)
	}
	return normalCDF(t) - math.Exp(-0.5*t*t)/math.Sqrt(2*math.Pi)*mills(sigma-t)
}

// mills is (1 - Phi(x)) / phi(x), by continued fraction where the difference
// would lose its digits (Abramowitz & Stegun 1964, 26.2.14).
func mills(x float64) float64 {
	if x < 4 {
		return normalCDF(-x) * math.Sqrt(2*math.Pi) * math.Exp(0.5*x*x)
	}
	f := x
	for k := 60; k >= 1; k-- {
		f = x + float64(k)/f
	}
	return 1 / f
}

// centricNoisyBelow integrates Phi((z - u^2)/sigma) over a normal u; outside
// the range where that is neither 0 nor 1 the integral is known.
func centricNoisyBelow(z, sigma float64) float64 {
	const reach = 8
	lo := math.Sqrt(math.Max(z-reach*sigma, 0))
	hi := math.Min(math.Sqrt(math.Max(z+reach*sigma, 0)), 9)
	below := math.Erf(math.Min(lo, 9) / math.Sqrt2)
	if hi <= lo {
		return below
	}
	const n = 240
	sum := 0.0
	for k := 0; k <= n; k++ {
		u := lo + (hi-lo)*float64(k)/n
		w := 2.0
		switch {
		case k == 0 || k == n:
			w = 1
		case k%2 == 1:
			w = 4
		}
		sum += w * normalCDF((z-u*u)/sigma) * math.Exp(-0.5*u*u)
	}
	return below + sum*(hi-lo)/(3*n)*math.Sqrt(2/math.Pi)
}
