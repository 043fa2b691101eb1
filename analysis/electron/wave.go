package electron

import "math"

// Constants of CODATA 2018, SI; those of h, c and e are exact.
const (
	planck    = 6.62607015e-34
	charge    = 1.602176634e-19
	mass      = 9.1093837015e-31
	restKeV   = 510.99894999
	bohr      = 0.529177210903 // angstrom
	mottBethe = 0.0239336610   // m e^2/(8 pi epsilon0 h^2) = 1/(8 pi^2 a0), 1/angstrom
)

// potentialUnit is h^2/(2 pi m e) in V angstrom^2.
const potentialUnit = 1e20 * planck * planck / (2 * math.Pi * mass * charge)

// Wavelength returns the relativistic de Broglie wavelength in angstrom of
// electrons of the given energy in keV, h / sqrt(2 m e V (1 + eV/2mc^2))
// (de Broglie 1925). It is NaN for an energy that is not positive.
func Wavelength(energyKeV float64) float64 {
	if !(energyKeV > 0) {
		return math.NaN()
	}
	return 1e10 * planck / math.Sqrt(2*mass*charge*energyKeV*1e3*(1+energyKeV/(2*restKeV)))
}

// Gamma returns 1 + eV/mc^2, the mass of the electron over its rest mass. It is
// NaN for an energy that is not positive.
func Gamma(energyKeV float64) float64 {
	if !(energyKeV > 0) {
		return math.NaN()
	}
	return 1 + energyKeV/restKeV
}

// Beta returns the speed over that of light, sqrt(1 - 1/gamma^2). It is NaN for
// an energy that is not positive.
func Beta(energyKeV float64) float64 {
	g := Gamma(energyKeV)
	return math.Sqrt((g-1)*(g+1)) / g
}

// Interaction returns the interaction constant sigma = 2 pi gamma m e lambda/h^2
// in rad/(V nm): the phase that a volt adds on a nanometre. It is NaN for an energy
// that is not positive.
func Interaction(energyKeV float64) float64 {
	return 10 * Gamma(energyKeV) * Wavelength(energyKeV) / potentialUnit
}
