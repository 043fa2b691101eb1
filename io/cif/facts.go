package cif

import (
	"fmt"
	"math"
	"strings"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
	"thinward/io/internal/text"
)

// The data names of one fact, best first: old core, current core, macromolecular.
var (
	cellNames = [6][]string{
		cellItem("length_a"), cellItem("length_b"), cellItem("length_c"),
		cellItem("angle_alpha"), cellItem("angle_beta"), cellItem("angle_gamma"),
	}
	operatorNames = []string{"_space_group_symop_operation_xyz", "_space_group_symop.operation_xyz", "_symmetry_equiv_pos_as_xyz", "_symmetry_equiv.pos_as_xyz"}
	hallNames     = []string{"_space_group_name_Hall", "_space_group.name_Hall", "_symmetry_space_group_name_Hall", "_symmetry.space_group_name_Hall"}
	hmNames       = []string{"_space_group_name_H-M_alt", "_space_group.name_H-M_alt", "_space_group_name_H-M_full", "_space_group.name_H-M_full",
		"_symmetry_space_group_name_H-M", "_symmetry.space_group_name_H-M", "_symmetry.pdbx_full_space_group_name_H-M"}
	numberNames     = []string{"_space_group_IT_number", "_space_group.IT_number", "_symmetry_Int_Tables_number", "_symmetry.Int_Tables_number"}
	wavelengthNames = []string{"_diffrn_radiation_wavelength", "_diffrn_radiation_wavelength.value", "_diffrn_radiation_wavelength.wavelength",
		"_diffrn_radiation_wavelength_value", "_diffrn_radiation_wavelength_wavelength", "_diffrn_radiation.pdbx_wavelength", "_diffrn_source.pdbx_wavelength",
		"_pdbx_diffrn_unmerged_cell.wavelength", "_cell_measurement_wavelength", "_cell_measurement.wavelength"}
	weightNames      = []string{"_diffrn_radiation_wavelength_wt", "_diffrn_radiation_wavelength.wt"}
	probeNames       = []string{"_diffrn_radiation_probe", "_diffrn_radiation.probe", "_diffrn_radiation.pdbx_scattering_type", "_diffrn_radiation_type", "_diffrn_radiation.type", "_exptl.method"}
	voltageNames     = []string{"_diffrn_source_voltage", "_diffrn_source.voltage"}
	temperatureNames = []string{"_diffrn_ambient_temperature", "_diffrn.ambient_temperature", "_diffrn_ambient_temp", "_diffrn.ambient_temp",
		"_cell_measurement_temperature", "_cell_measurement.temperature", "_cell_measurement.temp", "_cell_measurement_temp"}
)

// cellItem returns the names of one parameter of the cell, the last two those of
// cells given by data set.
func cellItem(item string) []string {
	return []string{"_cell_" + item, "_cell." + item, "_pdbx_diffrn_cell." + item, "_pdbx_diffrn_unmerged_cell.cell_" + item}
}

// scaleItems are factors by scale group, of which only the first pair has a direction
// that a dictionary defines.
var scaleItems = []string{"_diffrn_scale_group_I_net", "_diffrn_scale_group.I_net", "_reflns_scale_meas_intensity", "_reflns_scale.meas_intensity",
	"_reflns_scale_meas_F_squared", "_reflns_scale.meas_F_squared", "_reflns_scale_meas_F", "_reflns_scale.meas_F"}

// thicknessItems are the items that may speak of thickness, with the unit that the
// dictionary gives each: four units for one idea, so none is ever guessed.
var thicknessItems = []struct {
	names []string
	unit  string
	nm    float64
}{
	{[]string{"_refine_ls_sample_thickness", "_refine_ls.sample_thickness"}, "nm", 1},
	{[]string{"_pdbx_exptl_crystal_process.microcrystal_min_dim"}, "um", 1e3},
	{[]string{"_exptl_crystal_size_min", "_exptl_crystal.size_min"}, "mm", 1e6},
}

// gatherer looks facts up, first in the block of the list, then in the others.
type gatherer struct {
	file *File
	list *list
	out  *Reflections
}

func (f *File) facts(l *list, out *Reflections) error {
	g := gatherer{f, l, out}
	for _, step := range []func() error{g.cell, g.symmetry, g.radiation, g.temperature, g.thickness, g.scaleFactors} {
		if err := step(); err != nil {
			return err
		}
	}
	return nil
}

