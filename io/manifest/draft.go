package manifest

import (
	"bytes"
	"errors"
	"fmt"
	"path/filepath"
	"strconv"
	"strings"

	"thinward/io/cif"
	"thinward/io/delimited"
)

// Draft returns the text of a first manifest for the given reflection files: one
// crystal a file, since files do not say which of them are one crystal, with all
// that the files say and a question where they are silent. A file of several data
// sets gives one position each.
func Draft(paths []string) ([]byte, error) {
	d := &drafter{}
	for _, path := range paths {
		if err := d.file(path); err != nil {
			return nil, err
		}
	}
	d.order()
	return d.manifest(), nil
}

type drafter struct {
	energy    float64
	doubt     string // why a file may hold no electron data
	group     string
	cell      bool
	columns   bool
	sorted    bool // positions stand from thin to thick by what names or files say
	positions []draftPosition
}

type draftPosition struct {
	name, file, block string
	notes             []string
	thickness         float64 // as the file says, in unit; 0 when it does not
	unit              string
}

func (d *drafter) file(path string) error {
	isCIF, err := LooksLikeCIF(path)
	if err != nil {
		return &Error{File: path, Problem: "cannot be read: " + cause(err), Remedy: "check the path", Err: err}
	}
	base := stem(path)
	if !isCIF {
		d.text(path, base)
		return nil
	}
	f, err := cif.ReadFile(path)
	if err != nil {
		return err
	}
	lists := f.Lists()
	if len(lists) == 0 {
		return &Error{File: path, Problem: "holds no reflection list", Remedy: "give a file with a reflection loop; thinward peek shows what is in it"}
	}
	for _, l := range lists {
		for _, pick := range picks(lists, l) {
			d.list(f, path, base, pick, l)
		}
	}
	return nil
}

// picks lists the selections that take the data sets of one list apart; one
// empty selection when there is nothing to choose.
func picks(all []cif.List, l cif.List) []string {
	block := ""
	if len(all) > 1 {
		block = "#" + strconv.Itoa(l.Position)
	}
	var out []string
	for _, s := range l.DiffrnIDs {
		if len(l.DiffrnIDs) > 1 {
			out = append(out, strings.TrimPrefix(block+"/diffrn="+s.Code, "/"))
		}
	}
	if len(out) == 0 {
		for _, s := range l.ScaleSets {
			if len(l.ScaleSets) > 1 {
				out = append(out, strings.TrimPrefix(block+"/%"+s.Code, "/"))
			}
		}
	}
	if len(out) == 0 {
		out = []string{block}
	}
	return out
}

func (d *drafter) list(f *cif.File, path, base, pick string, l cif.List) {
	p := draftPosition{name: base, file: path, block: pick}
	if pick != "" {
		p.name += "-" + strings.NewReplacer("#", "", "/", "-", "=", "", "%", "set").Replace(pick)
	}
	r, err := f.Read(cif.Selection{Pick: pick})
	if err != nil {
		p.notes = append(p.notes, err.Error())
		d.positions = append(d.positions, p)
		return
	}
	p.notes = append(p.notes, fmt.Sprintf("%d rows, %d usable; %s", r.Rows, r.Columns.Len(), untold))
	for _, w := range r.Warnings {
		p.notes = append(p.notes, w.Text)
	}
	for _, t := range r.Thickness {
		p.thickness, p.unit = t.Value, t.Unit
		p.notes = append(p.notes, fmt.Sprintf("the file says %s = %g %s", t.Item, t.Value, t.Unit))
	}
	if r.Columns.Phi == nil {
		p.notes = append(p.notes, noAngles)
	}
	d.cell = d.cell || r.Cell != nil
	if text := notElectrons(r.Probe, r.WavelengthA, 0, true); text != "" {
		p.notes = append(p.notes, text)
		if d.doubt == "" {
			d.doubt = text
		}
	} else if d.energy == 0 {
		d.energy = r.EnergyKeV
	}
	if d.group == "" {
		if g, err := group(&r.Facts); err == nil && g != nil {
			if d.group = g.HM(); d.group == "" {
				d.group = "(operators in the file)"
			}
		}
	}
	d.positions = append(d.positions, p)
}

