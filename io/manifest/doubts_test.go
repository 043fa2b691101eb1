package manifest

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/analysis/electron"
)

// crystalOf makes a manifest of one crystal from names and thicknesses.
func crystalOf(name string, places ...any) Crystal {
	k := Crystal{Name: name}
	for i := 0; i < len(places); i += 2 {
		k.Position = append(k.Position, Position{Name: places[i].(string), ThicknessNM: places[i+1].(float64)})
	}
	return k
}

func TestThicknessDoubts(t *testing.T) {
	replicate := crystalOf("L1", "thin", 100.0, "again", 100.0, "thick", 300.0)
	replicate.Position[1].ReplicateOf = "thin"
	for _, c := range []struct {
		name    string
		crystal Crystal
		keV     float64
		codes   string
		text    string
	}{
		{"in order", crystalOf("L1", "thin", 140.0, "mid", 220.0, "thick", 310.0), 300, "", ""},
		{"in order, written from thick to thin", crystalOf("L1", "thick", 310.0, "thin", 140.0), 300, "", ""},
		{"names without a hint", crystalOf("L1", "p2", 140.0, "p1", 220.0), 300, "", ""},
		{"decimal point left out", crystalOf("L1", "thin", 1384.0, "thick", 138.4), 200, "thickness-names thickness-large",
			`thinnest first the positions are thick 138.4 nm, thin 1384 nm, but by their names "thin" is thinner than "thick": correct thickness_nm or the names`},
		{"middle above thick", crystalOf("L1", "L1-thin", 140.0, "L1_mid", 320.0, "L1 thick", 310.0), 300, "thickness-names", `"L1_mid" is thinner than "L1 thick"`},
		{"beyond the bound without an energy", crystalOf("L1", "p1", 1450.0, "p2", 1500.0), 0, "thickness-large", "p2 is given 1500 nm thick: beyond 1490 nm (4.6 inelastic mean free paths at 300 keV, as no energy is given)"},
		{"beyond the bound at 100 keV", crystalOf("L1", "p1", 800.0, "p2", 830.0), 100, "thickness-large", "beyond 817 nm"},
		{"more than ten times", crystalOf("L1", "p1", 14.0, "p2", 141.0), 300, "thickness-ratio", "p2 (141 nm) is given 10.1 times as thick as p1 (14 nm)"},
		{"ten times", crystalOf("L1", "p1", 14.0, "p2", 140.0), 300, "", ""},
		{"equal", crystalOf("L1", "p1", 140.0, "p2", 140.0, "p3", 200.0), 300, "thickness-equal", "p1 and p2 are given one thickness, 140 nm"},
		{"equal and called a replicate", replicate, 300, "", ""},
	} {
		f := &File{Crystal: []Crystal{c.crystal}}
		var codes, texts []string
		for _, w := range f.doubts(c.keV) {
			codes, texts = append(codes, w.Code), append(texts, w.Text)
			if w.Where != "L1" {
				t.Errorf("%s: where is %q", c.name, w.Where)
			}
		}
		if got := strings.Join(codes, " "); got != c.codes || !strings.Contains(strings.Join(texts, "\n"), c.text) {
			t.Errorf("%s: %s %q, want %s %q", c.name, got, texts, c.codes, c.text)
		}
	}
}

// TestMostNM: behind the bound one electron in a hundred keeps its energy, as the share
// without collisions says (Poisson's law), and a given path takes the place of estimates.
func TestMostNM(t *testing.T) {
	f := &File{MeanFreePath: &FreePath{ElasticNM: 400, InelasticNM: 100}}
	nm, _ := f.mostNM(300)
	s, err := electron.ShareOf(nm, electron.MeanFreePaths{ElasticNM: math.Inf(1), InelasticNM: 100})
	if err != nil {
		t.Fatal(err)
	}
	if d := cmp.Diff(fmt.Sprintf("%.6f %.2f", s.Unscattered, nm), "0.010000 460.52"); d != "" { // 100 ln 100
		t.Error(d)
	}
}

