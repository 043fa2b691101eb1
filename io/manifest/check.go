package manifest

import (
	"bytes"
	"fmt"
	"math"
	"path/filepath"
	"strings"

	"thinward/analysis/intensity"
)

// place is where in a manifest something stands: crystal and position count
// from 0 and are -1 where they do not apply.
type place struct {
	table             string
	crystal, position int
}

// checker makes errors that carry the line of a key.
type checker struct {
	name string
	data []byte
}

func (c *checker) fail(at place, key, problem, remedy string) error {
	full := key
	if at.table != "" {
		full = at.table + "." + key
	}
	return &Error{File: c.name, Line: lineOf(c.data, at, key), Key: full, Problem: problem, Remedy: remedy}
}

// lineOf finds the line of a key in its table: the header's own line when the
// key is not written, 0 when the table is not there either.
func lineOf(data []byte, want place, key string) int {
	at := place{crystal: -1, position: -1}
	header := 0
	first, _, _ := strings.Cut(key, ".")
	for i, line := range bytes.Split(data, []byte{'\n'}) {
		s := strings.TrimSpace(string(line))
		if strings.HasPrefix(s, "[") && strings.Contains(s, "]") {
			at.table = strings.Trim(strings.TrimRight(strings.SplitN(s, "#", 2)[0], " \t"), "[]")
			switch at.table {
			case "crystal":
				at.crystal++
				at.position = -1
			case "crystal.position":
				at.position++
			default:
				at.crystal, at.position = -1, -1
			}
			if at == want {
				header = i + 1
			}
			continue
		}
		if name, _, ok := strings.Cut(s, "="); ok && at == want && strings.TrimSpace(name) == first {
			return i + 1
		}
	}
	return header
}

// Energies beyond these are taken for a slip of the unit. Both are chosen wide; no source.
const (
	leastKeV = 1
	mostKeV  = 5000
)

// check validates in the order of the file; the first fault is returned.
func (f *File) check(name string, data []byte) error {
	c := &checker{name, data}
	top := place{crystal: -1, position: -1}
	if len(f.Crystal) == 0 {
		return c.fail(top, "crystal", "no crystal", "add a [[crystal]] table with [[crystal.position]] tables below it")
	}
	if f.SpaceGroup != "" && len(f.Operators) > 0 {
		return c.fail(top, "operators", "space_group and operators are both given", "keep one of them")
	}
	if f.EnergyKeV != 0 && !(f.EnergyKeV >= leastKeV && f.EnergyKeV <= mostKeV) {
		return c.fail(top, "energy_keV", fmt.Sprintf("%g keV is no energy of an electron microscope", f.EnergyKeV), "give kilo-electronvolts, such as 300.0")
	}
	if f.CellTolerance < 0 || math.IsNaN(f.CellTolerance) {
		return c.fail(top, "cell_tolerance", fmt.Sprintf("%g is no tolerance", f.CellTolerance), "give a relative tolerance such as 0.02")
	}
	if f.ThicknessScaleSU < 0 || math.IsNaN(f.ThicknessScaleSU) {
		return c.fail(top, "thickness_scale_su", fmt.Sprintf("%g is no uncertainty", f.ThicknessScaleSU), "give a relative uncertainty such as 0.1")
	}
	if m := f.MeanFreePath; m != nil && (!(m.ElasticNM > 0) || !(m.InelasticNM > 0) || math.IsInf(m.ElasticNM+m.InelasticNM, 0)) {
		return c.fail(place{"mean_free_path", -1, -1}, "elastic_nm", fmt.Sprintf("elastic %g and inelastic %g nm", m.ElasticNM, m.InelasticNM), "give both in nanometres, or leave the table out")
	}
	crystals := map[string]bool{}
	for i := range f.Crystal {
		if err := f.Crystal[i].check(c, i, crystals); err != nil {
			return err
		}
	}
	if err := f.checkFilesOnce(c); err != nil {
		return err
	}
	if err := f.checkContrast(c); err != nil {
		return err
	}
	for i := range f.Between {
		for _, s := range []string{f.Between[i].Thin, f.Between[i].Thick} {
			if strings.Count(s, "/") != 1 {
				return c.fail(place{"between", -1, -1}, "thin", fmt.Sprintf("%q is not CRYSTAL/POSITION", s), `write for instance thin = "L1/thin"`)
			}
		}
	}
	return nil
}

// checkContrast refuses a crystal of several positions of one thickness, and crystals of
// which none has two positions when no contrast between them is asked for: nothing can
// be compared.
func (f *File) checkContrast(c *checker) error {
	several := false
	for i := range f.Crystal {
		k := &f.Crystal[i]
		first, second, differ := -1, -1, false
		for j := range k.Position {
			switch {
			case k.Position[j].ReplicateOf != "":
			case first < 0:
				first = j
			default:
				second = j
				differ = differ || k.Position[j].ThicknessNM != k.Position[first].ThicknessNM
			}
		}
		if second >= 0 && !differ {
			return c.fail(place{"crystal.position", i, second}, "thickness_nm",
				fmt.Sprintf("no contrast: all positions of crystal %s are given one thickness, %g nm", k.Name, k.Position[first].ThicknessNM),
				fmt.Sprintf("correct thickness_nm, or write replicate_of = %q for a second place of equal thickness", k.Position[first].Name))
		}
		several = several || second >= 0
	}
	if !several && len(f.Between) == 0 {
		return c.fail(place{"crystal", 0, -1}, "position", "no contrast: no crystal has two positions of different thickness",
			"put the positions of one crystal under one [[crystal]]; a contrast between two crystals must be asked for with [[between]]")
	}
	return nil
}

