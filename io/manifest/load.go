package manifest

import (
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"

	"thinward/analysis"
	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// energyTolerance is the relative difference of beam energies that is passed over:
// more than the rounding of a wavelength to three digits makes.
const energyTolerance = 0.02

// Load reads a manifest and its files and makes a Study with default settings.
func Load(path string) (*analysis.Study, error) { return LoadWith(path, nil) }

// LoadWith is Load with settings; nil means the defaults.
func LoadWith(path string, set *analysis.Settings) (*analysis.Study, error) {
	series, err := ReadSeries(path)
	if err != nil {
		return nil, err
	}
	study, err := analysis.New(*series, set)
	if err != nil {
		return nil, &Error{File: path, Problem: err.Error(), Err: err}
	}
	return study, nil
}

// ReadSeries reads a manifest and its files.
func ReadSeries(path string) (*analysis.Series, error) {
	f, err := Read(path)
	if err != nil {
		return nil, err
	}
	l := &loader{path: path, dir: filepath.Dir(path), file: f}
	return l.series()
}

type loader struct {
	path, dir string
	file      *File
	out       analysis.Series
	groups    []found
	cells     []foundCell
}

// found is the symmetry one file carries.
type found struct {
	file  string
	group *crystal.Group
}

type foundCell struct {
	file string
	cell crystal.Cell
	at   place
}

func (l *loader) fail(at place, key, problem, remedy string, cause error) error {
	data, err := os.ReadFile(l.path)
	if err != nil {
		data = nil
	}
	e := (&checker{l.path, data}).fail(at, key, problem, remedy).(*Error)
	e.Err = cause
	return e
}

func (l *loader) series() (*analysis.Series, error) {
	f := l.file
	l.out = analysis.Series{
		Title: f.Title, EnergyKeV: f.EnergyKeV, Seed: f.Seed, ThicknessScaleSU: f.ThicknessScaleSU,
		FriedelApart: f.FriedelApart, CellTolerance: f.CellTolerance,
		Primary: analysis.Primary{Thin: f.Primary.Thin, Thick: f.Primary.Thick},
	}
	if m := f.MeanFreePath; m != nil {
		l.out.ElasticMFPNM, l.out.InelasticMFPNM = m.ElasticNM, m.InelasticNM
	}
	for i := range f.Crystal {
		k := &f.Crystal[i]
		specimen := analysis.Specimen{Name: k.Name}
		for j := range k.Position {
			p, err := l.position(&k.Position[j], place{"crystal.position", i, j}, k.Name)
			if err != nil {
				return nil, err
			}
			specimen.Positions = append(specimen.Positions, *p)
		}
		l.out.Crystals = append(l.out.Crystals, specimen)
	}
	l.out.Warnings = append(l.out.Warnings, f.doubts(l.out.EnergyKeV)...)
	for _, b := range f.Between {
		l.out.Between = append(l.out.Between, between(b))
	}
	// Cells first: axes of another order also make another group, and the remedy is theirs.
	if err := l.cell(); err != nil {
		return nil, err
	}
	if err := l.symmetry(); err != nil {
		return nil, err
	}
	if text := l.out.GroupOff(); text != "" {
		return nil, l.fail(place{crystal: -1, position: -1}, "space_group", text, "correct the space group or the cell, or raise cell_tolerance", nil)
	}
	return &l.out, nil
}

func (l *loader) position(p *Position, at place, crystalName string) (*analysis.Position, error) {
	policy, err := intensity.ParseRowPolicy(p.Rows)
	if err != nil {
		return nil, l.fail(at, "rows", err.Error(), "", err)
	}
	var by *crystal.Reindexing
	if p.Reindex != "" {
		r, err := crystal.ParseReindexing(p.Reindex)
		if err != nil {
			return nil, l.fail(at, "reindex", err.Error(), `write for instance reindex = "k,h,-l"`, err)
		}
		by = &r
	}
	where := crystalName + "/" + p.Name
	out := &analysis.Position{
		Name: p.Name, ThicknessNM: p.ThicknessNM, ThicknessSU: p.ThicknessSUNM, Order: p.Order, DosePerA2: p.Dose,
		ReplicateOf: p.ReplicateOf, Policy: policy,
		Exclude: analysis.Exclusion{Frames: p.Exclude.Frames, ShellsA: p.Exclude.ShellsA, Ice: p.Exclude.Ice},
	}
	if p.TiltZeroDeg != nil {
		out.TiltZeroDeg, out.HasTiltZero = *p.TiltZeroDeg, true
	}
	for _, name := range p.Files {
		path := name
		if !filepath.IsAbs(path) {
			path = filepath.Join(l.dir, path)
		}
		r, err := l.read(path, p.Block, at)
		if err != nil {
			return nil, err
		}
		switch {
		case l.out.EnergyKeV == 0:
			l.out.EnergyKeV = r.energyKeV
		case r.energyKeV > 0 && math.Abs(r.energyKeV/l.out.EnergyKeV-1) > energyTolerance:
			l.out.Warnings = append(l.out.Warnings, intensity.Warning{Code: "energy-differs", Where: where + ", " + filepath.Base(name),
				Text: fmt.Sprintf("the file gives %.4g keV, the series uses %.4g", r.energyKeV, l.out.EnergyKeV)})
		}
		if text := notElectrons(r.probe, r.wavelengthA, l.out.EnergyKeV, r.energyKeV > 0); text != "" {
			r.warnings = append(r.warnings, intensity.Warning{Code: "wavelength", Text: text})
		}
		for _, w := range r.warnings {
			w.Where = where + ", " + filepath.Base(name)
			l.out.Warnings = append(l.out.Warnings, w)
		}
		if by != nil {
			if err := r.reset(*by); err != nil {
				return nil, l.fail(at, "reindex", err.Error(), `write for instance reindex = "k,h,-l"`, err)
			}
		}
		var cell crystal.Cell
		if r.cell != nil {
			cell = *r.cell
			if out.Cell == (crystal.Cell{}) {
				out.Cell = cell
			}
			l.cells = append(l.cells, foundCell{name, cell, at})
		}
		if r.group != nil {
			l.groups = append(l.groups, found{name, r.group})
		}
		out.Merged = out.Merged || r.merged
		sum, err := digest(path)
		if err != nil {
			return nil, &Error{File: path, Problem: cause(err), Err: err}
		}
		out.Sources = append(out.Sources, analysis.Source{Path: name, SHA256: sum, Rows: r.rows, Cell: cell, SetAside: r.aside})
		if out.Rows, err = join(out.Rows, r.columns); err != nil {
			return nil, l.fail(at, "files", where+": "+err.Error(), "give files of one kind to a position", err)
		}
	}
	if err := recount(out.Rows, p.AngleFactor, p.AngleShiftDeg); err != nil {
		return nil, l.fail(at, "angle_factor", err.Error(), "leave angle_factor and angle_shift_deg out", err)
	}
	return out, nil
}

// reset brings indices, cell and symmetry of a file to other axes.
func (r *reflections) reset(by crystal.Reindexing) error {
	if err := reindex(r.columns, by); err != nil {
		return err
	}
	if r.cell != nil {
		cell := by.Cell(*r.cell)
		r.cell = &cell
	}
	if r.group == nil {
		return nil
	}
	var err error
	r.group, err = by.Group(r.group)
	return err
}

// join appends b to a. Frame numbers of b are moved beyond those of a, since
// frames of two files have nothing to do with each other.
func join(a, b *intensity.Columns) (*intensity.Columns, error) {
	if a == nil {
		return b, nil
	}
	if (a.Phi == nil) != (b.Phi == nil) || (a.Frame == nil) != (b.Frame == nil) || (a.Partiality == nil) != (b.Partiality == nil) {
		return nil, fmt.Errorf("one file has angles, frames or shares that another lacks")
	}
	a.H, a.K, a.L = append(a.H, b.H...), append(a.K, b.K...), append(a.L, b.L...)
	a.I, a.Sigma = append(a.I, b.I...), append(a.Sigma, b.Sigma...)
	a.Phi, a.Partiality = append(a.Phi, b.Phi...), append(a.Partiality, b.Partiality...)
	if a.Frame != nil {
		top := int32(math.MinInt32)
		for _, n := range a.Frame {
			top = max(top, n)
		}
		low := int32(math.MaxInt32)
		for _, n := range b.Frame {
			low = min(low, n)
		}
		for _, n := range b.Frame {
			a.Frame = append(a.Frame, n-low+top+2)
		}
	}
	return a, nil
}

func (l *loader) cell() error {
	top := place{crystal: -1, position: -1}
	if c := l.file.Cell; c != nil {
		l.out.Cell = c.whole()
		if err := l.out.Cell.Check(); err != nil {
			return l.fail(place{"cell", -1, -1}, "a", err.Error(), "give a, b, c in angstrom and the angles in degrees", err)
		}
	} else if len(l.cells) > 0 {
		l.out.Cell = l.cells[0].cell
	} else {
		return l.fail(top, "cell", "neither the manifest nor a file gives the unit cell", "add a [cell] table with a, b, c, alpha, beta, gamma", nil)
	}
	for _, c := range l.cells {
		if text := l.out.CellOff(c.cell); text != "" {
			return l.fail(c.at, "files", c.file+": "+text, remedyForCell(l.out.Cell, c.cell), nil)
		}
	}
	return nil
}

// remedyForCell proposes another order of the axes where that brings the cells
// together.
func remedyForCell(series, file crystal.Cell) string {
	for _, text := range []string{"l,h,k", "k,l,h", "k,h,-l", "-h,l,k", "l,-k,h"} {
		by, err := crystal.ParseReindexing(text)
		if err != nil {
			continue
		}
		if d := crystal.CompareCells(series, by.Cell(file)); d.Length < 0.01 && d.Angle < 1 {
			return fmt.Sprintf("its axes look named in another order: write reindex = %q for this position", text)
		}
	}
	return "check that the file belongs to the series and is indexed in the same setting, or raise cell_tolerance"
}

func (c *Cell) whole() crystal.Cell {
	or := func(p *float64, otherwise float64) float64 {
		if p == nil {
			return otherwise
		}
		return *p
	}
	return crystal.Cell{A: c.A, B: or(c.B, c.A), C: or(c.C, c.A), Alpha: or(c.Alpha, 90), Beta: or(c.Beta, 90), Gamma: or(c.Gamma, 90)}
}

func digest(path string) (string, error) {
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
