// Package scaling puts the positions of one crystal on a common scale and
// estimates how uncertain the scaled observations are.
//
// The model of observation o of reflection h in position p is
//
//	I_o = g_o J_h + noise,  g_o = K_p(phi_o) exp(-2 B_p s^2),  s = sin(theta)/lambda,
//
// with ln K_p(phi) = c(phi) + d_p(phi) in cubic B-splines. It is meant to absorb
// what is scale and nothing else: there is no absorption surface, no detector
// map and no term that depends on strength.
//
// It is not for merging, for pairing positions, or for deciding whether they
// differ; it knows nothing of space groups and takes plain columns.
package scaling