// checkFilesOnce refuses a data set that stands in two positions: it would differ
// from itself by nothing, and count twice as a strength.
func (f *File) checkFilesOnce(c *checker) error {
	seen := map[string]string{}
	for i := range f.Crystal {
		for j := range f.Crystal[i].Position {
			p := &f.Crystal[i].Position[j]
			where := f.Crystal[i].Name + "/" + p.Name
			for _, path := range p.Files {
				id := filepath.Clean(path) + "\x00" + p.Block
				if other, ok := seen[id]; ok {
					return c.fail(place{"crystal.position", i, j}, "files", fmt.Sprintf("%q stands in %s and in %s", path, other, where), "give each position its own file, or its own block of the file")
				}
				seen[id] = where
			}
		}
	}
	return nil
}

func (k *Crystal) check(c *checker, i int, seen map[string]bool) error {
	at := place{"crystal", i, -1}
	switch {
	case k.Name == "":
		return c.fail(at, "name", fmt.Sprintf("crystal %d has no name", i+1), `add name = "..."`)
	case strings.Contains(k.Name, "/"):
		return c.fail(at, "name", fmt.Sprintf("%q holds a slash, which separates crystal and position", k.Name), "choose another name")
	case seen[k.Name]:
		return c.fail(at, "name", fmt.Sprintf("crystal %q stands twice", k.Name), "give each crystal its own name")
	case len(k.Position) == 0:
		return c.fail(at, "position", fmt.Sprintf("crystal %s has no position", k.Name), "add a [[crystal.position]] table")
	}
	seen[k.Name] = true
	positions := map[string]bool{}
	for j := range k.Position {
		if err := k.Position[j].check(c, place{"crystal.position", i, j}, k.Name, positions); err != nil {
			return err
		}
	}
	for j := range k.Position {
		if r := k.Position[j].ReplicateOf; r != "" && (!positions[r] || r == k.Position[j].Name) {
			return c.fail(place{"crystal.position", i, j}, "replicate_of", fmt.Sprintf("%q is not another position of crystal %s", r, k.Name), "name the position that this one repeats")
		}
	}
	return nil
}

func (p *Position) check(c *checker, at place, crystal string, seen map[string]bool) error {
	where := crystal + "/" + p.Name
	bad := func(f float64) bool { return !(f >= 0) || math.IsInf(f, 0) }
	switch {
	case p.Name == "":
		return c.fail(at, "name", fmt.Sprintf("position %d of crystal %s has no name", at.position+1, crystal), `add name = "..."`)
	case strings.Contains(p.Name, "/"):
		return c.fail(at, "name", fmt.Sprintf("%q holds a slash, which separates crystal and position", p.Name), "choose another name")
	case seen[p.Name]:
		return c.fail(at, "name", where+" stands twice", "give each position of a crystal its own name")
	case !(p.ThicknessNM > 0) || math.IsInf(p.ThicknessNM, 0):
		return c.fail(at, "thickness_nm", fmt.Sprintf("%s has thickness %g nm", where, p.ThicknessNM), "give a positive thickness in nanometres")
	case bad(p.ThicknessSUNM):
		return c.fail(at, "thickness_su_nm", fmt.Sprintf("%s: %g is no uncertainty", where, p.ThicknessSUNM), "give nanometres, 0 or more")
	case bad(p.Dose):
		return c.fail(at, "dose_e_per_A2", fmt.Sprintf("%s: %g is no dose", where, p.Dose), "give electrons per square angstrom, 0 or more")
	case p.Order < 0:
		return c.fail(at, "order", fmt.Sprintf("%s: %d is no order", where, p.Order), "count measurements from 1")
	case math.IsNaN(p.AngleFactor) || math.IsInf(p.AngleFactor, 0):
		return c.fail(at, "angle_factor", fmt.Sprintf("%s: %g is no factor", where, p.AngleFactor), "give what turns the angles of the file into degrees, such as -1.0 or 57.29578, or leave it out")
	case math.IsNaN(p.AngleShiftDeg) || math.IsInf(p.AngleShiftDeg, 0):
		return c.fail(at, "angle_shift_deg", fmt.Sprintf("%s: %g is no angle", where, p.AngleShiftDeg), "give degrees, or leave it out")
	case len(p.Files) == 0:
		return c.fail(at, "files", where+" names no file", `add files = ["..."]`)
	}
	if _, err := intensity.ParseRowPolicy(p.Rows); err != nil {
		return c.fail(at, "rows", fmt.Sprintf("%s: %q is not known", where, p.Rows), `use "auto", "repeats", "copies" or "slices"`)
	}
	for _, path := range p.Files {
		if path == "" {
			return c.fail(at, "files", where+" names an empty path", "give the path of a reflection file")
		}
		if !filepath.IsAbs(path) && !filepath.IsLocal(path) {
			return c.fail(at, "files", fmt.Sprintf("%q leaves the folder of the manifest", path), "move the file below the manifest, or give its absolute path")
		}
	}
	for _, s := range p.Exclude.ShellsA {
		if !(s[0] > 0) || !(s[1] > 0) || math.IsInf(s[0], 0) || math.IsInf(s[1], 0) {
			return c.fail(at, "exclude.shells_A", fmt.Sprintf("%s: %v is no shell", where, s), "give two spacings in angstrom, such as [3.70, 3.64]")
		}
	}
	seen[p.Name] = true
	return nil
}
