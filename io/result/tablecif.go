package result

import (
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"unicode"

	"thinward/analysis"
	"thinward/analysis/crystal"
	"thinward/analysis/electron"
	"thinward/io/cif"
)

// LocalPrefix begins the data names that no public dictionary has; it is
// reserved for such use and never clashes.
const LocalPrefix = "[local]"

// CIFSettings are choices of the CIF writers; nil means the defaults.
type CIFSettings struct {
	// Prefix begins private data names; "" = LocalPrefix. Another one should be
	// registered, and holds no underscore.
	Prefix string
}

type cifWriter struct {
	*cif.Writer
	prefix string
	series *analysis.Series
	codes  map[string]bool
	err    error
}

func newCIF(w io.Writer, series *analysis.Series, set *CIFSettings, about string) (*cifWriter, error) {
	c := &cifWriter{prefix: LocalPrefix, series: series, codes: map[string]bool{}}
	if set != nil && set.Prefix != "" {
		c.prefix = set.Prefix
	}
	for _, r := range c.prefix {
		if r == '_' || r <= ' ' || r > '~' {
			return nil, fmt.Errorf("result: %q cannot begin data names: letters and figures only", c.prefix)
		}
	}
	c.Writer = cif.NewWriter(w)
	local := "Names that begin with _" + c.prefix + "_ are private to this file"
	if c.prefix == LocalPrefix {
		local = "Names that begin with _[local]_ are local: no public dictionary has them, and none ever will"
	}
	c.keep(c.Comment(about + "\n" + local + ";\nall others are those of the public core and macromolecular dictionaries."))
	return c, nil
}

func (c *cifWriter) keep(err error) {
	if c.err == nil {
		c.err = err
	}
}

func (c *cifWriter) item(name string, v cif.Value) { c.keep(c.Item(name, v)) }

func (c *cifWriter) local(name string) string { return "_" + c.prefix + "_" + name }

func (c *cifWriter) loop(names ...string) { c.keep(c.Loop(names)) }

func (c *cifWriter) row(values ...cif.Value) { c.keep(c.Row(values)) }

func (c *cifWriter) close() error {
	c.keep(c.Close())
	return c.err
}

// block begins a data block and says what holds for all of its reflections.
func (c *cifWriter) block(name string) {
	code := blockCode(name)
	for n := 2; c.codes[strings.ToLower(code)]; n++ {
		code = blockCode(name) + "-" + strconv.Itoa(n)
	}
	c.codes[strings.ToLower(code)] = true
	c.keep(c.Block(code))
	s := c.series
	c.item("_audit_creation_method", cif.Str("Thinward"))
	c.loop("_audit_conform_dict_name", "_audit_conform_dict_version")
	c.row(cif.Str("cif_core.dic"), cif.NotKnown())
	c.row(cif.Str("mmcif_pdbx.dic"), cif.NotKnown())
	c.item(c.local("series_title"), word(s.Title))
	for _, p := range []struct {
		name  string
		value float64
	}{{"length_a", s.Cell.A}, {"length_b", s.Cell.B}, {"length_c", s.Cell.C}, {"angle_alpha", s.Cell.Alpha}, {"angle_beta", s.Cell.Beta}, {"angle_gamma", s.Cell.Gamma}} {
		c.item("_cell_"+p.name, cif.Num(p.value))
	}
	if g := s.Group; g != nil {
		if n := g.Number(); n > 0 {
			c.item("_space_group_IT_number", cif.Int(n))
		}
		if hm := g.HM(); hm != "" {
			c.item("_space_group_name_H-M_alt", cif.Str(hm))
		}
		c.item("_space_group_name_Hall", cif.Str(g.Hall()))
		c.loop("_space_group_symop_id", "_space_group_symop_operation_xyz")
		for i, o := range g.Operators() {
			c.row(cif.Int(i+1), cif.Str(o.String()))
		}
	}
	if s.EnergyKeV > 0 {
		c.item("_diffrn_radiation_probe", cif.Str("electron"))
		c.item("_diffrn_radiation_wavelength", cif.Num(math.Round(electron.Wavelength(s.EnergyKeV)*1e7)/1e7))
	}
}

