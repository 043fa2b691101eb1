package manifest

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"thinward/analysis/intensity"
)

// good is a manifest over column text that loads; tests spoil one thing each.
const good = `title = "Two places"
space_group = "P 21 21 21"
seed = 3
[cell]
a = 10.0
b = 12.0
c = 15.0
[columns]
order = ["h", "k", "l", "intensity", "sigma", "phi", "frame"]
[[crystal]]
name = "L1"
[[crystal.position]]
name = "thin"
thickness_nm = 100.0
files = ["thin.txt"]
[[crystal.position]]
name = "thick"
thickness_nm = 200.0
files = ["thick.txt"]
`

// rows is a small list of 6 x 6 x 6 indices at made-up angles.
func rows(scale float64) string {
	var b strings.Builder
	for h := range 6 {
		for k := range 6 {
			for l := range 6 {
				if h+k+l == 0 {
					continue
				}
				i := scale * float64(1+(h*7+k*5+l*3)%11)
				fmt.Fprintf(&b, "%d %d %d %.2f %.2f %.2f %d\n", h, k, l, i, 1.0, float64(h*10+k), h*20+k*2)
			}
		}
	}
	return b.String()
}

func folder(t *testing.T, text string, files map[string]string) string {
	t.Helper()
	dir := t.TempDir()
	all := map[string]string{"series.toml": text, "thin.txt": rows(10), "thick.txt": rows(20)}
	for name, content := range files {
		all[name] = content
	}
	for name, content := range all {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(content), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	return filepath.Join(dir, "series.toml")
}

func TestReadSeries(t *testing.T) {
	text := strings.Replace(good, `files = ["thick.txt"]`, "files = [\"thick.txt\"]\nreindex = \"-h,-k,l\"\norder = 2\ntilt_zero_deg = 1.5\nexclude = { frames = [4], shells_A = [[3.9, 3.8]], ice = true }\nrows = \"repeats\"", 1)
	s, err := ReadSeries(folder(t, text, nil))
	if err != nil {
		t.Fatal(err)
	}
	if s.Title != "Two places" || s.Seed != 3 || s.Group.Number() != 19 || s.Cell.B != 12 || s.Cell.Gamma != 90 {
		t.Errorf("series: %+v", s)
	}
	thin, thick := &s.Crystals[0].Positions[0], &s.Crystals[0].Positions[1]
	if thin.Rows.Len() != 215 || thin.Rows.Phi == nil || thin.Rows.Frame == nil || len(thin.Sources) != 1 || len(thin.Sources[0].SHA256) != 64 {
		t.Errorf("thin position: %d rows, sources %+v", thin.Rows.Len(), thin.Sources)
	}
	if thick.Rows.H[214] != -5 || thick.Rows.L[214] != 5 {
		t.Errorf("re-indexed row: %d %d %d", thick.Rows.H[214], thick.Rows.K[214], thick.Rows.L[214])
	}
	if thick.Order != 2 || !thick.HasTiltZero || thick.TiltZeroDeg != 1.5 || thick.Policy != intensity.RowsRepeats || !thick.Exclude.Ice || thick.Exclude.Frames[0] != 4 || thick.Exclude.ShellsA[0][1] != 3.8 {
		t.Errorf("thick position: %+v", thick)
	}
}

func TestSeveralFilesKeepFramesApart(t *testing.T) {
	text := strings.Replace(good, `files = ["thick.txt"]`, `files = ["thick.txt", "more.txt"]`, 1)
	s, err := ReadSeries(folder(t, text, map[string]string{"more.txt": rows(20)}))
	if err != nil {
		t.Fatal(err)
	}
	p := s.Crystals[0].Positions[1]
	if p.Rows.Len() != 430 {
		t.Fatalf("%d rows", p.Rows.Len())
	}
	top := int32(0)
	for _, f := range p.Rows.Frame[:215] {
		top = max(top, f)
	}
	for _, f := range p.Rows.Frame[215:] {
		if f <= top+1 {
			t.Fatalf("frame %d of the second file lies beside those of the first, which end at %d", f, top)
		}
	}
}

// TestFaults: each fault names file, line, key and remedy.
func TestFaults(t *testing.T) {
	replace := func(old, new string) string {
		if !strings.Contains(good, old) {
			t.Fatalf("the good manifest does not hold %q", old)
		}
		return strings.Replace(good, old, new, 1)
	}
	for _, c := range []struct {
		name, text string
		line       int
		want       []string
	}{
		{"not TOML", "title = \n", 1, []string{"series.toml:1"}},
		{"number with its unit", replace("thickness_nm = 200.0", `thickness_nm = "200 nm"`), 18, []string{"a number is wanted", "without its unit"}},
		{"decimal comma", replace("thickness_nm = 200.0", "thickness_nm = 200,5"), 18, []string{"decimal points"}},
		{"not text", "\x1f\x8b\x08\n", 1, []string{"thinward draft"}},
		{"one file in two positions", replace(`["thick.txt"]`, `["./thin.txt"]`), 19, []string{"stands in L1/thin and in L1/thick"}},
		{"energy in volts", replace("seed = 3", "seed = 3\nenergy_keV = 300000.0"), 4, []string{"300000 keV is no energy", "kilo-electronvolts"}},
		{"wrong type", replace("seed = 3", `seed = "three"`), 3, []string{"series.toml:3", "seed"}},
		{"unknown key", replace("seed = 3", "sead = 3"), 3, []string{"sead: unknown key", "did you mean seed?"}},
		{"unknown key of a position", replace("thickness_nm = 100.0", "thicknes_nm = 100.0"), 14, []string{"unknown key", "did you mean thickness_nm?"}},
		{"unknown table", good + "[frames]\n", 20, []string{"frames", "unknown key"}},
		{"no crystal", "title = \"x\"\n", 0, []string{"no crystal", "add a [[crystal]]"}},
		{"crystal without a name", replace(`name = "L1"`, ""), 10, []string{"crystal 1 has no name"}},
		{"slash in a name", replace(`name = "L1"`, `name = "L/1"`), 11, []string{"holds a slash"}},
		{"two crystals of one name", good + "[[crystal]]\nname = \"L1\"\n", 21, []string{`crystal "L1" stands twice`}},
		{"crystal without positions", good + "[[crystal]]\nname = \"L2\"\n", 20, []string{"crystal L2 has no position"}},
		{"position without a name", replace(`name = "thick"`, ""), 16, []string{"position 2 of crystal L1 has no name"}},
		{"two positions of one name", replace(`name = "thick"`, `name = "thin"`), 17, []string{"L1/thin stands twice"}},
		{"thickness left out", replace("thickness_nm = 200.0\n", ""), 16, []string{"L1/thick has thickness 0 nm", "positive thickness"}},
		{"equal thicknesses", replace("200.0", "100.0"), 18, []string{"no contrast: all positions of crystal L1 are given one thickness, 100 nm", `write replicate_of = "thin"`}},
		{"each position a crystal", replace("[[crystal.position]]\nname = \"thick\"", "[[crystal]]\nname = \"L2\"\n[[crystal.position]]\nname = \"thick\""), 10, []string{"no contrast", "put the positions of one crystal under one [[crystal]]", "[[between]]"}},
		{"only replicates", replace("thickness_nm = 200.0", "thickness_nm = 200.0\nreplicate_of = \"thin\""), 10, []string{"no contrast"}},
		{"thickness negative", replace("200.0", "-5.0"), 18, []string{"thickness -5 nm"}},
		{"thickness not a number", replace("200.0", "nan"), 18, []string{"thickness NaN nm"}},
		{"uncertainty negative", replace("thickness_nm = 200.0", "thickness_nm = 200.0\nthickness_su_nm = -1.0"), 19, []string{"thickness_su_nm", "is no uncertainty"}},
		{"dose negative", replace("thickness_nm = 200.0", "thickness_nm = 200.0\ndose_e_per_A2 = -1.0"), 19, []string{"is no dose"}},
		{"order negative", replace("thickness_nm = 200.0", "thickness_nm = 200.0\norder = -1"), 19, []string{"count measurements from 1"}},
		{"no files", replace(`files = ["thick.txt"]`, "files = []"), 19, []string{"L1/thick names no file"}},
		{"empty path", replace(`["thick.txt"]`, `[""]`), 19, []string{"names an empty path"}},
		{"path leaves the folder", replace(`["thick.txt"]`, `["../thick.txt"]`), 19, []string{"leaves the folder of the manifest", "absolute path"}},
		{"missing file", replace(`["thick.txt"]`, `["gone.txt"]`), 19, []string{"gone.txt cannot be read", "relative to the manifest"}},
		{"rows not known", replace("thickness_nm = 200.0", "thickness_nm = 200.0\nrows = \"twice\""), 19, []string{`"twice" is not known`, "slices"}},
		{"replicate of nothing", replace("thickness_nm = 200.0", "thickness_nm = 200.0\nreplicate_of = \"mid\""), 19, []string{`"mid" is not another position`}},
		{"shell not positive", replace("thickness_nm = 200.0", "thickness_nm = 200.0\nexclude = { shells_A = [[0.0, 3.0]] }"), 19, []string{"is no shell"}},
		{"reindex not a change", replace("thickness_nm = 200.0", "thickness_nm = 200.0\nreindex = \"h,h,l\""), 19, []string{"reindex", "determinant"}},
		{"reindex with a constant", replace("thickness_nm = 200.0", "thickness_nm = 200.0\nreindex = \"h+1/2,k,l\""), 19, []string{"holds a constant"}},
		{"group not known", replace("P 21 21 21", "P 99"), 2, []string{"space_group", "P 99"}},
		{"group and operators", replace("seed = 3", "seed = 3\noperators = [\"x,y,z\"]"), 4, []string{"both given"}},
		{"operators not closed", strings.Replace(replace(`space_group = "P 21 21 21"`, `operators = ["x,y,z", "-x,y+1/2,-z", "x,-y,z"]`), "", "", 0), 2, []string{"operators", "list every operator"}},
		{"no symmetry", replace("space_group = \"P 21 21 21\"\n", ""), 0, []string{"neither the manifest nor a file gives the symmetry"}},
		{"no cell", replace("[cell]\na = 10.0\nb = 12.0\nc = 15.0\n", ""), 0, []string{"neither the manifest nor a file gives the unit cell"}},
		{"cell impossible", replace("a = 10.0", "a = -10.0"), 5, []string{"cell.a"}},
		{"energy negative", replace("seed = 3", "seed = 3\nenergy_keV = -1.0"), 4, []string{"is no energy"}},
		{"common uncertainty negative", replace("seed = 3", "seed = 3\nthickness_scale_su = -0.1"), 4, []string{"is no uncertainty"}},
		{"free path missing", replace("[columns]", "[mean_free_path]\nelastic_nm = 300.0\n[columns]"), 9, []string{"mean_free_path.elastic_nm", "give both"}},
		{"delimiter not known", replace("[columns]", "[columns]\ndelimiter = \"pipe\""), 9, []string{`"pipe" is not known`}},
		{"between without a slash", good + "[[between]]\nthin = \"L1\"\nthick = \"L1/thick\"\n", 21, []string{"is not CRYSTAL/POSITION"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := ReadSeries(folder(t, c.text, nil))
			if err == nil {
				t.Fatal("no error")
			}
			var e *Error
			if !errors.As(err, &e) {
				t.Fatalf("not an *Error: %v", err)
			}
			if e.Line != c.line {
				t.Errorf("line %d, want %d: %v", e.Line, c.line, err)
			}
			for _, w := range c.want {
				if !strings.Contains(err.Error(), w) {
					t.Errorf("%v\ndoes not say %q", err, w)
				}
			}
		})
	}
}

// TestStudyFaults: what only shows when the series is put together.
func TestStudyFaults(t *testing.T) {
	for _, c := range []struct{ name, text, want string }{
		{"primary not there", strings.Replace(good, "[cell]", "[primary]\nthin = \"mid\"\n[cell]", 1), `no such position`},
		{"primary upside down", strings.Replace(good, "[cell]", "[primary]\nthin = \"thick\"\nthick = \"thin\"\n[cell]", 1), "must be thinner"},
		{"between of one crystal", good + "[[between]]\nthin = \"L1/thin\"\nthick = \"L1/thick\"\n", "is one crystal"},
		{"between of nothing", good + "[[between]]\nthin = \"L1/thin\"\nthick = \"L9/thick\"\n", "no crystal"},
	} {
		if _, err := Load(folder(t, c.text, nil)); err == nil || !strings.Contains(err.Error(), c.want) || !strings.Contains(err.Error(), "series.toml") {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
	}
}

func TestDifferentCells(t *testing.T) {
	one := "data_a\n_cell_length_a 10\n_cell_length_b 12\n_cell_length_c 15\n_cell_angle_alpha 90\n_cell_angle_beta 90\n_cell_angle_gamma 90\n" +
		"loop_\n_diffrn_refln_index_h\n_diffrn_refln_index_k\n_diffrn_refln_index_l\n_diffrn_refln_intensity_net\n_diffrn_refln_intensity_u\n1 2 3 10.0 1.0\n2 1 1 5.0 1.0\n"
	other := strings.Replace(one, "_cell_length_a 10", "_cell_length_a 10.5", 1)
	text := strings.NewReplacer("thin.txt", "thin.cif", "thick.txt", "thick.cif", "[cell]\na = 10.0\nb = 12.0\nc = 15.0\n", "").Replace(good)
	path := folder(t, text, map[string]string{"thin.cif": one, "thick.cif": other})
	_, err := ReadSeries(path)
	if err == nil || !strings.Contains(err.Error(), "thick.cif: its cell differs from that of the series by 4.9 % in a, more than 2 %") || !strings.Contains(err.Error(), "cell_tolerance") {
		t.Fatalf("cells that differ: %v", err)
	}
	if err := os.WriteFile(path, []byte(strings.Replace(text, "seed = 3", "seed = 3\ncell_tolerance = 0.06", 1)), 0o644); err != nil {
		t.Fatal(err)
	}
	if _, err := ReadSeries(path); err != nil {
		t.Errorf("cells within the tolerance: %v", err)
	}
}

func FuzzParse(f *testing.F) {
	f.Add([]byte(good))
	f.Add([]byte("[[crystal]]\nname=\"a\"\n[[crystal.position]]\nname=\"b\"\nthickness_nm=1\nfiles=[\"x\"]\n"))
	f.Add([]byte("title = 1\n"))
	f.Add([]byte("[crystal]\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		file, err := Parse("fuzz.toml", data)
		if err != nil {
			var e *Error
			if !errors.As(err, &e) || e.Problem == "" {
				t.Fatalf("an error that is no *Error: %v", err)
			}
			return
		}
		if len(file.Crystal) == 0 {
			t.Fatal("a manifest without a crystal was accepted")
		}
	})
}
