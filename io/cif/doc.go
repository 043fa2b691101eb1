// Package cif reads and writes the Crystallographic Information File, syntax
// version 1.1 (International Tables for Crystallography, volume G, 2006, chapter
// 2.2), in the spellings of the old core, the current core and the macromolecular
// dictionary.
//
// [ReadFile] and [Parse] take a whole file in one pass: small items and loops go
// into a document ([File], [Block], [Loop]); loops of reflections go straight from
// the bytes into columns and are described by [File.Lists]. [File.Read] picks one
// list and returns its rows with the facts that belong to them. [Writer] writes.
//
// Where the meaning of a file is in doubt it is refused with an [Error] that names
// file, line, block, item and remedy; where only its form is at fault it is read
// and [File.Warnings] says so. CIF 2.0 is read too; of its lists and tables
// only the form is checked, and they are kept as they stand.
//
// Not for: dictionaries (nothing is validated against one), images, atoms beyond
// carrying them as plain items, and choosing what a list means for an analysis:
// rows are handed on as they stand, neither merged nor scaled.
package cif