// text looks into column text: a header that names the columns needs no [columns].
func (d *drafter) text(path, base string) {
	p := draftPosition{name: base, file: path}
	r, err := delimited.ReadFile(path, nil)
	if err != nil {
		d.columns = true
		why := err.Error()
		var fault *delimited.Error
		if errors.As(err, &fault) {
			why = fault.Problem
		}
		p.notes = append(p.notes, "??? declare its columns in [columns]: "+why)
	} else {
		p.notes = append(p.notes, fmt.Sprintf("%d rows, %d usable; %s; columns %s", r.Rows, r.Columns.Len(), untold, strings.Join(r.Order, " ")))
		if r.Columns.Phi == nil {
			p.notes = append(p.notes, noAngles)
		}
	}
	d.positions = append(d.positions, p)
}

// untold stands beside a number of rows, which may be many times that of observations.
const untold = "copies and repeats are told apart by intake"

const noAngles = "no rotation angles: observations of two positions cannot be matched"

func stem(path string) string {
	base := strings.TrimSuffix(filepath.Base(path), ".gz")
	return strings.TrimSuffix(base, filepath.Ext(base))
}

func (d *drafter) manifest() []byte {
	var b bytes.Buffer
	b.WriteString("# A first manifest. Answer every line marked ???, then: thinward intake series.toml\n")
	b.WriteString("# Paths of files are relative to the folder of the manifest: save it where thinward draft was run.\n\n")
	b.WriteString("title = \"???\"\n")
	if d.energy > 0 {
		fmt.Fprintf(&b, "energy_keV = %.1f   # from the files\n", d.energy)
	} else {
		why := "the files do not say"
		if d.doubt != "" {
			why = "as far as electrons made these data: " + d.doubt
		}
		fmt.Fprintf(&b, "# energy_keV = 300.0   # ??? %s\n", why)
	}
	switch {
	case d.group == "":
		b.WriteString("space_group = \"???\"   # the files do not say\n")
	default:
		fmt.Fprintf(&b, "# space_group: the files say %s\n", d.group)
	}
	b.WriteString("seed = 1   # any number; the same one gives the same results\n# thickness_scale_su = 0.1   # relative uncertainty that all thicknesses share\n")
	if !d.cell {
		b.WriteString("\n[cell]   # ??? the files do not say\na = \"???\"   # angstrom\nb = \"???\"\nc = \"???\"\nalpha = 90.0\nbeta = 90.0\ngamma = 90.0\n")
	}
	if d.columns {
		b.WriteString("\n[columns]   # of column text without a header of these names\norder = [\"h\", \"k\", \"l\", \"intensity\", \"sigma\"]   # ??? in the order of the file, phi (degrees) and frame if there, skip for others\n")
	}
	b.WriteString("\n# ??? Put the positions of one crystal below one [[crystal]].\n")
	if !d.sorted && len(d.positions) > 1 {
		b.WriteString("# They stand in the order of the files: nothing says which is thinner.\n")
	}
	for i, p := range d.positions {
		fmt.Fprintf(&b, "\n[[crystal]]\nname = \"C%d\"\n\n[[crystal.position]]\n", i+1)
		fmt.Fprintf(&b, "name = %q\nthickness_nm = \"???\"   # nanometres, without quotes\n# thickness_su_nm = 15.0\n# order = 1             # of measurement\n# dose_e_per_A2 = 1.2\nfiles = [%q]\n", p.name, p.file)
		if p.block != "" {
			fmt.Fprintf(&b, "block = %q\n", p.block)
		}
		for _, n := range p.notes {
			fmt.Fprintf(&b, "# %s\n", strings.ReplaceAll(n, "\n", " "))
		}
	}
	return b.Bytes()
}
