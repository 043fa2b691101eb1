package cif

import (
	"strings"
	"testing"
)

// Every item of a reflection that the dictionaries list beside the indices, in the
// spellings of the old core, the current core and the macromolecular dictionary, with
// what is done with it when it stands alone with the indices. "-" is not used.
func TestItemsOfDictionaries(t *testing.T) {
	intensitySU, skip := "intensity with s.u.", "-"
	uses := map[role]string{roleSkip: skip, roleIntensity: "intensity", roleIntensitySU: intensitySU, roleSigma: "sigma", roleMate: "mate", roleMateSigma: "mate sigma",
		rolePhi: "angle", roleFrame: "frame", roleScaleGroup: "scale group", roleDataSet: "data set", roleStatus: "status", rolePartiality: "partiality"}
	for _, tt := range []struct{ category, spellings, items, use string }{
		{"_diffrn_refln", "_.", "id standard_code class_code attenuator_code wavelength wavelength_id scan_mode scan_width scan_rate elapsed_time", skip},
		{"_diffrn_refln", "_.", "diffrn_id crystal_id", "data set"},
		{"_diffrn_refln", "_.", "intensity_net counts_net", intensitySU},
		{"_diffrn_refln", "_.", "intensity_peak intensity_total intensity_bg_1 intensity_bg_2 counts_peak counts_total counts_bg_1 counts_bg_2", skip},
		{"_diffrn_refln", "_.", "intensity_peak_su intensity_total_su intensity_bg_1_su intensity_bg_2_su", skip},
		{"_diffrn_refln", "_.", "angle_chi angle_kappa angle_omega angle_phi angle_psi angle_theta", skip},
		{"_diffrn_refln", "_.", "sint/lambda sint_over_lambda sin_theta_over_lambda", skip},
		{"_diffrn_refln", "_.", "scale_group_code", "scale group"},
		{"_diffrn_refln", ".", "pdbx_image_id", "frame"},
		{"_diffrn_refln", ".", "pdbx_scan_angle pdbx_rotation_angle", "angle"},
		{"_diffrn_refln", ".", "pdbx_detector_x pdbx_detector_y pdbx_scale_value pdbx_detector_obs_fast pdbx_detector_obs_slow pdbx_detector_calc_fast pdbx_detector_calc_slow pdbx_panel_mapping_id pdbx_batch_id frame_id", skip},
		{"_pdbx_diffrn_unmerged_refln", ".", "reflection_id image_id_end scale_value", skip},
		{"_pdbx_diffrn_unmerged_refln", ".", "scan_id", "data set"},
		{"_pdbx_diffrn_unmerged_refln", ".", "image_id_begin", "frame"},
		{"_pdbx_diffrn_unmerged_refln", ".", "scan_angle_reflection", "angle"},
		{"_pdbx_diffrn_unmerged_refln", ".", "partiality", "partiality"},
		{"_pdbx_diffrn_unmerged_refln", ".", "intensity_meas intensity_profile intensity_sum", intensitySU},
		{"_refln", "_.", "id intensity_calc F_squared_calc F_calc refinement_status d_spacing sint/lambda sint_over_lambda sin_theta_over_lambda symmetry_multiplicity symmetry_epsilon mean_path_length_tbar wavelength_id", skip},
		{"_refln", "_.", "intensity_meas F_squared_meas F_meas", intensitySU},
		{"_refln", ".", "F_meas_au", intensitySU},
		{"_refln", ".", "pdbx_r_free_flag F_calc_au", skip},
		{"_refln", "_.", "include_status observed_status", "status"},
		{"_refln", ".", "status", "status"},
		{"_refln", "_.", "scale_group_code", "scale group"},
		{"_refln", "_.", "crystal_id", "data set"},
		{"_refln", ".", "pdbx_diffrn_id", "data set"},
	} {
		for _, mark := range tt.spellings {
			for _, item := range strings.Fields(tt.items) {
				dot := string(mark)
				name := tt.category + dot + item
				p := planFor([]string{tt.category + dot + "index_h", strings.ToUpper(tt.category + dot + "index_k"), name, tt.category + dot + "index_l"})
				if p == nil {
					t.Fatalf("%s: no list", name)
				}
				if p.roles[0] != roleH || p.roles[1] != roleK || p.roles[3] != roleL || uses[p.roles[2]] != tt.use {
					t.Errorf("%s: used as %q, want %q", name, uses[p.roles[2]], tt.use)
				}
			}
		}
	}
}

