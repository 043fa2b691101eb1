// Package figure draws every plot of a report as SVG text, from plain slices.
//
// It lies on gonum/plot and writes figures that stand in a page of any theme:
// no background, colours as CSS variables with fallbacks, a title and a
// description for those who cannot see them, and the drawn numbers as a table.
// Axes never fail on data: what an axis cannot show is left out by a stated rule
// and counted in the Notes of the figure.
//
// It is not for computing anything: a figure shows the numbers it is given, and
// the package imports none of ours.
package figure
