package manifest

import (
	"bytes"
	"compress/gzip"
	"fmt"
	"io"
	"os"
	"strings"

	"thinward/analysis"
	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
	"thinward/io/cif"
	"thinward/io/delimited"
)

// reflections is what one file gave, whatever its kind.
type reflections struct {
	columns     *intensity.Columns
	cell        *crystal.Cell
	group       *crystal.Group
	energyKeV   float64
	wavelengthA float64 // 0 where the file gives none
	probe       string  // "" where the file gives none
	merged      bool
	rows        int
	aside       []analysis.SetAside
	warnings    []intensity.Warning
}

func (l *loader) read(path, pick string, at place) (*reflections, error) {
	if info, err := os.Stat(path); err == nil && info.IsDir() {
		return nil, l.fail(at, "files", path+" is a folder, not a file", "name the files in it", nil)
	}
	kind, err := LooksLikeCIF(path)
	if err != nil {
		return nil, l.fail(at, "files", fmt.Sprintf("%s cannot be read: %s", path, cause(err)), "check the path; it is relative to the manifest", err)
	}
	if kind {
		return readCIF(path, pick)
	}
	return l.readColumns(path)
}

// LooksLikeCIF reports whether the first word that is no comment begins a data
// block.
func LooksLikeCIF(path string) (bool, error) {
	f, err := os.Open(path)
	if err != nil {
		return false, err
	}
	defer f.Close()
	head := make([]byte, 64<<10)
	n, err := io.ReadFull(f, head)
	if err != nil && err != io.ErrUnexpectedEOF && err != io.EOF {
		return false, err
	}
	return looksLikeCIF(head[:n]), nil
}

func looksLikeCIF(head []byte) bool {
	if bytes.HasPrefix(head, []byte{0x1f, 0x8b}) {
		z, err := gzip.NewReader(bytes.NewReader(head))
		if err != nil {
			return false // the reader of the file says what is wrong with it
		}
		plain, _ := io.ReadAll(io.LimitReader(z, 64<<10)) // cut short on purpose
		head = plain
	}
	text := strings.TrimPrefix(string(head), "\ufeff")
	if strings.HasPrefix(text, `#\#CIF`) {
		return true
	}
	for line := range strings.Lines(strings.ReplaceAll(text, "\r", "\n")) {
		line = strings.TrimSpace(line)
		if line == "" || line[0] == '#' {
			continue
		}
		return len(line) >= 5 && strings.EqualFold(line[:5], "data_") || line[0] == '_' || strings.HasPrefix(strings.ToLower(line), "loop_")
	}
	return false
}

func readCIF(path, pick string) (*reflections, error) {
	f, err := cif.ReadFile(path)
	if err != nil {
		return nil, err
	}
	r, err := f.Read(cif.Selection{Pick: pick})
	if err != nil {
		return nil, err
	}
	out := &reflections{columns: r.Columns, cell: r.Cell, energyKeV: r.EnergyKeV, wavelengthA: r.WavelengthA, probe: r.Probe, merged: r.Merged, rows: r.Rows, warnings: r.Warnings}
	for _, a := range r.SetAside {
		out.aside = append(out.aside, analysis.SetAside{Reason: a.Reason, N: a.Count, FirstLine: a.FirstLine})
	}
	if out.group, err = group(&r.Facts); err != nil {
		return nil, &Error{File: path, Key: r.SymmetrySource(), Problem: err.Error(), Remedy: "correct the file, or give space_group in the manifest and a file without symmetry", Err: err}
	}
	return out, nil
}

func group(f *cif.Facts) (*crystal.Group, error) {
	switch f.SymmetrySource() {
	case "operators":
		return crystal.ParseOperators(f.Operators)
	case "Hall symbol":
		return crystal.FromHall(f.Hall)
	case "Hermann-Mauguin symbol":
		return crystal.Lookup(f.HM)
	case "number":
		return crystal.Lookup(fmt.Sprint(f.Number))
	}
	return nil, nil
}

func (l *loader) readColumns(path string) (*reflections, error) {
	set := &delimited.Options{}
	if c := l.file.Columns; c != nil {
		set.Order, set.Widths = c.Order, c.Widths
		if c.Delimiter != "" {
			d, ok := delimiters[c.Delimiter]
			if !ok {
				return nil, l.fail(place{"columns", -1, -1}, "delimiter", fmt.Sprintf("%q is not known", c.Delimiter), `use "comma", "tab", "semicolon" or "blanks"`, nil)
			}
			set.Delimiter = d
		}
	}
	r, err := delimited.ReadFile(path, set)
	if err != nil {
		return nil, err
	}
	out := &reflections{columns: r.Columns, rows: r.Rows, warnings: r.Warnings}
	for _, a := range r.SetAside {
		out.aside = append(out.aside, analysis.SetAside{Reason: a.Reason, N: a.Count, FirstLine: a.FirstLine})
	}
	return out, nil
}

var delimiters = map[string]byte{
	"comma": ',', ",": ',', "tab": '\t', "\t": '\t', "semicolon": ';', ";": ';', "blanks": ' ', " ": ' ',
}

func between(b Between) analysis.Between {
	tc, tp, _ := strings.Cut(b.Thin, "/")
	kc, kp, _ := strings.Cut(b.Thick, "/")
	return analysis.Between{ThinCrystal: tc, ThinPosition: tp, ThickCrystal: kc, ThickPosition: kp}
}
