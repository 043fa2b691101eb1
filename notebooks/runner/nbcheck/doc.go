// Package nbcheck checks the code of notebooks without running it: that no error
// a call returns goes unseen. A cell that ends in (value, err) looks green in
// Jupyter whatever err is.
//
// It is for tests of notebooks, not for programs.
package nbcheck
