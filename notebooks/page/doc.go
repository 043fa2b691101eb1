// Package page writes an executed notebook and its numbers as one HTML file that
// needs no network: readable in print, in the dark, on a narrow screen, with a
// screen reader and without script.
//
// It is not for computing or drawing: it shows the outputs that the notebook
// holds.
package page
