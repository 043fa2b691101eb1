package main

import (
	"archive/zip"
	"bytes"
	"compress/flate"
	"errors"
	"fmt"
	"io"
	"os"
	"path"
	"path/filepath"
	"sort"
	"strings"
	"time"

	"github.com/pelletier/go-toml/v2"
	"github.com/spf13/cobra"

	"thinward/io/manifest"
	"thinward/notebooks/session"
)

// Places in a bundle.
const (
	bundleReport   = "report"
	bundleInputs   = "inputs"
	bundleManifest = "series.toml"
	bundleSums     = "SHA256SUMS"
	bundleReadme   = "README.txt"
)

func (a *app) bundle() *cobra.Command {
	var out string
	c := &cobra.Command{
		Use:   "bundle DIR",
		Short: "Pack a finished report with its inputs, manifest, notebook and checksums into one zip to send",
		Long: `The zip holds the report as it is, the input files, the manifest with its paths
inside the zip, and the SHA-256 of every file. The same content gives the same
bytes. Whoever gets it runs thinward again FILE.zip.`,
		Example: `  thinward bundle out --out tarn.zip
  thinward again tarn.zip`,
		Args: cobra.ExactArgs(1),
		RunE: func(c *cobra.Command, args []string) error {
			target := out
			if target == "" {
				abs, err := filepath.Abs(args[0])
				if err != nil {
					return err
				}
				target = filepath.Base(abs) + ".zip"
			}
			files, err := gatherBundle(args[0])
			if err != nil {
				return err
			}
			data, err := writeBundle(files)
			if err != nil {
				return err
			}
			if err := replaceFile(target, data); err != nil {
				return err
			}
			fmt.Fprintf(a.out, "Wrote %s: %s, %.1f MB. Whoever gets it runs: thinward again %s\n", target, plural(len(files)+1, "file"), float64(len(data))/1e6, filepath.Base(target))
			return nil
		},
	}
	c.Flags().StringVarP(&out, "out", "o", "", "the zip (default: DIR.zip here)")
	return c
}

// gatherBundle collects what goes into a bundle by its place there, checksums
// left out.
func gatherBundle(dir string) (map[string][]byte, error) {
	r, err := openReport(dir)
	if err != nil {
		return nil, err
	}
	series, file, err := r.source("")
	if err != nil {
		return nil, err
	}
	files := map[string][]byte{}
	for _, name := range []string{pageFile, notebookFile, session.PairsFile, session.ResultFile} {
		if files[path.Join(bundleReport, name)], err = os.ReadFile(filepath.Join(dir, name)); err != nil {
			return nil, fmt.Errorf("%s: %v; run examine again", filepath.Join(dir, name), pathCause(err))
		}
	}
	text := []byte(r.provenance.ManifestText)
	places, moved := bundlePlaces(inputFiles(file))
	for name, place := range places {
		if files[path.Join(bundleInputs, place)], err = os.ReadFile(inputPath(series, name)); err != nil {
			return nil, err
		}
	}
	if moved {
		if text, err = rewriteManifest(file, places); err != nil {
			return nil, insideError{err}
		}
	}
	files[path.Join(bundleInputs, bundleManifest)] = text
	p := *r.provenance
	p.Manifest, p.ManifestText, p.ManifestSHA256 = "../"+bundleInputs+"/"+bundleManifest, string(text), sumOf(text)
	if files[path.Join(bundleReport, provenanceFile)], err = p.bytes(); err != nil {
		return nil, insideError{err}
	}
	files[bundleReadme] = []byte(bundleText(r))
	return files, nil
}

// bundlePlaces gives each file of a manifest a place beside the bundle's
// manifest. Paths below the manifest stay as they are; others get a folder of
// their own, and moved is true.
func bundlePlaces(names []string) (places map[string]string, moved bool) {
	places = map[string]string{}
	taken := map[string]bool{bundleManifest: true}
	for _, name := range names {
		place := path.Clean(filepath.ToSlash(name))
		if !filepath.IsAbs(name) && safeName(place) && !taken[strings.ToLower(place)] {
			places[name] = place
			taken[strings.ToLower(place)] = true
		}
	}
	for _, name := range names {
		if places[name] != "" {
			continue
		}
		moved = true
		for n := 1; ; n++ {
			place := path.Join("elsewhere", fmt.Sprint(n), strings.NewReplacer(":", "_", "\\", "_").Replace(filepath.Base(name)))
			if !taken[strings.ToLower(place)] {
				places[name] = place
				taken[strings.ToLower(place)] = true
				break
			}
		}
	}
	return places, moved
}

func rewriteManifest(f *manifest.File, places map[string]string) ([]byte, error) {
	for i := range f.Crystal {
		for j := range f.Crystal[i].Position {
			files := f.Crystal[i].Position[j].Files
			for k := range files {
				files[k] = places[files[k]]
			}
		}
	}
	text, err := toml.Marshal(f)
	return append([]byte("# Written by thinward bundle: some paths were changed to lie inside the bundle.\n"), text...), err
}

func bundleText(r *report) string {
	return fmt.Sprintf(`%s

A report of thinward with all that made it.

  report/report.html      the report, for any browser
  report/report.ipynb     the notebook that made it, with outputs
  report/result.json      every number
  report/pairs.csv        every pair of intensities
  report/provenance.json  how it was made
  inputs/                 the manifest and the files it names
  SHA256SUMS              checksum of every file

To run it again and compare every number:

  thinward again FILE.zip

Made with thinward %s.
`, r.result.Series, versionOf(r.result))
}

