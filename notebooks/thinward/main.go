// Command thinward compares what one crystal gave at several thicknesses and
// writes a report that a collaborator can run again. See README.md, or
// thinward --help.
package main

import "os"

func main() { os.Exit(run(os.Args[1:], os.Stdout, os.Stderr)) }