func TestThinnestFirst(t *testing.T) {
	k := crystalOf("L1", "thick", 310.0, "thin", 140.0, "mid", 220.5)
	if got := k.ThinnestFirst(); got != "thin 140 nm, mid 220.5 nm, thick 310 nm" {
		t.Error(got)
	}
	if k.Position[0].Name != "thick" {
		t.Error("the crystal was sorted in place")
	}
}

// TestDoubtsAreLoaded: slips of thickness and data that are not of electrons become
// warnings of the series.
func TestDoubtsAreLoaded(t *testing.T) {
	list := func(wavelength string) string {
		return "data_a\n_cell_length_a 10\n_cell_length_b 12\n_cell_length_c 15\n_cell_angle_alpha 90\n_cell_angle_beta 90\n_cell_angle_gamma 90\n" + wavelength +
			"loop_\n_diffrn_refln_index_h\n_diffrn_refln_index_k\n_diffrn_refln_index_l\n_diffrn_refln_intensity_net\n_diffrn_refln_intensity_u\n1 2 3 10.0 1.0\n2 1 1 5.0 1.0\n"
	}
	base := strings.NewReplacer("thin.txt", "thin.cif", "thick.txt", "thick.cif", "seed = 3", "seed = 3\nenergy_keV = 300.0").Replace(good)
	for _, c := range []struct{ name, text, wavelength, code, want string }{
		{"electrons", base, "_diffrn_radiation_wavelength 0.0197\n", "", ""},
		{"X-rays", base, "_diffrn_radiation_wavelength 0.979\n", "wavelength", "wavelength 0.979 Å is not that of electrons of 40 keV or more; are these X-ray data?"},
		{"X-rays by name", base, "_diffrn_radiation_probe x-ray\n_diffrn_radiation_wavelength 1.54\n", "wavelength", "the file gives its radiation as x-ray of wavelength 1.54 Å: these are not electron data"},
		{"another energy", base, "_diffrn_radiation_wavelength 0.0251\n", "energy-differs", "the file gives 199.7 keV, the series uses 300"},
		{"slow electrons", base, "_diffrn_radiation_wavelength 0.0702\n", "wavelength", "is not that of electrons of 40 keV or more"},
		{"a slip of thickness", strings.Replace(base, "100.0", "1000.0", 1), "", "thickness-names", "correct thickness_nm or the names"},
	} {
		s, err := ReadSeries(folder(t, c.text, map[string]string{"thin.cif": list(c.wavelength), "thick.cif": list("")}))
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		found := c.code == ""
		for _, w := range s.Warnings {
			switch {
			case w.Code == c.code && strings.Contains(w.Text, c.want):
				found = true
			case strings.HasPrefix(w.Code, "thickness-") || w.Code == "wavelength":
				if w.Code != c.code {
					t.Errorf("%s: also %s: %s", c.name, w.Code, w.Text)
				}
			}
		}
		if !found {
			t.Errorf("%s: no warning %s %q among %+v", c.name, c.code, c.want, s.Warnings)
		}
	}
}

// TestNotElectrons: the wavelengths at 40 and at 300 keV are closed forms of relativity
// (0.06016 and 0.019688 angstrom); both are passed, what is 3 % off is not.
func TestNotElectrons(t *testing.T) {
	for _, c := range []struct {
		wavelength, keV float64
		doubt           bool
	}{
		{0.06016, 40, false}, {0.019688, 300, false}, {0.019688 * 1.03, 300, true}, {0.019688 * 0.97, 300, true}, {0.019688 * 1.01, 300, false}, {0.0208, 0, false}, {0, 300, false}, {0.7107, 0, true},
	} {
		if got := notElectrons("", c.wavelength, c.keV, false); (got != "") != c.doubt {
			t.Errorf("%g angstrom at %g keV: %q", c.wavelength, c.keV, got)
		}
	}
}