// position says which crystal and position a block holds.
func (c *cifWriter) position(name, crystal string, thickness, su float64) {
	c.item(c.local("set_id"), word(name))
	c.item(c.local("set_crystal"), word(crystal))
	c.item(c.local("set_thickness_nm"), cif.Num(thickness))
	c.item(c.local("set_thickness_nm_su"), known(su))
	c.item(c.local("set_thickness_source"), cif.Str("given by the user"))
}

// WriteScaledCIF writes the scaled observations of each position as a block with
// a loop of unmerged reflections: intensity_net has the scale applied, and
// pdbx_scale_value is the factor that was applied (1/g).
func WriteScaledCIF(w io.Writer, series *analysis.Series, tables []analysis.ScaledTable, set *CIFSettings) error {
	c, err := newCIF(w, series, set, "Scaled observations, one block a position. Intensities are on the scale of the thinnest position\nof their crystal, uncertainties are those of the noise model; the scale stands in its own column\nand must not be applied again.")
	if err != nil {
		return err
	}
	for i := range tables {
		t := &tables[i]
		if len(t.Rows) == 0 {
			continue
		}
		c.block(t.Crystal + "-" + t.Position)
		c.position(t.Position, t.Crystal, t.ThicknessNM, t.ThicknessSU)
		names := []string{"_diffrn_refln.id", "_diffrn_refln.index_h", "_diffrn_refln.index_k", "_diffrn_refln.index_l",
			"_diffrn_refln.intensity_net", "_diffrn_refln.intensity_net_su", "_diffrn_refln.pdbx_scale_value", c.local("diffrn_refln_weight")}
		angles := !math.IsNaN(t.Rows[0].Phi)
		if angles {
			names = append(names, "_diffrn_refln.pdbx_scan_angle")
		}
		c.loop(names...)
		for k := range t.Rows {
			r := &t.Rows[k]
			v := append([]cif.Value{cif.Int(k + 1)}, index(r.HKL)...)
			v = append(v, cif.Num(r.J), cif.Num(r.SUJ), cif.Num(1/r.Scale), cif.Num(r.Weight))
			if angles {
				v = append(v, cif.Num(r.Phi))
			}
			c.row(v...)
		}
	}
	return c.close()
}

// WriteMergedCIF writes the merged intensities of each position as a block with
// a loop of merged reflections. They stand under F_squared_meas, on an arbitrary
// scale, since that item alone may be negative in every dictionary.
func WriteMergedCIF(w io.Writer, series *analysis.Series, tables []analysis.MergedTable, set *CIFSettings) error {
	c, err := newCIF(w, series, set, "Merged intensities, one block a position, on the scale of the thinnest position of their crystal:\nF_squared_meas is on an arbitrary scale. Forbidden reflections are among the rows, and marked.")
	if err != nil {
		return err
	}
	for i := range tables {
		t := &tables[i]
		if len(t.Rows) == 0 {
			continue
		}
		c.block(t.Crystal + "-" + t.Position)
		c.position(t.Position, t.Crystal, t.ThicknessNM, t.ThicknessSU)
		c.loop("_refln.index_h", "_refln.index_k", "_refln.index_l", "_refln.F_squared_meas", "_refln.F_squared_meas_su", "_refln.d_spacing",
			"_refln.symmetry_epsilon", "_refln.symmetry_multiplicity", c.local("refln_observations"), c.local("refln_centric"), c.local("refln_forbidden"))
		for k := range t.Rows {
			r := &t.Rows[k]
			c.row(append(index(r.HKL), cif.Num(r.J), cif.Num(r.SU), cif.Num(r.D), cif.Int(r.Epsilon), cif.Int(r.Multiplicity), cif.Int(r.N),
				cif.Str(yesNo(r.Centric)), cif.Str(yesNo(r.Forbidden)))...)
		}
	}
	return c.close()
}

// PairNames are the data names of the pairs loop behind "_prefix_pair_", in the
// order of its columns.
func PairNames() []string {
	return []string{"index_h", "index_k", "index_l", "d_spacing", "n_thin", "intensity_thin", "intensity_thin_su", "angle_thin", "tilt_thin", "n_thick", "intensity_thick",
		"intensity_thick_su", "angle_thick", "tilt_thick", "difference", "difference_su", "difference_over_mean", "z", "strength", "strength_inverse_variance", "class", "flags"}
}

