// Package crystal holds what is known of a crystal before any intensity is
// looked at: the unit cell and its metric, the operators of a space group in
// any setting, and what follows from them for reflections — which are
// equivalent, absent, centric, and in how many ways the same lattice could have
// been indexed.
//
// It is NOT for intensities (package intensity merges them), for atoms or
// structure factors (package electron), nor for reading files (io).
//
// Conventions, those of International Tables for Crystallography, volume A:
// an operator (R, t) takes a column of coordinates x to R x + t; a reflection
// is a row h and goes to h R. Cell lengths are in angstrom, angles in degrees,
// translations in whole 24ths of a cell edge.
package crystal
