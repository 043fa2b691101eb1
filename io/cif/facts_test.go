package cif

import (
	"math"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/analysis/crystal"
)

const cellLines = "_cell_length_a 11.9104(4)\n_cell_length_b 12.5(2)\n_cell_length_c 13\n_cell_angle_alpha 90\n_cell_angle_beta 95.1(1)\n_cell_angle_gamma 90\n"

var cellRead = &crystal.Cell{A: 11.9104, B: 12.5, C: 13, Alpha: 90, Beta: 95.1, Gamma: 90}

func TestFacts(t *testing.T) {
	list := listHead + "1 2 3 10 1\n"
	for _, tt := range []struct {
		name, text string
		want       Facts
		source     string
		codes      []string
	}{
		{"nothing", list, Facts{}, "", nil},
		{"old core", list + cellLines + "_symmetry_space_group_name_H-M 'P 1 21/n 1'\n_symmetry_space_group_name_Hall '-P 2yn'\n_symmetry_Int_Tables_number 14\n_diffrn_ambient_temp 100(2)\n",
			Facts{Cell: cellRead, HM: "P 1 21/n 1", Hall: "-P 2yn", Number: 14, TemperatureK: 100}, "Hall symbol", nil},
		{"operators first", list + "_space_group_name_H-M_alt 'P -1'\nloop_ _symmetry_equiv_pos_site_id _symmetry_equiv_pos_as_xyz 1 x,y,z 2 ' -x, -y, -z '\n",
			Facts{HM: "P -1", Operators: []string{"x,y,z", "-x, -y, -z"}}, "operators", nil},
		{"number last", list + "_space_group.IT_number 19\n_space_group.name_H-M_alt ?\n", Facts{Number: 19}, "number", nil},
		{"symbol before number", list + "_symmetry.Int_Tables_number 14\n_symmetry.space_group_name_H-M 'P 1 21/c 1'\n", Facts{Number: 14, HM: "P 1 21/c 1"}, "Hermann-Mauguin symbol", nil},
		{"default angles", list + "_cell.length_a 5\n_cell.length_b 6\n_cell.length_c 7\n_cell.angle_alpha 90\n_cell.angle_beta 90\n",
			Facts{Cell: &crystal.Cell{A: 5, B: 6, C: 7, Alpha: 90, Beta: 90, Gamma: 90}}, "", []string{"cell-angle"}},
		{"cell in another block", list + "data_b\n" + cellLines, Facts{Cell: cellRead}, "", []string{"other-block"}},
		{"cells that differ", list + "data_b\n" + cellLines + "data_c\n_cell_length_a 5\n", Facts{}, "", []string{"other-blocks"}},
		{"own cell first", list + cellLines + "data_c\n_cell_length_a 5\n", Facts{Cell: cellRead}, "", nil},
		{"probe plural", list + "_diffrn_radiation_probe electrons\n", Facts{Probe: "electron"}, "", []string{"probe"}},
		{"probe capital", list + "_diffrn_radiation.probe Electron\n", Facts{Probe: "electron"}, "", nil},
		{"probe as nature", list + "_diffrn_radiation_type 'electrons 200 keV'\n", Facts{Probe: "electron"}, "", []string{"probe"}},
		{"probe as method", list + "_exptl.method 'ELECTRON CRYSTALLOGRAPHY'\n_diffrn_source.voltage 300\n", Facts{Probe: "electron", EnergyKeV: 300}, "", nil},
		{"x-rays", list + "_diffrn_radiation_probe x-ray\n_diffrn_radiation_wavelength 0.71073\n", Facts{Probe: "x-ray", WavelengthA: .71073}, "", nil},
		{"two wavelengths", list + "loop_ _diffrn_radiation_wavelength.id _diffrn_radiation_wavelength.value 1 0.70930 2 0.71359\n", Facts{}, "", []string{"several-values"}},
		{"weighted wavelengths", list + "loop_ _diffrn_radiation_wavelength_id _diffrn_radiation_wavelength _diffrn_radiation_wavelength_wt 1 0.70930 1.0 2 0.71359 0.5\n", Facts{WavelengthA: .7093}, "", nil},
		{"voltage in volt", list + "_diffrn_source_voltage 200000\n", Facts{}, "", []string{"voltage"}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			r := mustRead(t, tt.text, Selection{})
			if diff := cmp.Diff(tt.want, r.Facts); diff != "" {
				t.Error(diff)
			}
			if got := r.SymmetrySource(); got != tt.source {
				t.Errorf("symmetry from %q, want %q", got, tt.source)
			}
			var codes []string
			for _, w := range r.Warnings {
				codes = append(codes, w.Code)
			}
			if diff := cmp.Diff(tt.codes, codes); diff != "" {
				t.Error(diff)
			}
		})
	}
}

