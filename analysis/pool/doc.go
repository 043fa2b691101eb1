// Package pool joins what several crystals, or several thicknesses of one
// crystal, say about one number: means with fixed and random effects, lines in
// thickness with a full covariance, lines with errors in both variables, and how
// much more would have to be measured to see an effect.
//
// It takes estimates with their uncertainties and knows nothing of reflections.
package pool
