// Package electron holds what is known of fast electrons in a thin crystal:
// their wavelength, how far they go before they scatter, how a strong beam
// exchanges intensity with another, and what many beams do at once.
//
// Wavelength, Gamma, Beta and Interaction are relativistic kinematics.
// ScatteringFactor and StructureFactors are kinematic amplitudes. TwoBeam,
// BlackmanRatio and their kin are closed forms of the two-beam case; ShareOf
// counts collisions by Poisson's law. Rotate calculates dynamical intensities of
// an invented crystal by the eigenvalue method for many beams, integrated over
// rotation: physics that no other part assumes, so that they can be tried on it.
//
// It is NOT for data: the budget and the curves say what scattering physics
// leads one to expect, not what a series must show, and the crystals of the
// many-beam calculation are perfect and absorb nothing. It reads no files and
// draws nothing. Invented series are made in package simulate.
package electron
