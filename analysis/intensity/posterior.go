package intensity

import "math"

// Posterior returns the mean and standard deviation of the true intensity given
// one observed, i with standard uncertainty sigma, when intensities follow
// Wilson's law with the given mean and are not negative (French & Wilson 1978,
// Acta Cryst. A34, 517):
//
//	p(J | i) ~ exp(-(J - i)^2 / 2 sigma^2) p(J),  J >= 0
//	p(J) = exp(-J/mean) acentric,  exp(-J/(2 mean)) / sqrt(J) centric
//
// Acentric it is a normal cut off at zero, in closed form; centric by
// quadrature in sqrt(J), good to 1e-6. sigma and mean must be above zero and i finite,
// otherwise both results are NaN.
func Posterior(i, sigma, mean float64, centric bool) (j, sd float64) {
	if !(sigma > 0) || !(mean > 0) || !finite(i+sigma+mean) {
		return math.NaN(), math.NaN()
	}
	if centric {
		return centricPosterior(i, sigma, mean)
	}
	h := i/sigma - sigma/mean
	if h < -30 {
		// Differences of nearly equal numbers otherwise: the tail is nearly
		// exponential, and its moments are series in 1/h^2.
		q := 1 / (h * h)
		return sigma / -h * (1 - 2*q + 10*q*q), sigma / -h * math.Sqrt(1-6*q+50*q*q)
	}
	inverse := 1 / mills(-h)
	return sigma * (h + inverse), sigma * math.Sqrt(math.Max(1-inverse*(h+inverse), 0))
}

// centricPosterior integrates over u = sqrt(J), in which the prior is a
// half normal density, about the largest value of the integrand.
func centricPosterior(i, sigma, mean float64) (j, sd float64) {
	log := func(u float64) float64 {
		d := (u*u - i) / sigma
		return -0.5*d*d - 0.5*u*u/mean
	}
	// The integrand peaks where J = i - sigma^2/(2 mean), or at zero.
	peak := math.Sqrt(math.Max(i-0.5*sigma*sigma/mean, 0))
	top := log(peak)
	lo, hi := peak, peak
	step := 0.05 * math.Min(math.Sqrt(sigma), math.Sqrt(mean))
	if peak > 0 {
		step = math.Min(step, 0.1*sigma/peak)
	} else {
		// Far below zero the integrand falls off like exp(-u^2 |slope|).
		step = math.Min(step, 0.1/math.Sqrt(math.Max(-i/(sigma*sigma), 0)+0.5/mean))
	}
	for lo > 0 && log(lo)-top > -40 {
		lo = math.Max(lo-step, 0)
	}
	for log(hi)-top > -40 {
		hi += step
	}
	const n = 2000
	var w, first, second float64
	for k := 0; k <= n; k++ {
		u := lo + (hi-lo)*float64(k)/n
		p := math.Exp(log(u) - top)
		switch {
		case k == 0 || k == n:
		case k%2 == 1:
			p *= 4
		default:
			p *= 2
		}
		w += p
		first += p * u * u
		second += p * u * u * u * u
	}
	j = first / w
	return j, math.Sqrt(math.Max(second/w-j*j, 0))
}
