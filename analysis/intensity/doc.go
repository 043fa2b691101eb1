// Package intensity holds observed intensities as parallel columns and does to
// them what must be done before anything is compared: rows of a list become
// observations, observations get the number of their unique reflection,
// equivalents are merged, and the quality of a list is measured (precision by
// shell, moments, negatives, cuts, forbidden reflections).
//
// It is NOT for putting positions on one scale (package scaling), for
// differences between positions (package difference), nor for reading files
// (io).
package intensity
