package main

import (
	"archive/zip"
	"bytes"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"sort"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/io/manifest"
)

// entry is one file of a zip made by hand.
type entry struct {
	name, text string
	mode       fs.FileMode
}

const goodManifest = "title = \"Tarn\"\n[[crystal]]\nname = \"L1\"\n[[crystal.position]]\nname = \"thin\"\nthickness_nm = 140.0\nfiles = [\"a.cif\"]\nblock = \"#1\"\n[[crystal.position]]\nname = \"thick\"\nthickness_nm = 310.0\nfiles = [\"a.cif\"]\nblock = \"#2\"\n"

// zipOf makes a zip with checksums of the entries, more behind them.
func zipOf(t *testing.T, summed []entry, more ...entry) string {
	t.Helper()
	var sums strings.Builder
	for _, e := range summed {
		fmt.Fprintf(&sums, "%s  %s\n", sumOf([]byte(e.text)), e.name)
	}
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for _, e := range append(append([]entry{{name: bundleSums, text: sums.String()}}, summed...), more...) {
		h := &zip.FileHeader{Name: e.name, Method: zip.Deflate}
		if e.mode != 0 {
			h.SetMode(e.mode)
		}
		w, err := z.CreateHeader(h)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := w.Write([]byte(e.text)); err != nil {
			t.Fatal(err)
		}
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "b.zip")
	if err := os.WriteFile(path, b.Bytes(), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

func TestUnpackRefuses(t *testing.T) {
	good := []entry{{name: "inputs/series.toml", text: goodManifest}, {name: "inputs/a.cif", text: "data_a\n"}}
	for _, c := range []struct {
		name, zip, want string
	}{
		{"above", zipOf(t, good, entry{name: "../evil", text: "x"}), `"../evil" would leave the folder`},
		{"above within", zipOf(t, good, entry{name: "inputs/../../evil", text: "x"}), "would leave the folder"},
		{"not clean", zipOf(t, good, entry{name: "inputs/./a", text: "x"}), "would leave the folder"},
		{"absolute", zipOf(t, good, entry{name: "/tmp/evil", text: "x"}), "would leave the folder"},
		{"backslash", zipOf(t, good, entry{name: `..\evil`, text: "x"}), "would leave the folder"},
		{"drive", zipOf(t, good, entry{name: "C:evil", text: "x"}), "would leave the folder"},
		{"link", zipOf(t, good, entry{name: "link", text: "/etc", mode: fs.ModeSymlink | 0o777}), "is no plain file"},
		{"folder above", zipOf(t, good, entry{name: "../folder/", mode: fs.ModeDir | 0o777}), "would leave the folder"},
		{"twice", zipOf(t, good, entry{name: "inputs/A.cif", text: "x"}), "stands twice"},
		{"file as folder", zipOf(t, good, entry{name: "inputs/a.cif/b", text: "x"}), "inputs/a.cif/b"},
		{"no checksum", zipOf(t, good, entry{name: "inputs/b.cif", text: "x"}), "inputs/b.cif has no checksum"},
		{"many", zipOf(t, good, entry{name: "b", text: "x"}, entry{name: "c", text: "x"}), "it holds 5 files, more than 4"},
		{"large", zipOf(t, append(good, entry{name: "zeros", text: strings.Repeat("0", 5000)})), "it holds more than 4000 bytes"},
		{"manifest reads elsewhere", zipOf(t, []entry{{name: "inputs/series.toml", text: strings.Replace(goodManifest, "a.cif", "/etc/passwd", 1)}}), "names /etc/passwd, which lies outside"},
		{"no manifest", zipOf(t, good[1:]), "series.toml"},
	} {
		outer := t.TempDir()
		dir := filepath.Join(outer, "in")
		if err := os.Mkdir(dir, 0o777); err != nil {
			t.Fatal(err)
		}
		err := unpackWithin(c.zip, dir, 4, 4000)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
		if entries, _ := os.ReadDir(outer); len(entries) != 1 {
			t.Errorf("%s: something was written outside", c.name)
		}
		if info, err := os.Stat(filepath.Join(dir, "zeros")); err == nil && info.Size() > 4001 {
			t.Errorf("%s: %d bytes were written, more than the limit", c.name, info.Size())
		}
	}
	if err := unpackWithin(zipOf(t, good, entry{name: "inputs/", mode: fs.ModeDir | 0o777}), t.TempDir(), 4, 4000); err != nil {
		t.Errorf("a sound bundle: %v", err)
	}
}

func TestUnpackSeesDamage(t *testing.T) {
	files := map[string][]byte{"inputs/series.toml": []byte(goodManifest), "inputs/a.cif": []byte("data_a\n")}
	data, err := writeBundle(files)
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "b.zip")
	if err := os.WriteFile(path, data, 0o644); err != nil {
		t.Fatal(err)
	}
	if err := unpackBundle(path, t.TempDir()); err != nil {
		t.Fatalf("untouched: %v", err)
	}
	bad := zipOf(t, []entry{{name: "inputs/series.toml", text: goodManifest}})
	z, err := zip.OpenReader(bad)
	if err != nil {
		t.Fatal(err)
	}
	defer z.Close()
	// The same zip with one letter of the manifest changed and its own checksum
	// within the zip renewed: only SHA256SUMS can tell.
	var b bytes.Buffer
	w := zip.NewWriter(&b)
	for _, f := range z.File {
		r, err := f.Open()
		if err != nil {
			t.Fatal(err)
		}
		var text bytes.Buffer
		if _, err := text.ReadFrom(r); err != nil {
			t.Fatal(err)
		}
		out, err := w.Create(f.Name)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := out.Write(bytes.Replace(text.Bytes(), []byte("140.0"), []byte("150.0"), 1)); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, b.Bytes(), 0o644); err != nil {
		t.Fatal(err)
	}
	if err := unpackBundle(path, t.TempDir()); err == nil || !strings.Contains(err.Error(), "inputs/series.toml is damaged") {
		t.Errorf("changed: %v", err)
	}
	if err := os.WriteFile(path, []byte("no zip"), 0o644); err != nil {
		t.Fatal(err)
	}
	if err := unpackBundle(path, t.TempDir()); err == nil || !strings.Contains(err.Error(), "no bundle") {
		t.Errorf("no zip: %v", err)
	}
}

func TestBundleBytes(t *testing.T) {
	files := map[string][]byte{"b/x.txt": []byte(strings.Repeat("thin and thick\n", 50)), "a.gz": []byte("stored"), "c": nil}
	first, err := writeBundle(files)
	if err != nil {
		t.Fatal(err)
	}
	for range 5 {
		if again, err := writeBundle(files); err != nil || !bytes.Equal(first, again) {
			t.Fatalf("other bytes, %v", err)
		}
	}
	z, err := zip.NewReader(bytes.NewReader(first), int64(len(first)))
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, f := range z.File {
		names = append(names, f.Name)
		if y := f.Modified.UTC().Year(); y != 1980 {
			t.Errorf("%s has the year %d", f.Name, y)
		}
	}
	if names[0] != bundleSums || !sort.StringsAreSorted(names[1:]) {
		t.Errorf("order %v", names)
	}
}

func TestBundlePlaces(t *testing.T) {
	places, moved := bundlePlaces([]string{"a.cif", "sub/b.cif", "a.cif"})
	if diff := cmp.Diff(map[string]string{"a.cif": "a.cif", "sub/b.cif": "sub/b.cif"}, places); diff != "" || moved {
		t.Errorf("moved %v %s", moved, diff)
	}
	places, moved = bundlePlaces([]string{"/data/a.cif", "A.cif", "a.cif", "/other/a.cif", "series.toml", "L1:thin.cif"})
	want := map[string]string{"/data/a.cif": "elsewhere/1/a.cif", "A.cif": "A.cif", "a.cif": "elsewhere/2/a.cif", "/other/a.cif": "elsewhere/3/a.cif",
		"series.toml": "elsewhere/1/series.toml", "L1:thin.cif": "elsewhere/1/L1_thin.cif"}
	if diff := cmp.Diff(want, places); diff != "" || !moved {
		t.Errorf("moved %v (-want +got):\n%s", moved, diff)
	}
	for _, p := range places {
		if !safeName(p) {
			t.Errorf("%q cannot be unpacked", p)
		}
	}
}

func TestRewriteManifest(t *testing.T) {
	f, err := manifest.Parse("m.toml", []byte(strings.ReplaceAll(goodManifest, "a.cif", "/data/a.cif")))
	if err != nil {
		t.Fatal(err)
	}
	places, _ := bundlePlaces(inputFiles(f))
	text, err := rewriteManifest(f, places)
	if err != nil {
		t.Fatal(err)
	}
	got, err := manifest.Parse("m.toml", text)
	if err != nil {
		t.Fatalf("%v in\n%s", err, text)
	}
	if diff := cmp.Diff([]string{"elsewhere/1/a.cif", "elsewhere/1/a.cif"}, inputFiles(got)); diff != "" || got.Crystal[0].Position[0].ThicknessNM != 140 || got.Title != "Tarn" {
		t.Errorf("%s %+v", diff, got)
	}
}
