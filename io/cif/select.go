package cif

import (
	"fmt"
	"strconv"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// List describes one reflection list of a file. Ranges are over the rows that have
// a value and zero when there is none.
type List struct {
	Block     string
	Position  int    // of the block, from 1
	Line      int    // of the first row
	Category  string // "_diffrn_refln", "_pdbx_diffrn_unmerged_refln", "_refln" or the item of a list inside a text field
	Merged    bool
	Rows      int
	Columns   []string // data names as in the file; of a list inside a text field, h k l ...
	Intensity string   // the column used as intensity, "" when there is none
	Sigma     string   // the column used as its uncertainty; "(s.u.)" for s.u. in parentheses; "" for none
	Angle     string   // the column used as rotation angle
	Frame     string   // the column used as image number
	Layout    string   // of a list inside a text field: "fixed columns" or "blanks"
	Twin      bool     // holds rows of several twin components; cannot be read
	Fault     string   // of a list inside a text field: why it cannot be read

	MinHKL, MaxHKL             [3]int
	MinIntensity, MaxIntensity float64
	MinAngle, MaxAngle         float64
	MinFrame, MaxFrame         int
	DiffrnIDs                  []Set // empty when there is no such column
	ScaleSets                  []Set // the part behind % of codes such as 12%3, or codes that are no numbers
	Nulls                      int   // null values in the columns used
}

// Set is one data set inside a list with its number of rows.
type Set struct {
	Code string
	Rows int
}

// Selection says which data set of a file to read. The zero Selection is the only
// one; when a file holds more, Pick is needed.
//
// Pick is made of parts joined by "/", each narrowing the choice: a block code; "#2"
// for the second block; a category such as "_refln"; "diffrn=2" or just 2 for a
// diffrn_id; "%3" for the scale-group codes that end in %3. "native/2" is
// diffrn_id 2 of block native. A block code may itself hold slashes.
type Selection struct {
	Pick string
	// All takes every diffrn_id and scale-group set of the chosen list together,
	// which otherwise is an error: their frame numbers do not correspond.
	All bool
}

// Thickness is one item of a file that may speak of thickness. Its unit comes from
// the data name and is never guessed; what the item means for a measured position
// is for the user to say.
type Thickness struct {
	Item      string
	Value, SU float64 // in Unit; SU is NaN when not given
	Unit      string  // nm, um, mm
	NM        float64 // Value in nanometres
}

// Facts is what a file says about the crystal and the measurement of one list.
// Zero fields were not given. Warnings about them are in Reflections.
type Facts struct {
	Cell         *crystal.Cell // nil when the file has none
	Operators    []string      // as in the file
	Hall, HM     string
	Number       int
	WavelengthA  float64 // angstrom
	Probe        string  // "electron", "x-ray", "neutron", "gamma" or ""
	EnergyKeV    float64 // from the voltage, else for electrons from the wavelength
	TemperatureK float64
	Thickness    []Thickness
}

// SymmetrySource names what of the file fixes its symmetry, by precedence:
// "operators", "Hall symbol", "Hermann-Mauguin symbol", "number", or "" for none.
func (f *Facts) SymmetrySource() string {
	switch {
	case len(f.Operators) > 0:
		return "operators"
	case f.Hall != "":
		return "Hall symbol"
	case f.HM != "":
		return "Hermann-Mauguin symbol"
	case f.Number != 0:
		return "number"
	}
	return ""
}

// Group makes the space group of what SymmetrySource names. A number alone means its
// standard setting. It is nil when the file gives no symmetry, and an error when what
// it gives cannot be understood.
func (f *Facts) Group() (*crystal.Group, error) {
	var g *crystal.Group
	var err error
	source := f.SymmetrySource()
	switch source {
	case "":
		return nil, nil
	case "operators":
		g, err = crystal.ParseOperators(f.Operators)
	case "Hall symbol":
		g, err = crystal.FromHall(f.Hall)
	case "Hermann-Mauguin symbol":
		g, err = crystal.Lookup(f.HM)
	default:
		g, err = crystal.Lookup(strconv.Itoa(f.Number))
	}
	if err != nil {
		return nil, fmt.Errorf("the %s of the file: %w", source, err)
	}
	return g, nil
}

// Reflections is one data set as read: the usable rows, in file order, and all that
// was set aside.
type Reflections struct {
	Facts
	List     List
	Columns  *intensity.Columns
	Merged   bool
	Rows     int     // of the data set chosen, used or not
	SetAside []Aside // rows that were not used, by reason
	Warnings []intensity.Warning
}
