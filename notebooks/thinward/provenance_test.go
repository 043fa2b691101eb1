package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"thinward/notebooks/runner"
	"thinward/notebooks/session"
)

// fakeReport lays out a report by hand: a series of one file, and a result that
// names its SHA-256.
func fakeReport(t *testing.T, manifestText string) (dir, series string) {
	t.Helper()
	root := t.TempDir()
	dir, series = filepath.Join(root, "out"), filepath.Join(root, "data", "my.toml")
	for _, d := range []string{dir, filepath.Dir(series)} {
		if err := os.MkdirAll(d, 0o777); err != nil {
			t.Fatal(err)
		}
	}
	put := func(path, text string) {
		if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	put(series, manifestText)
	put(filepath.Join(root, "data", "a.cif"), "data_a\n")
	input := `{"path": "a.cif", "sha256": "` + sumOf([]byte("data_a\n")) + `"}` // two blocks of one file
	put(filepath.Join(dir, session.ResultFile), `{"schema": "thinward.result/1", "inputs": [`+input+`, `+input+`]}`)
	for _, name := range []string{pageFile, session.PairsFile} {
		put(filepath.Join(dir, name), name)
	}
	nb, err := committed(notebookFile)
	if err != nil {
		t.Fatal(err)
	}
	text, err := nb.Bytes()
	if err != nil {
		t.Fatal(err)
	}
	put(filepath.Join(dir, notebookFile), string(text))
	p, err := newProvenance(series, dir, map[string]string{"series": series, "replicates": "100"})
	if err != nil {
		t.Fatal(err)
	}
	data, err := p.bytes()
	if err != nil {
		t.Fatal(err)
	}
	put(filepath.Join(dir, provenanceFile), string(data))
	return dir, series
}

func TestProvenance(t *testing.T) {
	dir, series := fakeReport(t, goodManifest)
	r, err := openReport(dir)
	if err != nil {
		t.Fatal(err)
	}
	p := r.provenance
	if p.Manifest != "../data/my.toml" || p.ManifestText != goodManifest || len(p.Set) != 1 || p.Set["replicates"] != "100" {
		t.Errorf("%+v", p)
	}
	got, file, err := r.source("")
	if err != nil {
		t.Fatal(err)
	}
	if filepath.Clean(got) != series || file.Title != "Tarn" {
		t.Errorf("%s is not %s", got, series)
	}
	if nb, own, err := r.code(); err != nil || !own || nb == nil {
		t.Errorf("own %v, %v", own, err)
	}
}

func TestBundleOfFilesElsewhere(t *testing.T) {
	outside := filepath.Join(t.TempDir(), "a.cif")
	if err := os.WriteFile(outside, []byte("data_a\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	dir, _ := fakeReport(t, strings.Replace(goodManifest, `"a.cif"`, `'`+outside+`'`, 1))
	files, err := gatherBundle(dir)
	if err != nil {
		t.Fatal(err)
	}
	data, err := writeBundle(files)
	if err != nil {
		t.Fatal(err)
	}
	zipped, in := filepath.Join(t.TempDir(), "b.zip"), t.TempDir()
	if err := os.WriteFile(zipped, data, 0o644); err != nil {
		t.Fatal(err)
	}
	if err := unpackBundle(zipped, in); err != nil {
		t.Fatal(err)
	}
	if err := os.Remove(outside); err != nil {
		t.Fatal(err)
	}
	r, err := openReport(filepath.Join(in, bundleReport))
	if err != nil {
		t.Fatal(err)
	}
	if _, _, err := r.source(""); err != nil {
		t.Errorf("the bundle does not stand by itself: %v", err)
	}
	for name, text := range files {
		if strings.HasPrefix(name, bundleInputs) && strings.Contains(string(text), filepath.Dir(outside)) {
			t.Errorf("%s still names %s", name, outside)
		}
	}
}

func TestSourceRefuses(t *testing.T) {
	dir, series := fakeReport(t, goodManifest)
	r, err := openReport(dir)
	if err != nil {
		t.Fatal(err)
	}
	input := filepath.Join(filepath.Dir(series), "a.cif")
	for _, c := range []struct {
		name string
		do   func() error
		want string
	}{
		{"changed input", func() error { return os.WriteFile(input, []byte("data_b\n"), 0o644) }, "has changed since the report"},
		{"no input", func() error { return os.Remove(input) }, "cannot be read"},
		{"changed manifest", func() error { return os.WriteFile(series, []byte(goodManifest+"\n"), 0o644) }, "is not the manifest this report was made with"},
		{"no manifest", func() error { return os.Remove(series) }, "say where it lies with --series"},
		{"no provenance", func() error { r.provenance = nil; return nil }, "it is not a report of examine"},
	} {
		if err := c.do(); err != nil {
			t.Fatal(err)
		}
		if _, _, err := r.source(""); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
	}
}

func TestSameCode(t *testing.T) {
	make := func() *runner.Notebook {
		return &runner.Notebook{Cells: []*runner.Cell{
			{Type: "markdown", Source: "text"},
			{Type: "code", Source: "n := 3", Tags: []string{"parameters"}},
			{Type: "code", Source: "n", Count: 7, Outputs: []runner.Output{{Type: "stream", Text: "3"}}},
		}}
	}
	ours := make()
	for _, c := range []struct {
		name string
		do   func(*runner.Notebook)
		want bool
	}{
		{"the same", func(*runner.Notebook) {}, true},
		{"no outputs", func(nb *runner.Notebook) { nb.Strip() }, true},
		{"other words", func(nb *runner.Notebook) { nb.Cells[0].Source = "mine" }, true},
		{"values set", func(nb *runner.Notebook) {
			nb.Cells = append(nb.Cells, &runner.Cell{Type: "code", Source: "n = 4", Tags: []string{setCellTag}})
		}, true},
		{"other code", func(nb *runner.Notebook) { nb.Cells[2].Source = "n " }, false},
		{"more code", func(nb *runner.Notebook) {
			nb.Cells = append(nb.Cells, &runner.Cell{Type: "code", Source: "n = 4"})
		}, false},
		{"less code", func(nb *runner.Notebook) { nb.Cells = nb.Cells[:2] }, false},
		{"other order", func(nb *runner.Notebook) { nb.Cells[1], nb.Cells[2] = nb.Cells[2], nb.Cells[1] }, false},
		{"no parameters", func(nb *runner.Notebook) { nb.Cells[1].Tags = nil }, false},
	} {
		nb := make()
		c.do(nb)
		if got := sameCode(nb, ours); got != c.want {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
}
