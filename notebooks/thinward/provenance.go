package main

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"

	"thinward/analysis"
	"thinward/io/manifest"
	"thinward/io/result"
	"thinward/notebooks/runner"
	"thinward/notebooks/session"
)

const (
	provenanceFile   = "provenance.json"
	provenanceSchema = "thinward.provenance/1"
	// setCellTag is on the cell that the runner adds for values that were set.
	setCellTag = "set-parameters"
)

// provenance is what a report needs to be run again, beside the inputs and the
// seed that result.json names. Manifest is the path from the report's folder,
// with slashes; its text is kept, so that a change can be told from a loss.
type provenance struct {
	Schema         string            `json:"schema"`
	Manifest       string            `json:"manifest"`
	ManifestSHA256 string            `json:"manifest_sha256"`
	ManifestText   string            `json:"manifest_text"`
	Set            map[string]string `json:"set"`
	Thinward       string            `json:"thinward"`
}

// newProvenance describes a run on series that will lie in out.
func newProvenance(series, out string, set map[string]string) (*provenance, error) {
	text, err := os.ReadFile(series)
	if err != nil {
		return nil, err
	}
	p := &provenance{Schema: provenanceSchema, ManifestSHA256: sumOf(text), ManifestText: string(text), Set: map[string]string{}, Thinward: session.Version()}
	if p.Manifest, err = relative(out, series); err != nil {
		return nil, err
	}
	for name, value := range set {
		if name != "series" {
			p.Set[name] = value
		}
	}
	return p, nil
}

// recordProvenance writes down how the report in f is made.
func recordProvenance(f *folder, series string, set map[string]string) error {
	p, err := newProvenance(series, f.out, set)
	if err != nil {
		return err
	}
	data, err := p.bytes()
	if err != nil {
		return insideError{err}
	}
	return f.write(provenanceFile, data)
}

// relative is the path from a folder to a file with slashes; where there is none
// (two drives), the absolute path.
func relative(folder, file string) (string, error) {
	from, err := filepath.Abs(folder)
	if err != nil {
		return "", err
	}
	to, err := filepath.Abs(file)
	if err != nil {
		return "", err
	}
	rel, err := filepath.Rel(from, to)
	if err != nil {
		rel = to
	}
	return filepath.ToSlash(rel), nil
}

func (p *provenance) bytes() ([]byte, error) {
	data, err := json.MarshalIndent(p, "", "  ")
	return append(data, '\n'), err
}

func sumOf(data []byte) string {
	sum := sha256.Sum256(data)
	return hex.EncodeToString(sum[:])
}

func sumOfFile(path string) (string, error) {
	f, err := os.Open(path)
	if err != nil {
		return "", err
	}
	defer f.Close()
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return "", err
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}

// report is a finished report as its folder holds it.
type report struct {
	dir        string
	result     *analysis.Result
	provenance *provenance // nil when the folder has none
}

// openReport reads a report's folder, or a result.json by itself.
func openReport(path string) (*report, error) {
	info, err := os.Stat(path)
	if err != nil {
		return nil, fmt.Errorf("%s: %v", path, pathCause(err))
	}
	r := &report{dir: path}
	file := filepath.Join(path, session.ResultFile)
	if !info.IsDir() {
		r.dir, file = filepath.Dir(path), path
	}
	data, err := os.ReadFile(file)
	if errors.Is(err, fs.ErrNotExist) {
		if _, err := os.Stat(filepath.Join(path, session.PartialFile)); err == nil {
			return nil, fmt.Errorf("%s: the run that wrote this report did not finish; run examine again", path)
		}
		return nil, fmt.Errorf("%s: no report: there is no %s in it", path, session.ResultFile)
	}
	if err != nil {
		return nil, fmt.Errorf("%s: %v", file, pathCause(err))
	}
	if r.result, err = result.Decode(data); err != nil {
		return nil, fmt.Errorf("%s: %w", file, err)
	}
	if data, err = os.ReadFile(filepath.Join(r.dir, provenanceFile)); errors.Is(err, fs.ErrNotExist) {
		return r, nil
	} else if err != nil {
		return nil, fmt.Errorf("%s: %v", filepath.Join(r.dir, provenanceFile), pathCause(err))
	}
	r.provenance = new(provenance)
	if err := json.Unmarshal(data, r.provenance); err != nil {
		return nil, fmt.Errorf("%s: %w", filepath.Join(r.dir, provenanceFile), err)
	}
	if r.provenance.Schema != provenanceSchema {
		return nil, fmt.Errorf("%s: says schema %q; this version reads %q", filepath.Join(r.dir, provenanceFile), r.provenance.Schema, provenanceSchema)
	}
	return r, nil
}

