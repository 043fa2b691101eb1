package session

import (
	"runtime"
	"runtime/debug"

	"thinward/analysis"
)

// environment describes what computes: the Go release, our version and the
// modules that numbers depend on.
func environment() *analysis.Environment {
	e := &analysis.Environment{Go: runtime.Version() + " " + runtime.GOOS + "/" + runtime.GOARCH, Thinward: Version(), Modules: map[string]string{}}
	if info, ok := debug.ReadBuildInfo(); ok {
		for _, m := range info.Deps {
			switch m.Path {
			case "gonum.org/v1/gonum", "gonum.org/v1/plot", "github.com/gopherdata/gophernotes", "github.com/cosmos72/gomacro":
				e.Modules[m.Path] = m.Version
			}
		}
	}
	return e
}

// version is that of the sources; a build from a version control checkout adds
// its revision.
const version = "0.1.0"

// Version returns the version of this build, with the revision and a mark for
// uncommitted changes where the build knows them.
func Version() string {
	v := version
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return v
	}
	for _, s := range info.Settings {
		switch {
		case s.Key == "vcs.revision" && len(s.Value) >= 12:
			v += "+" + s.Value[:12]
		case s.Key == "vcs.modified" && s.Value == "true":
			v += ".modified"
		}
	}
	return v
}