// writeBundle makes the zip: sorted, without times or owners, checksums first.
func writeBundle(files map[string][]byte) ([]byte, error) {
	var names []string
	for name := range files {
		names = append(names, name)
	}
	sort.Strings(names)
	var sums strings.Builder
	for _, name := range names {
		fmt.Fprintf(&sums, "%s  %s\n", sumOf(files[name]), name)
	}
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	z.RegisterCompressor(zip.Deflate, func(w io.Writer) (io.WriteCloser, error) { return flate.NewWriter(w, flate.BestCompression) })
	add := func(name string, data []byte) error {
		method := zip.Deflate
		if strings.HasSuffix(name, ".gz") {
			method = zip.Store
		}
		w, err := z.CreateHeader(&zip.FileHeader{Name: name, Method: method, Modified: time.Date(1980, 1, 1, 0, 0, 0, 0, time.UTC)})
		if err != nil {
			return err
		}
		_, err = w.Write(data)
		return err
	}
	if err := add(bundleSums, []byte(sums.String())); err != nil {
		return nil, err
	}
	for _, name := range names {
		if err := add(name, files[name]); err != nil {
			return nil, err
		}
	}
	if err := z.Close(); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

// Limits of what is unpacked.
const (
	unpackFiles = 10_000
	unpackBytes = 4 << 30
)

// unpackBundle unpacks a bundle into the empty folder dir. It refuses whatever
// would leave the folder, is no plain file, is too much, or does not have the
// checksum that the bundle gives.
func unpackBundle(file, dir string) error { return unpackWithin(file, dir, unpackFiles, unpackBytes) }

func unpackWithin(file, dir string, mostFiles int, mostBytes int64) error {
	z, err := zip.OpenReader(file)
	if err != nil {
		return fmt.Errorf("%s: no bundle: %v", file, pathCause(err))
	}
	defer z.Close()
	fail := func(format string, args ...any) error {
		return fmt.Errorf("%s: refused: %s", file, fmt.Sprintf(format, args...))
	}
	if len(z.File) > mostFiles {
		return fail("it holds %d files, more than %d", len(z.File), mostFiles)
	}
	seen := map[string]bool{}
	var files []*zip.File
	for _, f := range z.File {
		// Whoever packs a bundle anew adds entries for folders; they hold nothing.
		if folder, ok := strings.CutSuffix(f.Name, "/"); ok && safeName(folder) && f.UncompressedSize64 == 0 {
			continue
		}
		files = append(files, f)
		switch {
		case !safeName(f.Name):
			return fail("the name %q would leave the folder", f.Name)
		case !f.Mode().IsRegular():
			return fail("%q is no plain file", f.Name)
		case seen[strings.ToLower(f.Name)]:
			return fail("%q stands twice", f.Name)
		}
		seen[strings.ToLower(f.Name)] = true
	}
	root, err := os.OpenRoot(dir)
	if err != nil {
		return err
	}
	defer root.Close()
	left := mostBytes
	for _, f := range files {
		n, err := unpackOne(root, f, left)
		if errors.Is(err, errTooMuch) {
			return fail("it holds more than %d bytes", mostBytes)
		}
		if err != nil {
			return fail("%s: %v", f.Name, err)
		}
		left -= n
	}
	return checkSums(file, dir, seen)
}

// safeName accepts what stays below the folder on any system.
func safeName(name string) bool {
	return filepath.IsLocal(filepath.FromSlash(name)) && path.Clean(name) == name && !strings.ContainsAny(name, "\\:") && !strings.ContainsRune(name, 0)
}

var errTooMuch = errors.New("too much")

func unpackOne(root *os.Root, f *zip.File, left int64) (int64, error) {
	r, err := f.Open()
	if err != nil {
		return 0, err
	}
	defer r.Close()
	if folder := path.Dir(f.Name); folder != "." {
		if err := root.MkdirAll(filepath.FromSlash(folder), 0o777); err != nil {
			return 0, err
		}
	}
	w, err := root.OpenFile(filepath.FromSlash(f.Name), os.O_CREATE|os.O_EXCL|os.O_WRONLY, 0o666)
	if err != nil {
		return 0, err
	}
	n, err := io.Copy(w, io.LimitReader(r, left+1))
	if err := errors.Join(err, w.Close()); err != nil {
		return n, err
	}
	if n > left {
		return n, errTooMuch
	}
	return n, nil
}

// checkSums compares every unpacked file with SHA256SUMS, and the manifest's
// paths with the bundle: a stranger's manifest may not read outside it.
func checkSums(file, dir string, present map[string]bool) error {
	text, err := os.ReadFile(filepath.Join(dir, bundleSums))
	if err != nil {
		return fmt.Errorf("%s: no bundle of thinward: there is no %s in it", file, bundleSums)
	}
	known := map[string]bool{strings.ToLower(bundleSums): true}
	for _, line := range strings.Split(strings.TrimSpace(string(text)), "\n") {
		sum, name, ok := strings.Cut(line, "  ")
		if !ok || !safeName(name) {
			return fmt.Errorf("%s: %s has the line %q", file, bundleSums, line)
		}
		got, err := sumOfFile(filepath.Join(dir, filepath.FromSlash(name)))
		if err != nil {
			return fmt.Errorf("%s: %s is missing from it", file, name)
		}
		if got != sum {
			return fmt.Errorf("%s: %s is damaged: its SHA-256 is %s, not %s", file, name, got, sum)
		}
		known[strings.ToLower(name)] = true
	}
	for name := range present {
		if !known[name] {
			return fmt.Errorf("%s: %s has no checksum", file, name)
		}
	}
	series := filepath.Join(dir, bundleInputs, bundleManifest)
	f, err := manifest.Read(series)
	if err != nil {
		return fmt.Errorf("%s: %w", file, err)
	}
	for _, name := range inputFiles(f) {
		if !filepath.IsLocal(name) {
			return fmt.Errorf("%s: its manifest names %s, which lies outside", file, name)
		}
	}
	return nil
}
