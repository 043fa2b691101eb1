package electron

import "math"

// Potential returns the Fourier coefficient in volt of the crystal potential of
// structure factor f (angstrom) in a cell of the given volume (cubic angstrom):
// 47.8776473 f / volume (Humphreys 1979, Rep. Prog. Phys. 42, 1825; the formula
// is from memory, its constant h^2/(2 pi m e) from CODATA 2018).
func Potential(f, volume float64) float64 { return potentialUnit * f / volume }

// ExtinctionDistance returns pi V cos(theta)/(gamma lambda |F|) in angstrom of a
// reflection of structure factor f (angstrom) and spacing d (angstrom) in a cell of
// the given volume (cubic angstrom), +Inf for f = 0 (Hirsch et al. 1965, Electron
// Microscopy of Thin Crystals; from memory). It is NaN for an energy that is not
// positive and for d below half a wavelength.
func ExtinctionDistance(energyKeV, volume, f, d float64) float64 {
	lambda := Wavelength(energyKeV)
	sin := lambda / (2 * d)
	return math.Pi * volume * math.Sqrt((1-sin)*(1+sin)) / (Gamma(energyKeV) * lambda * math.Abs(f))
}

// TwoBeam returns the intensity of the diffracted beam of two at thickness t,
// extinction distance xi and excitation error s,
//
//	sin^2(pi t sqrt(1+w^2)/xi) / (1+w^2),  w = s xi
//
// (Howie & Whelan 1961), in the unit of the incident beam; t, xi and 1/s in one
// unit of length. No absorption.
func TwoBeam(t, xi, s float64) float64 {
	w := s * xi
	a := math.Sin(math.Pi * t * math.Sqrt(1+w*w) / xi)
	return a * a / (1 + w*w)
}

// TwoBeamKinematic returns the limit of TwoBeam for a weak beam,
// (pi t/xi)^2 (sin(pi t s)/(pi t s))^2.
func TwoBeamKinematic(t, xi, s float64) float64 {
	a := math.Pi * t / xi * sinc(math.Pi*t*s)
	return a * a
}

func sinc(x float64) float64 {
	if math.Abs(x) < 1e-4 {
		return 1 - x*x/6
	}
	return math.Sin(x) / x
}

// TwoBeamMean returns the mean of TwoBeam at s = 0 over thicknesses from 0 to t,
// 1/2 - xi/(4 pi t) sin(2 pi t/xi): that of a wedge seen whole. It is 0 at t = 0.
func TwoBeamMean(t, xi float64) float64 { return (1 - sinc(2*math.Pi*t/xi)) / 2 }

// RockingIntegral returns the integral of TwoBeam over w = s xi from -Inf to +Inf,
// pi times the integral of J0(2x) from 0 to a, with a = pi t/xi (Blackman 1939,
// Proc. R. Soc. A 173, 68). a < 0 gives NaN; a -> Inf tends to pi/2.
func RockingIntegral(a float64) float64 { return math.Pi / 2 * IntegralJ0(2*a) }

// BlackmanRatio returns the rocking integral over its kinematic limit,
// (1/a) times the integral of J0(2x) from 0 to a (Blackman 1939): 1 - a^2/3 for
// small a, 1/(2a) for large. a < 0 gives NaN, 0 gives 1.
func BlackmanRatio(a float64) float64 {
	if a < 1e-4 && a >= 0 {
		return 1 - a*a/3
	}
	return IntegralJ0(2*a) / (2 * a)
}

// IntegralJ0 returns the integral of the Bessel function J0 from 0 to x, as
// 2 (J1 + J3 + J5 + ...) (Abramowitz & Stegun 1964, 11.1.2), the functions by backward
// recurrence (Miller; ibid. 9.12). Above x = 20000 two terms of the asymptotic expansion
// (ibid. 11.1.11, good to 1e-10) take its place. x < 0 and NaN give NaN, +Inf gives 1.
func IntegralJ0(x float64) float64 {
	const near, far = 1e-4, 20000
	switch {
	case !(x >= 0):
		return math.NaN()
	case math.IsInf(x, 1):
		return 1
	case x < near:
		return x - x*x*x/12
	case x > far:
		sin, cos := math.Sincos(x - math.Pi/4)
		return 1 + math.Sqrt(2/(math.Pi*x))*(sin-5*cos/(8*x))
	}
	n := 2 * int(x/2+20+4*math.Cbrt(x))
	upper, here := 0.0, 1e-250
	odd, even := 0.0, 0.0 // sums over J1, J3, ... and J2, J4, ...
	for k := n; k >= 1; k-- {
		if k%2 == 0 {
			even += here
		} else {
			odd += here
		}
		upper, here = here, 2*float64(k)/x*here-upper
	}
	return 2 * odd / (here + 2*even) // 1 = J0 + 2 (J2 + J4 + ...)
}