// Wavelengths of electrons at 120, 200 and 300 kV: 0.0335, 0.02508, 0.0197 angstrom
// (relativistic; textbook values to the digits given).
func TestElectronEnergy(t *testing.T) {
	for _, tt := range []struct{ wavelength, keV, tol float64 }{{0.033492, 120, .05}, {0.025079, 200, .05}, {0.019687, 300, .05}} {
		if got := electronEnergy(tt.wavelength); !(math.Abs(got-tt.keV) <= tt.tol) {
			t.Errorf("%g A: %g keV, want %g", tt.wavelength, got, tt.keV)
		}
	}
	r := mustRead(t, listHead+"1 2 3 10 1\n_diffrn_radiation_wavelength 0.02508\n", Selection{})
	if r.Probe != "electron" || !(math.Abs(r.EnergyKeV-200) < .1) || !warned(r, "probe") {
		t.Errorf("inferred %q %g keV", r.Probe, r.EnergyKeV)
	}
	r = mustRead(t, listHead+"1 2 3 10 1\n_diffrn_radiation_probe electron\n_diffrn_radiation_wavelength 0.02508\n_diffrn_source_voltage 300\n", Selection{})
	if r.EnergyKeV != 300 || !warned(r, "energy") {
		t.Errorf("contradiction: %g keV, %v", r.EnergyKeV, r.Warnings)
	}
}

func TestThicknessUnits(t *testing.T) {
	r := mustRead(t, listHead+"1 2 3 10 1\n_refine_ls.sample_thickness 35(2)\n_exptl_crystal_size_min 0.0001\n_pdbx_exptl_crystal_process.microcrystal_min_dim 0.25\n_exptl_crystal_size_max 3\n", Selection{})
	type row struct {
		item, unit string
		nm         float64
	}
	var got []row
	for _, x := range r.Thickness {
		got = append(got, row{x.Item, x.Unit, math.Round(x.NM*1e6) / 1e6})
	}
	want := []row{{"_refine_ls.sample_thickness", "nm", 35}, {"_pdbx_exptl_crystal_process.microcrystal_min_dim", "um", 250}, {"_exptl_crystal_size_min", "mm", 100}}
	if diff := cmp.Diff(want, got, cmp.AllowUnexported(row{})); diff != "" {
		t.Error(diff)
	}
	if r.Thickness[0].SU != 2 || !math.IsNaN(r.Thickness[2].SU) {
		t.Errorf("uncertainties %g %g", r.Thickness[0].SU, r.Thickness[2].SU)
	}
}

func TestGroup(t *testing.T) {
	list := listHead + "1 2 3 10 1\n"
	for _, tt := range []struct {
		text   string
		number int
		warn   bool
	}{
		{"_space_group_IT_number 19\n", 19, false},
		{"_space_group_name_H-M_alt 'P 1 21/n 1'\n_space_group_IT_number 14\n", 14, false},
		{"_space_group_name_Hall '-P 2yn'\n_space_group_name_H-M_alt 'P -1'\n", 14, false},
		{"loop_ _space_group_symop_operation_xyz x,y,z -x,-y,-z\n_space_group_IT_number 1\n", 2, true},
		{"_space_group_name_H-M_alt 'Q 7'\n", 0, true},
		{"", 0, false},
	} {
		r := mustRead(t, list+tt.text, Selection{})
		g, err := r.Group()
		switch {
		case tt.number != 0 && (err != nil || g.Number() != tt.number):
			t.Errorf("%q: %v, want %d", tt.text, err, tt.number)
		case tt.number == 0 && (g != nil || (err != nil) != tt.warn):
			t.Errorf("%q: got %v, %v", tt.text, g, err)
		}
		if warned(r, "symmetry") != tt.warn {
			t.Errorf("%q: warnings %v", tt.text, r.Warnings)
		}
	}
}
