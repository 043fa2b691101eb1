// Package analysis compares what one crystal gave at several thicknesses: it
// scales the positions of each crystal to each other, pairs them, and says
// whether the intensities differ, where, by how much, in how many crystals, and
// what else could have done it.
//
// A Study is made from columns in memory by New; io/manifest.Load makes one from
// a manifest and its files. Each step of a Study runs the steps it needs first,
// once, and keeps its result, so that steps may be called in any order and again.
// Results are plain data and depend on the input and the seed alone, not on the
// number of cores.
//
// The package reads and writes no files and draws nothing; it does not
// integrate images and does not solve or refine structures.
package analysis
