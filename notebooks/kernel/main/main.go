//go:build kernel

// Command main is the kernel. Its other sources, which make the wire protocol,
// are gophernotes' and come in through the overlay that notebooks/kernel makes;
// without it the package does not compile.
package main

import (
	"flag"
	"fmt"
	"go/build"
	"io"
	"log"
	"os"
	"runtime/debug"
	"sort"

	"github.com/cosmos72/gomacro/imports"

	_ "thinward/notebooks/bindings"
)

// Names that the gophernotes sources use and that stood in its main file.
const (
	Version         = "1"
	ProtocolVersion = "5.3"
)

// The interpreter would ask the toolchain for type data at start, and panics on
// what today's toolchain answers. With a GOROOT that does not exist it does not
// ask. This must happen before interp.New, whatever the environment says.
func init() { build.Default.GOROOT = "/nonexistent-thinward" }

// maxStack ends a cell that calls itself without end after a second; the default
// of 1 GB takes ten, and the memory.
const maxStack = 128 << 20

func main() {
	packages := flag.Bool("packages", false, "print the import paths that cells can use, and end")
	child := flag.Bool("child", false, "end when standard input ends: the starter is gone")
	flag.Parse()
	if *packages {
		printPackages()
		return
	}
	if flag.NArg() != 1 {
		log.Fatalln("usage: kernel [-child] CONNECTION-FILE")
	}
	if *child {
		go endWithStarter(os.Stdin)
	}
	debug.SetMaxStack(maxStack)
	runKernel(flag.Arg(0))
}

func printPackages() {
	var paths []string
	for p := range imports.Packages {
		paths = append(paths, p)
	}
	paths = append(paths, "display")
	sort.Strings(paths)
	for _, p := range paths {
		fmt.Println(p)
	}
}

func endWithStarter(stdin io.Reader) {
	_, _ = io.Copy(io.Discard, stdin)
	os.Exit(0)
}