func (g *gatherer) fault(b *Block, v Value, item, problem, remedy string) error {
	return &Error{File: g.file.Name, Line: text.Line(g.file.data, v.offset), Block: b.Code, Item: item, Problem: problem, Remedy: remedy}
}

func (g *gatherer) warn(code, sentence string) {
	g.out.Warnings = append(g.out.Warnings, intensity.Warning{Code: code, Text: sentence, Where: g.file.Name})
}

// own returns the blocks a list belongs to, other the rest of the file.
func (g *gatherer) own() []*Block {
	if g.list.parent != nil {
		return []*Block{g.list.block, g.list.parent}
	}
	return []*Block{g.list.block}
}

func (g *gatherer) other() []*Block {
	var out []*Block
	for _, b := range g.file.Blocks {
		if b != g.list.block && b != g.list.parent {
			out = append(out, b)
		}
	}
	return out
}

// known returns the first name of names with a value that is no null, and its
// values.
func known(b *Block, names []string) (string, []Value) {
	for _, name := range names {
		values := b.Values(name)
		for _, v := range values {
			if !v.Null() {
				return name, values
			}
		}
	}
	return "", nil
}

// lookup finds a fact in the list's own block, else, with a warning, in another
// one. Blocks that contradict each other leave it unknown, also with a warning.
func (g *gatherer) lookup(what string, names []string) (*Block, string, []Value) {
	for _, b := range g.own() {
		if name, values := known(b, names); name != "" {
			return b, name, values
		}
	}
	var block *Block
	var item string
	var found []Value
	for _, b := range g.other() {
		name, values := known(b, names)
		if name == "" {
			continue
		}
		if block != nil && joined(values) != joined(found) {
			g.warn("other-blocks", fmt.Sprintf("the blocks %s and %s give different %s and the block of the list none; it was left open", block, b, what))
			return nil, "", nil
		}
		if block == nil {
			block, item, found = b, name, values
		}
	}
	if block != nil {
		g.warn("other-block", fmt.Sprintf("the %s was taken from block %s, as the block of the list has none", what, block))
	}
	return block, item, found
}

func joined(values []Value) string {
	var s strings.Builder
	for _, v := range values {
		s.WriteString(v.Text + "\x00")
	}
	return s.String()
}

// single is lookup for a fact of one value; several different ones leave it open.
func (g *gatherer) single(what string, names []string) (b *Block, item string, v Value, ok bool) {
	b, item, values := g.lookup(what, names)
	for _, w := range values {
		switch {
		case w.Null():
		case !ok:
			v, ok = w, true
		case w.Text != v.Text:
			g.warn("several-values", fmt.Sprintf("%s has several different values; the %s was left open", item, what))
			return nil, "", Value{}, false
		}
	}
	return b, item, v, ok
}

func (g *gatherer) number(b *Block, item string, v Value) (x, su float64, err error) {
	x, su, ok := v.Number()
	if !ok {
		return 0, 0, g.fault(b, v, item, text.Shown([]byte(v.Text))+" is not a number", numberRemedy([]byte(v.Text)))
	}
	return x, su, nil
}

func (g *gatherer) cell() error {
	b, _, _ := g.lookup("cell", cellNames[0])
	if b == nil {
		return nil
	}
	var x [6]float64
	var lead Value
	for j, names := range cellNames {
		item, values := known(b, names)
		if item == "" {
			if _, dotted := known(b, []string{"_cell.length_a"}); j >= 3 && dotted != nil {
				x[j] = 90
				g.warn("cell-angle", names[1]+" is not given; 90 degrees is the default of the macromolecular dictionary")
				continue
			}
			return g.fault(b, lead, names[0], "the cell is not complete", "give all six of a, b, c, alpha, beta and gamma")
		}
		for _, v := range values[1:] {
			if v.Text != values[0].Text {
				return g.fault(b, v, item, "the block gives more than one cell", "leave the cell of this list only")
			}
		}
		if j == 0 {
			lead = values[0]
		}
		v, _, err := g.number(b, item, values[0])
		if err != nil {
			return err
		}
		x[j] = v
	}
	cell := crystal.Cell{A: x[0], B: x[1], C: x[2], Alpha: x[3], Beta: x[4], Gamma: x[5]}
	if err := cell.Check(); err != nil {
		return g.fault(b, lead, "_cell", "the cell cannot be: "+err.Error(), "correct the cell in the file, or give it in the manifest")
	}
	g.out.Cell = &cell
	return nil
}

