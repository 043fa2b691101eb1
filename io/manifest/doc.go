// Package manifest reads a series manifest (TOML) and the reflection files that
// it names, and makes a Study of them. It writes first manifests too (see Draft).
//
// Every fault is an Error that names file, line, key and remedy. Nothing is
// computed here, and nothing is dropped without being counted.
package manifest
