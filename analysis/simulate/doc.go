// Package simulate invents a whole series: crystals, positions and unmerged rows
// whose truth is known, so that every other part can be tried on data where the
// answer is given. A Plan says what to invent; Invent returns the rows and the
// truth behind each of them.
//
// The model of observation o of reflection h in position p of one crystal is
//
//	expected = N K_p(phi) exp(-2 B_p s^2) [ (1-m_p) J'_h + m_p <J'>shell ] exp(x_ph) (1 + b e) + N o_p
//
// with s = sin(theta)/lambda = 1/(2d), N the counts at unit intensity, J'_h the
// kinematic intensity after the curb q, m the exchange, o the offset, x_ph the
// reproducible deviation, e a fresh multiplicative error. Counting, background
// and readout noise follow. Intensities are kinematic |F|^2 of atoms placed at
// random (or drawn from Wilson's distributions); every index is recorded where
// it crosses the Ewald sphere, so equivalents come at different angles and the
// limits of tilt leave a wedge unmeasured.
//
// The package is not a dynamical calculation: exchange and curb are put in by
// hand, which is what makes their truth exact. A many-beam calculation can take
// the place of that law through Plan.Law. It reads and writes no files.
package simulate
