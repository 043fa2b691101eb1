// Package text holds what the readers of reflection text share: exact numbers
// straight from bytes, a source that inflates gzip while it is being read, line
// numbers counted only when an error needs one, the typed input error, and the
// setting aside of unusable rows with a count. It knows no file format.
package text