func (g *gatherer) symmetry() error {
	if err := g.symmetryItems(); err != nil || g.out.SymmetrySource() == "" {
		return err
	}
	group, err := g.out.Group()
	switch {
	case err != nil:
		g.warn("symmetry", err.Error()+"; give the space group in the manifest")
	case g.out.Number != 0 && group.Number() != g.out.Number:
		g.warn("symmetry", fmt.Sprintf("the %s mean space group %d, but the number given is %d; the %s were followed", g.out.SymmetrySource(), group.Number(), g.out.Number, g.out.SymmetrySource()))
	}
	return nil
}

func (g *gatherer) symmetryItems() error {
	if b, item, values := g.lookup("list of symmetry operators", operatorNames); b != nil {
		for _, v := range values {
			if v.Null() {
				return g.fault(b, v, item, "a symmetry operator is null", "give the complete list of operators, or remove it")
			}
			g.out.Operators = append(g.out.Operators, strings.TrimSpace(v.Text))
		}
	}
	if _, _, v, ok := g.single("Hall symbol", hallNames); ok {
		g.out.Hall = strings.TrimSpace(v.Text)
	}
	if _, _, v, ok := g.single("Hermann-Mauguin symbol", hmNames); ok {
		g.out.HM = strings.TrimSpace(v.Text)
	}
	b, item, v, ok := g.single("space-group number", numberNames)
	if !ok {
		return nil
	}
	n, ok := text.ParseIndex([]byte(v.Text))
	if !ok || n < 1 || n > 230 {
		return g.fault(b, v, item, text.Shown([]byte(v.Text))+" is not a space-group number", "give a whole number from 1 to 230")
	}
	g.out.Number = n
	return nil
}

func (g *gatherer) temperature() error {
	b, item, v, ok := g.single("temperature", temperatureNames)
	if !ok {
		return nil
	}
	t, _, err := g.number(b, item, v)
	if err != nil {
		return err
	}
	if t < 0 {
		return g.fault(b, v, item, "the temperature is negative", "give it in kelvin")
	}
	g.out.TemperatureK = t
	return nil
}

// scaleFactors says that factors by scale group are not applied: scales are fitted
// anew, and in real files the intensities often carry the factors already.
func (g *gatherer) scaleFactors() error {
	if g.list.plan.item[roleScaleGroup]+g.list.plan.item[roleScaleSet] == "" {
		return nil
	}
	for _, b := range g.own() {
		for _, item := range scaleItems {
			if b.Has(item) {
				g.warn("scale-factors", item+" gives factors by scale group; they were not applied, as the intensities may carry them already")
				return nil
			}
		}
	}
	return nil
}

func (g *gatherer) thickness() error {
	for _, kind := range thicknessItems {
		for _, b := range g.own() {
			item, values := known(b, kind.names)
			if item == "" {
				continue
			}
			for _, v := range values {
				if v.Null() {
					continue
				}
				x, su, err := g.number(b, item, v)
				if err != nil {
					return err
				}
				if x < 0 {
					return g.fault(b, v, item, "the thickness is negative", "correct it, or state the thickness in the manifest")
				}
				g.out.Thickness = append(g.out.Thickness, Thickness{Item: item, Value: x, SU: su, Unit: kind.unit, NM: x * kind.nm})
			}
			break
		}
	}
	return nil
}

func (f *File) transformMatrix(l *list) (m [3][3]float64, any bool, err error) {
	g := gatherer{f, l, &Reflections{}}
	for i := range m {
		for j := range m[i] {
			names := []string{
				fmt.Sprintf("_diffrn_reflns_transf_matrix_%d%d", i+1, j+1),
				fmt.Sprintf("_diffrn_reflns_transf_matrix.%d%d", i+1, j+1),
				fmt.Sprintf("_diffrn_reflns.transf_matrix[%d][%d]", i+1, j+1),
			}
			item, values := known(l.block, names)
			if item == "" {
				if any {
					return m, false, l.fault(l.line(0), names[0], "the index transformation is not complete", "give all nine elements, or remove it")
				}
				if i+j > 0 {
					continue
				}
				m[i][j] = math.NaN()
				continue
			}
			if !any && i+j > 0 {
				return m, false, l.fault(l.line(0), "_diffrn_reflns_transf_matrix_11", "the index transformation is not complete", "give all nine elements, or remove it")
			}
			any = true
			if m[i][j], _, err = g.number(l.block, item, values[0]); err != nil {
				return m, false, err
			}
		}
	}
	return m, any, nil
}