// Every pair of an intensity and its uncertainty that the dictionaries name.
func TestUncertaintiesOfDictionaries(t *testing.T) {
	for _, tt := range []struct{ category, spellings, intensity, sigmas string }{
		{"_diffrn_refln", "_.", "intensity_net", "intensity_u intensity_sigma intensity_net_su"},
		{"_diffrn_refln", "_.", "counts_net", "counts_net_su"},
		{"_pdbx_diffrn_unmerged_refln", ".", "intensity_meas", "intensity_sigma"},
		{"_pdbx_diffrn_unmerged_refln", ".", "intensity_profile", "intensity_profile_sigma"},
		{"_pdbx_diffrn_unmerged_refln", ".", "intensity_sum", "intensity_sum_sigma"},
		{"_refln", "_.", "intensity_meas", "intensity_sigma intensity_meas_su"},
		{"_refln", "_.", "F_squared_meas", "F_squared_sigma F_squared_meas_su"},
		{"_refln", "_.", "F_meas", "F_sigma F_meas_su F_meas_sigma"},
		{"_refln", ".", "F_meas_au", "F_meas_sigma_au"},
		{"_refln", ".", "pdbx_I_plus", "pdbx_I_plus_sigma"},
		{"_refln", ".", "pdbx_I_minus", "pdbx_I_minus_sigma"},
		{"_refln", ".", "pdbx_F_plus", "pdbx_F_plus_sigma"},
		{"_refln", ".", "pdbx_F_minus", "pdbx_F_minus_sigma"},
	} {
		for _, mark := range tt.spellings {
			for _, sigma := range strings.Fields(tt.sigmas) {
				at := tt.category + string(mark)
				p := planFor([]string{at + sigma, at + "index_l", at + "index_k", at + "index_h", at + tt.intensity})
				if p == nil || p.roles[0] != roleSigma || p.roles[4] != roleIntensity || p.item[roleIntensity] != at+tt.intensity {
					t.Errorf("%s with %s: %+v", at+tt.intensity, sigma, p)
				}
				if want := strings.Contains(tt.intensity, "F_") && tt.intensity != "F_squared_meas"; p != nil && p.amplitude != want {
					t.Errorf("%s: amplitude %v", tt.intensity, p.amplitude)
				}
			}
		}
	}
}

// The index of a row of the current core may be one CIF 2.0 list.
func TestIndexAsList(t *testing.T) {
	r := mustRead(t, "#\\#CIF_2.0\n"+loopOf("_diffrn_refln.hkl _diffrn_refln.intensity_net _diffrn_refln.intensity_net_su", "[1 -2 3] 10.5 2\n[ 4\n5 6 ] -7 .5\n? 1 1\n"), Selection{})
	if r.Columns.Len() != 2 || r.Columns.K[0] != -2 || r.Columns.L[1] != 6 || r.Columns.I[1] != -7 || len(r.SetAside) != 1 || r.SetAside[0].FirstLine != 10 {
		t.Errorf("%+v %v", r.Columns, r.SetAside)
	}
	both := mustRead(t, "#\\#CIF_2.0\n"+loopOf("_diffrn_refln.hkl _diffrn_refln.index_h _diffrn_refln.index_k _diffrn_refln.index_l _diffrn_refln.intensity_net _diffrn_refln.intensity_net_su", "[9 9 9] 1 2 3 10.5 2\n"), Selection{})
	if both.Columns.H[0] != 1 {
		t.Errorf("%+v", both.Columns)
	}
}

// Names that look like those of a list and are not.
func TestNamesThatAreNoList(t *testing.T) {
	for _, names := range []string{"_refln_index_h _refln_index_k", "_reflns_index_h _reflns_index_k _reflns_index_l", "_refln_index_h _diffrn_refln_index_k _refln_index_l",
		"_exptl_crystal_face_index_h _exptl_crystal_face_index_k _exptl_crystal_face_index_l", "_refln-index_h _refln-index_k _refln-index_l", "_refln _refln_ _refln."} {
		if p := planFor(strings.Fields(names)); p != nil {
			t.Errorf("%s: taken as a list", names)
		}
	}
}

