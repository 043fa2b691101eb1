// Package difference pairs two positions of a series, reflection by reflection,
// and offers the strengths that the difference may be set against, best first,
// with the ghost that noise alone draws on those that share it.
//
// It is NOT for bands, tests and sizes (packages resample, size, evidence),
// nor for scaling (package scaling).
package difference
