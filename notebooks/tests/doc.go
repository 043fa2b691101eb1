// Package tests runs the committed notebooks: headless against golden text,
// under Jupyter's nbconvert, and in a browser on a Jupyter page.
//
// It holds no code for programs.
package tests
