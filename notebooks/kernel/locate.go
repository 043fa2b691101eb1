package kernel

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
)

// modulePath is the first line of our go.mod.
const modulePath = "thinward"

// findGo looks for the Go tool on PATH, then where go run and go generate say it
// is.
func findGo() (string, error) {
	path, err := exec.LookPath("go")
	if err == nil {
		return path, nil
	}
	if root := os.Getenv("GOROOT"); root != "" {
		inRoot := filepath.Join(root, "bin", "go"+exeSuffix())
		if _, err := os.Stat(inRoot); err == nil {
			return inRoot, nil
		}
	}
	return "", &BuildError{Step: "go tool", Err: err, Remedy: "Install Go 1.26 or later, or put its bin folder on PATH: the kernel is compiled on this machine."}
}

// findRoot gives the folder of our go.mod: where this file was compiled from, or
// around the working directory.
func findRoot() (string, error) {
	if _, file, _, ok := runtime.Caller(0); ok {
		if dir := filepath.Dir(filepath.Dir(filepath.Dir(file))); isRoot(dir) {
			return dir, nil
		}
	}
	dir, err := os.Getwd()
	if err != nil {
		return "", &BuildError{Step: "module", Err: err}
	}
	for {
		if isRoot(dir) {
			return dir, nil
		}
		up := filepath.Dir(dir)
		if up == dir {
			return "", &BuildError{Step: "module", Err: errNoModule,
				Remedy: "Run the command inside a clone of Thinward, or set " + PrebuiltEnv + " to a kernel that was built there."}
		}
		dir = up
	}
}

func isRoot(dir string) bool {
	text, err := os.ReadFile(filepath.Join(dir, "go.mod"))
	if err != nil {
		return false
	}
	line, _, _ := bytes.Cut(text, []byte("\n"))
	return string(bytes.TrimSpace(line)) == "module "+modulePath
}
