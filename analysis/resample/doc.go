// Package resample draws again from measured data: bootstrap bands of averaged
// curves, bootstrap intervals of scalars, sign-flip tests, and the rank and
// multiple tests that go with them. It also owns the random streams of the
// whole module: one seed, names, a replicate number, and nothing else decide
// every draw, so results do not depend on the number of cores.
//
// Two limits are kept everywhere. Only ratios (weighted means and functions of
// them) are bootstrapped, never sums, because the Poisson weights do not add up
// to a fixed total. And an interval that so few units cannot support is infinite
// and carries a warning.
//
// It is not for fitting, not for choosing what to test, and it does not
// bootstrap a handful of crystals: pooling over crystals is another matter.
package resample
