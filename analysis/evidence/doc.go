// Package evidence asks whether a finding could be something else. It runs a
// pipeline, handed in as a function, on data where the answer is known
// (controls), looks for artefacts that unmerged intensities betray (bleed from
// lattice neighbours, double scattering, ice, cut-off negatives, unlike coverage),
// and turns figures into verdicts by rules with stated thresholds.
//
// It is not for estimating the size of an effect (package size) nor for reading
// or scaling; it knows neither files nor series.
package evidence
