// Package size puts numbers on how intensities change with thickness: the
// exchange m, the curb q and the offset o, the contrasts of three classes of
// strength, and the true correlation between two positions.
//
// The model of a pair of positions, in units of each position's own shell mean
// (y1 thin, y2 thick), is
//
//	y1 - y2 = m_s (y1 - 1) + q (y1^2 - M2 y1),   m_s = m + (1-m) o / S_s,
//
// with M2 the shell mean of y1^2 and S_s the shell mean of the thick position:
// exchange moves intensity from strong to weak, the curb takes from the
// strongest, the offset is an additive constant in the thick position, which
// after division by the shell mean is an exchange that grows as 1/S_s.
//
// A noisy intensity on the right-hand side would attenuate every slope, so the
// strength axis Z serves as an instrument (Wald 1940, Ann. Math. Stat. 11:284;
// Hansen 1982, Econometrica 50:1029): it must share neither noise nor
// reproducible deviations with the pair. Only functions of Z, of resolution and
// of shell-wise variances select or weight reflections here; selecting by
// anything that contains Thin or Thick biases every estimate.
//
// Every estimator takes weights w of reflections, nil for ones, that act as
// counts: a weight of 2 equals a row given twice, and fractional weights serve
// a bootstrap.
//
// The package is not for scaling, pairing or building axes; it draws no random
// numbers, and it does not say where a change comes from.
package size
