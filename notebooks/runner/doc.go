// Package runner runs a notebook without a Jupyter server: it starts a kernel as
// a subprocess, speaks Jupyter's wire protocol with it, and keeps the outputs in
// the notebook.
//
// It is not for building the kernel (notebooks/kernel) nor for turning the
// executed notebook into a page (notebooks/page).
package runner
