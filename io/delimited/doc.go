// Package delimited reads and writes reflection lists as column text: fields apart
// by comma, tab, semicolon or blanks, or in fixed widths, plain or gzip.
//
// What a column means is declared, by order or by the names in a header line; it is
// never guessed. A comment line begins with #, ! or ; and blank lines do not count.
// A row with index 0 0 0 ends the list.
//
// Not for: CIF (package cif), tables of anything but reflections, and numbers in
// national notation: a decimal comma is refused.
package delimited
