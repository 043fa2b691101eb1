package main

import (
	"bytes"
	"os"
	"path/filepath"
	"testing"
)

// FuzzUnpack: whatever the bytes are, nothing is written beside the folder, and
// no more than the limit into it.
func FuzzUnpack(f *testing.F) {
	good, err := writeBundle(map[string][]byte{"inputs/series.toml": []byte(goodManifest), "inputs/a.cif": []byte("data_a\n")})
	if err != nil {
		f.Fatal(err)
	}
	f.Add(good)
	f.Add(bytes.ReplaceAll(good, []byte("inputs/a.cif"), []byte("../../../a.c")))
	f.Add(bytes.ReplaceAll(good, []byte("inputs/a.cif"), []byte("/tmp/abc.cif")))
	f.Add([]byte("PK"))
	f.Fuzz(func(t *testing.T, data []byte) {
		outer := t.TempDir()
		file, dir := filepath.Join(outer, "b.zip"), filepath.Join(outer, "x", "y", "in")
		if err := os.MkdirAll(dir, 0o777); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(file, data, 0o644); err != nil {
			t.Fatal(err)
		}
		_ = unpackWithin(file, dir, 10, 10_000)
		n, size := 0, int64(0)
		err := filepath.WalkDir(outer, func(path string, d os.DirEntry, err error) error {
			if err != nil {
				return err
			}
			if d.IsDir() || path == file {
				return nil
			}
			if rel, err := filepath.Rel(dir, path); err != nil || !filepath.IsLocal(rel) {
				t.Errorf("%s was written", path)
			}
			info, err := d.Info()
			if err != nil {
				return err
			}
			n++
			size += info.Size()
			return nil
		})
		if err != nil {
			t.Fatal(err)
		}
		if n > 10 || size > 10_001 {
			t.Errorf("%d files with %d bytes", n, size)
		}
	})
}