func pathCause(err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}

// source finds the manifest (elsewhere, when not empty, is where the reader says
// it lies) and makes sure that it and all inputs are those of the report.
func (r *report) source(elsewhere string) (series string, file *manifest.File, err error) {
	p := r.provenance
	if p == nil {
		return "", nil, fmt.Errorf("%s: no %s in it, which says how the report was made; it is not a report of examine", r.dir, provenanceFile)
	}
	series = elsewhere
	if series == "" {
		series = filepath.FromSlash(p.Manifest)
		if !filepath.IsAbs(series) {
			series = filepath.Join(r.dir, series)
		}
	}
	text, err := os.ReadFile(series)
	if err != nil {
		return "", nil, fmt.Errorf("the manifest of this report, %s, cannot be read: %v; say where it lies with --series", series, pathCause(err))
	}
	if sumOf(text) != p.ManifestSHA256 {
		return "", nil, fmt.Errorf("%s is not the manifest this report was made with; its text then stands in %s", series, filepath.Join(r.dir, provenanceFile))
	}
	if file, err = manifest.Parse(series, text); err != nil {
		return "", nil, err
	}
	files := inputFiles(file)
	if len(files) != len(r.result.Inputs) {
		return "", nil, fmt.Errorf("%s names %s, the report %d", series, plural(len(files), "input"), len(r.result.Inputs))
	}
	for i, name := range files {
		path := inputPath(series, name)
		sum, err := sumOfFile(path)
		if err != nil {
			return "", nil, fmt.Errorf("the input %s cannot be read: %v", path, pathCause(err))
		}
		if want := r.result.Inputs[i].SHA256; sum != want {
			return "", nil, fmt.Errorf("the input %s has changed since the report: SHA-256 %s, then %s", path, sum, want)
		}
	}
	return series, file, nil
}

// inputFiles lists the files of a manifest as it names them, in its order, which
// is that of the inputs in a result.
func inputFiles(f *manifest.File) []string {
	var out []string
	for i := range f.Crystal {
		for j := range f.Crystal[i].Position {
			out = append(out, f.Crystal[i].Position[j].Files...)
		}
	}
	return out
}

func inputPath(series, path string) string {
	if filepath.IsAbs(path) {
		return path
	}
	return filepath.Join(filepath.Dir(series), path)
}

// code gives the notebook that made the report. own says that its code is that
// of the notebook that comes with thinward, which then stands in for it.
func (r *report) code() (nb *runner.Notebook, own bool, err error) {
	ours, err := committed(notebookFile)
	if err != nil {
		return nil, false, err
	}
	path := filepath.Join(r.dir, notebookFile)
	if nb, err = runner.ReadNotebook(path); err != nil {
		return nil, false, fmt.Errorf("%s: %w", path, err)
	}
	if sameCode(nb, ours) {
		return ours, true, nil
	}
	return nb, false, nil
}

// sameCode compares the code cells but the one that the runner adds for values
// that were set; it never runs from a file.
func sameCode(a, b *runner.Notebook) bool {
	list := func(nb *runner.Notebook) []*runner.Cell {
		var out []*runner.Cell
		for _, c := range nb.Cells {
			if c.Type == "code" && !c.HasTag(setCellTag) {
				out = append(out, c)
			}
		}
		return out
	}
	x, y := list(a), list(b)
	if len(x) != len(y) {
		return false
	}
	for i := range x {
		if x[i].Source != y[i].Source || x[i].HasTag("parameters") != y[i].HasTag("parameters") {
			return false
		}
	}
	return true
}