// The facts by every name that the dictionaries list for them.
func TestFactsOfDictionaries(t *testing.T) {
	row := "1 2 3 10 1\n"
	cellOf := func(prefix string) string {
		return prefix + "length_a 24.1(2)\n" + prefix + "length_b 31.2\n" + prefix + "length_c 40.3\n" + prefix + "angle_alpha 90\n" + prefix + "angle_beta 91.5\n" + prefix + "angle_gamma 90\n"
	}
	for _, prefix := range []string{"_cell_", "_cell.", "_pdbx_diffrn_cell.", "_pdbx_diffrn_unmerged_cell.cell_", "_CELL_"} {
		if r := mustRead(t, listHead+row+cellOf(prefix), Selection{}); r.Cell == nil || r.Cell.A != 24.1 || r.Cell.Beta != 91.5 {
			t.Errorf("%s: cell %+v", prefix, r.Cell)
		}
	}
	for _, tt := range []struct {
		names, value string
		ok           func(*Reflections) bool
	}{
		{"_diffrn_radiation_wavelength _diffrn_radiation_wavelength.value _diffrn_radiation_wavelength.wavelength _diffrn_radiation.pdbx_wavelength _diffrn_source.pdbx_wavelength _pdbx_diffrn_unmerged_cell.wavelength _cell_measurement_wavelength",
			"0.0197", func(r *Reflections) bool { return r.WavelengthA == .0197 && r.Probe == "electron" }},
		{"_diffrn_source_voltage _diffrn_source.voltage", "300", func(r *Reflections) bool { return r.EnergyKeV == 300 }},
		{"_diffrn_radiation_probe _diffrn_radiation.probe _diffrn_radiation.pdbx_scattering_type _diffrn_radiation_type _diffrn_radiation.type", "electron", func(r *Reflections) bool { return r.Probe == "electron" }},
		{"_exptl.method", "'ELECTRON CRYSTALLOGRAPHY'", func(r *Reflections) bool { return r.Probe == "electron" }},
		{"_diffrn_ambient_temperature _diffrn_ambient_temp _diffrn.ambient_temperature _diffrn.ambient_temp _cell_measurement_temperature _cell_measurement_temp _cell_measurement.temp", "100(2)", func(r *Reflections) bool { return r.TemperatureK == 100 }},
		{"_space_group_IT_number _space_group.IT_number _symmetry_Int_Tables_number _symmetry.Int_Tables_number", "19", func(r *Reflections) bool { return r.Number == 19 }},
		{"_space_group_name_H-M_alt _space_group.name_H-M_alt _space_group.name_H-M_full _symmetry_space_group_name_H-M _symmetry.space_group_name_H-M _symmetry.pdbx_full_space_group_name_H-M", "'P 21 21 21'", func(r *Reflections) bool { return r.HM == "P 21 21 21" }},
		{"_space_group_name_Hall _space_group.name_Hall _symmetry_space_group_name_Hall _symmetry.space_group_name_Hall", "'P 2ac 2ab'", func(r *Reflections) bool { return r.Hall == "P 2ac 2ab" }},
		{"_space_group_symop_operation_xyz _space_group_symop.operation_xyz _symmetry_equiv_pos_as_xyz _symmetry_equiv.pos_as_xyz", "x,y,z", func(r *Reflections) bool { return len(r.Operators) == 1 }},
		{"_refine_ls_sample_thickness _refine_ls.sample_thickness", "35(2)", func(r *Reflections) bool {
			return len(r.Thickness) == 1 && r.Thickness[0].NM == 35 && r.Thickness[0].Unit == "nm"
		}},
		{"_exptl_crystal_size_min _exptl_crystal.size_min", "0.0001", func(r *Reflections) bool { return len(r.Thickness) == 1 && r.Thickness[0].Unit == "mm" }},
		{"_pdbx_exptl_crystal_process.microcrystal_min_dim", "0.1", func(r *Reflections) bool { return len(r.Thickness) == 1 && r.Thickness[0].Unit == "um" }},
	} {
		for _, name := range strings.Fields(tt.names) {
			if r := mustRead(t, listHead+row+name+" "+tt.value+"\n", Selection{}); !tt.ok(r) {
				t.Errorf("%s: %+v", name, r.Facts)
			}
		}
	}
}

// Factors by scale group are not applied, and that is said.
func TestScaleFactorsAreNotApplied(t *testing.T) {
	names := "_diffrn_refln_index_h _diffrn_refln_index_k _diffrn_refln_index_l _diffrn_refln_intensity_net _diffrn_refln_intensity_u _diffrn_refln_scale_group_code"
	r := mustRead(t, loopOf(names, "1 0 0 10 1 1\n1 0 0 20 2 2\n")+"loop_ _diffrn_scale_group_code _diffrn_scale_group_I_net 1 1.0 2 0.5\n", Selection{})
	if !warned(r, "scale-factors") || r.Columns.I[1] != 20 {
		t.Errorf("%v %v", r.Columns.I, r.Warnings)
	}
}
