package main

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"sort"
	"strconv"
	"strings"
)

// folder is where a run puts its files: written into a hidden folder beside, and
// moved into place at the end, so that an interrupted run leaves no half of one.
type folder struct {
	out, tmp, lock string
}

// openFolder makes the hidden folder and takes the lock. It fails when the place
// cannot be written or another run holds it.
func openFolder(out string) (*folder, error) {
	abs, err := filepath.Abs(out)
	if err != nil {
		return nil, err
	}
	if info, err := os.Stat(abs); err == nil && !info.IsDir() {
		return nil, fmt.Errorf("--out %s is a file, not a folder", out)
	}
	if err := os.MkdirAll(filepath.Dir(abs), 0o777); err != nil {
		return nil, fmt.Errorf("--out %s cannot be made: %w", out, err)
	}
	f := &folder{out: out, lock: filepath.Join(filepath.Dir(abs), "."+filepath.Base(abs)+".lock")}
	if err := f.take(); err != nil {
		return nil, err
	}
	if f.tmp, err = os.MkdirTemp(filepath.Dir(abs), "."+filepath.Base(abs)+"-*"); err != nil {
		os.Remove(f.lock)
		return nil, fmt.Errorf("--out %s cannot be written: %w", out, err)
	}
	return f, nil
}

func (f *folder) take() error {
	for range 2 {
		file, err := os.OpenFile(f.lock, os.O_CREATE|os.O_EXCL|os.O_WRONLY, 0o666)
		if err == nil {
			_, err = file.WriteString(strconv.Itoa(os.Getpid()))
			return errors.Join(err, file.Close())
		}
		if !errors.Is(err, fs.ErrExist) {
			return fmt.Errorf("--out %s cannot be written: %w", f.out, err)
		}
		data, _ := os.ReadFile(f.lock)
		pid, err := strconv.Atoi(strings.TrimSpace(string(data)))
		if err == nil && alive(pid) {
			return fmt.Errorf("another run (process %d) writes to %s: wait for it or choose another --out", pid, f.out)
		}
		os.Remove(f.lock)
	}
	return fmt.Errorf("--out %s: the lock %s cannot be taken", f.out, f.lock)
}

func (f *folder) write(name string, data []byte) error {
	if err := os.WriteFile(filepath.Join(f.tmp, name), data, 0o644); err != nil {
		return fmt.Errorf("%s cannot be written: %w", filepath.Join(f.out, name), err)
	}
	return nil
}

func (f *folder) read(name string) ([]byte, error) { return os.ReadFile(filepath.Join(f.tmp, name)) }

func (f *folder) drop(name string) { os.Remove(filepath.Join(f.tmp, name)) }

// commit moves every file into place. After a failure, or a success, what an
// earlier run left of the other kind goes.
func (f *folder) commit(failed bool) error {
	if err := os.MkdirAll(f.out, 0o777); err != nil {
		return err
	}
	stale := []string{"result.partial.json", logFile}
	if failed {
		stale = []string{"result.json", "pairs.csv", "result.partial.json"}
	}
	for _, name := range stale {
		if _, err := os.Stat(filepath.Join(f.tmp, name)); errors.Is(err, fs.ErrNotExist) {
			os.Remove(filepath.Join(f.out, name))
		}
	}
	entries, err := os.ReadDir(f.tmp)
	if err != nil {
		return err
	}
	for _, e := range entries {
		if strings.HasPrefix(e.Name(), ".") {
			continue
		}
		if err := os.Chmod(filepath.Join(f.tmp, e.Name()), 0o644); err != nil {
			return err
		}
		if err := os.Rename(filepath.Join(f.tmp, e.Name()), filepath.Join(f.out, e.Name())); err != nil {
			return err
		}
	}
	return nil
}

func (f *folder) close() {
	os.RemoveAll(f.tmp)
	os.Remove(f.lock)
}

func sortedKeys(m map[string]string) []string {
	keys := make([]string, 0, len(m))
	for k := range m {
		keys = append(keys, k)
	}
	sort.Strings(keys)
	return keys
}