// WritePairsCIF writes pairs.csv as CIF, one block a contrast. Differences are
// signed, and no public item may hold them, so all names are local.
func WritePairsCIF(w io.Writer, series *analysis.Series, list []analysis.PairRow, set *CIFSettings) error {
	c, err := newCIF(w, series, set, "Pairs of intensities, one block a contrast: thin minus thick on the scale of the thinnest position.\nAngles in degrees, spacings in angstrom; a point stands where a number does not exist.")
	if err != nil {
		return err
	}
	names := make([]string, len(PairNames()))
	for i, n := range PairNames() {
		names[i] = c.local("pair_" + n)
	}
	for from := 0; from < len(list); {
		to := from
		for to < len(list) && list[to].Crystal == list[from].Crystal && list[to].Thin == list[from].Thin && list[to].Thick == list[from].Thick {
			to++
		}
		c.contrast(&list[from])
		c.loop(names...)
		for k := from; k < to; k++ {
			r := &list[k]
			c.row(append(index(r.HKL), cif.Num(r.D), cif.Int(r.NThin), exists(r.JThin), exists(r.SUThin), exists(r.PhiThin), exists(r.TiltThin), cif.Int(r.NThick), exists(r.JThick),
				exists(r.SUThick), exists(r.PhiThick), exists(r.TiltThick), exists(r.DI), exists(r.SUDI), exists(r.Eps), exists(r.Z), exists(r.Strength), exists(r.InverseVariance),
				blank(r.Class), blank(r.Flags))...)
		}
		from = to
	}
	return c.close()
}

// contrast begins the block of a contrast and describes its two positions.
func (c *cifWriter) contrast(r *analysis.PairRow) {
	c.block(r.Crystal + "-" + r.Thin + "-" + r.Thick)
	c.item(c.local("pair_strength_axis"), word(r.Axis))
	c.loop(c.local("set_id"), c.local("set_crystal"), c.local("set_position"), c.local("set_thickness_nm"), c.local("set_thickness_nm_su"), c.local("set_thickness_source"))
	thickCrystal, thick, across := strings.Cut(r.Thick, "/")
	if !across {
		thickCrystal, thick = r.Crystal, r.Thick
	}
	for _, p := range [][3]string{{"thin", r.Crystal, r.Thin}, {"thick", thickCrystal, thick}} {
		nm, su := math.NaN(), math.NaN()
		for i := range c.series.Crystals {
			for j := range c.series.Crystals[i].Positions {
				if q := &c.series.Crystals[i].Positions[j]; c.series.Crystals[i].Name == p[1] && q.Name == p[2] {
					nm, su = q.ThicknessNM, q.ThicknessSU
				}
			}
		}
		c.row(cif.Str(p[0]), word(p[1]), word(p[2]), cif.Num(nm), known(su), cif.Str("given by the user"))
	}
}

func index(h crystal.HKL) []cif.Value { return []cif.Value{cif.Int(h.H), cif.Int(h.K), cif.Int(h.L)} }

// known is an uncertainty, unknown when it is 0.
func known(su float64) cif.Value {
	if su > 0 {
		return cif.Num(su)
	}
	return cif.NotKnown()
}

func exists(f float64) cif.Value {
	if math.IsNaN(f) || math.IsInf(f, 0) {
		return cif.NotApplicable()
	}
	return cif.Num(f)
}

func blank(s string) cif.Value {
	if s == "" {
		return cif.NotApplicable()
	}
	return word(s)
}

// word is text in the characters that CIF 1.1 has, others as a question mark.
func word(s string) cif.Value {
	return cif.Str(strings.Map(func(r rune) rune {
		if r > '~' || r < ' ' {
			return '?'
		}
		return r
	}, s))
}

// blockCode makes a block code of any name.
func blockCode(name string) string {
	code := strings.Map(func(r rune) rune {
		if r <= unicode.MaxASCII && (unicode.IsLetter(r) || unicode.IsDigit(r) || strings.ContainsRune("-_.+", r)) {
			return r
		}
		return '_'
	}, name)
	if len(code) > 70 {
		code = code[:70]
	}
	return code
}
