package manifest

import (
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"thinward/analysis"
	"thinward/analysis/simulate"
)

// small invents two crystals of two positions in a folder, spoil having changed the
// plan, and returns the manifest with old replaced by new, in pairs.
func small(t *testing.T, spoil func(*simulate.Plan), replace ...string) string {
	t.Helper()
	p := simulate.Sound(5)
	p.DMin = 1.9
	p.Crystals = p.Crystals[:2]
	for i := range p.Crystals {
		p.Crystals[i].Positions = p.Crystals[i].Positions[:2]
	}
	spoil(p)
	dir := t.TempDir()
	if err := Invent(context.Background(), p, dir); err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(dir, "series.toml")
	rewrite(t, path, replace...)
	return path
}

func rewrite(t *testing.T, path string, replace ...string) {
	t.Helper()
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	text := string(data)
	for k := 0; k < len(replace); k += 2 {
		if !strings.Contains(text, replace[k]) {
			t.Fatalf("the manifest does not hold %q:\n%s", replace[k], text)
		}
		text = strings.Replace(text, replace[k], replace[k+1], 1)
	}
	if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
}

func details(t *testing.T, path string) (*analysis.Study, *analysis.IntakeDetails) {
	t.Helper()
	s, err := LoadWith(path, &analysis.Settings{Replicates: 50, Flips: 50})
	if err != nil {
		t.Fatal(err)
	}
	d, err := s.IntakeDetails(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	return s, d
}

func said(d *analysis.IntakeDetails, code, where string) string {
	for _, w := range d.Warnings {
		if w.Code == code && strings.Contains(w.Where, where) {
			return w.Text
		}
	}
	return ""
}

var (
	hexagonal  = simulate.Cell{A: 14, B: 14, C: 11, Alpha: 90, Beta: 90, Gamma: 120}
	tetragonal = simulate.Cell{A: 14, B: 14, C: 11, Alpha: 90, Beta: 90, Gamma: 90}
)

// A position that is indexed another way than the rest, in files on disk: it is found and
// mended, by the manifest too, whichever member of a coset it was mixed up by
// (International Tables A: for P 3 four cosets of -3 in the lattice rotations, for P 4
// two), and the mended position pairs with the others by index and angle.
func TestMixedIndexingOfFiles(t *testing.T) {
	for _, c := range []struct {
		group, mixed string
		cell         simulate.Cell
		options      int
		more         bool
	}{
		{"P 3", "-h,-k,l", hexagonal, 4, false},
		{"P 3", "-k,-h,-l", hexagonal, 4, true},
		{"P 3", "k,-h-k,l", hexagonal, 4, false}, // an equivalent, of order three
		{"P 4", "k,h,-l", tetragonal, 2, true},
		{"P 4", "h,-k,-l", tetragonal, 2, false},
		{"P 4", "-k,h,l", tetragonal, 2, true}, // an equivalent, of order four
	} {
		t.Run(c.group+" "+c.mixed, func(t *testing.T) {
			if c.more && os.Getenv("THINWARD_FULL") != "1" {
				t.Skip("sampled: THINWARD_FULL=1 runs it")
			}
			path := small(t, func(p *simulate.Plan) {
				p.SpaceGroup, p.Cell = c.group, c.cell
				p.Crystals[1].Positions[1].Reindex = c.mixed
			})
			s, d := details(t, path)
			proposal := ""
			for _, x := range d.Indexing {
				if len(x.Options) != c.options || x.Ambiguous || !(x.Z > 4) {
					t.Errorf("%s: %d options, z %.1f, ambiguous %v", x.Where, len(x.Options), x.Z, x.Ambiguous)
				}
				if x.Proposal != "" {
					if x.Where != "L2/mid" {
						t.Errorf("%s: re-indexed by %s", x.Where, x.Proposal)
					}
					proposal = x.Proposal
				}
			}
			for _, x := range d.Turns {
				if x.Verdict != "fine" {
					t.Errorf("%+v", x)
				}
			}
			if proposal == "" && said(d, "angles-aligned", "L2/mid") == "" {
				t.Fatal("nothing was found")
			}
			contrast, err := s.Find("L2", "", "")
			if err != nil {
				t.Fatal(err)
			}
			x, err := s.Compare(context.Background(), contrast)
			if err != nil {
				t.Fatal(err)
			}
			if !x.Pairs.Matched || !(x.Result.Correlation.R > 0.95) {
				t.Errorf("after mending: matched %v, correlation %.3f", x.Pairs.Matched, x.Result.Correlation.R)
			}
			if proposal == "" {
				return
			}
			// What is proposed, written into the manifest, leaves nothing to propose.
			rewrite(t, path, "files = ['L2-mid.cif.gz']", "files = ['L2-mid.cif.gz']\nreindex = '"+proposal+"'")
			_, d = details(t, path)
			for _, x := range d.Indexing {
				if x.Proposal != "" || x.Ambiguous {
					t.Errorf("after the proposal: %+v", x)
				}
			}
		})
	}
}

// Intensities of P 4 2 2 that are called P 4 cannot tell the two ways to index: within a
// crystal the angles do, of the other crystal it is said, and nothing is changed.
func TestAmbiguousIndexingOfFiles(t *testing.T) {
	path := small(t, func(p *simulate.Plan) { p.SpaceGroup, p.Cell = "P 4 2 2", tetragonal }, "space_group = 'P 4 2 2'", "space_group = 'P 4'")
	_, d := details(t, path)
	if len(d.Indexing) != 3 {
		t.Fatalf("%d positions were asked", len(d.Indexing))
	}
	for _, x := range d.Indexing {
		other := x.Where == "L2/thin"
		if x.Ambiguous != other || x.Proposal != "" || (said(d, "indexing-ambiguous", x.Where) != "") != other {
			t.Errorf("%+v", x)
		}
	}
}

// Intensities of P 3 2 1 that are called P 3 leave two of four ways alike, and the other two
// wrong: a list that came in a wrong one is brought to a right one, within a crystal to the
// one of its other positions, and the rest is said to be ambiguous.
func TestHalfAmbiguousIndexingIsMended(t *testing.T) {
	path := small(t, func(p *simulate.Plan) {
		p.SpaceGroup, p.Cell = "P 3 2 1", hexagonal
		p.Crystals[1].Positions[1].Reindex = "-h,-k,l"
	}, "space_group = 'P 3 2 1'", "space_group = 'P 3'")
	s, d := details(t, path)
	for _, x := range d.Indexing {
		if mixed := x.Where == "L2/mid"; x.Ambiguous != (x.Where == "L2/thin") || mixed != (x.Proposal == "-h,-k,l" || x.Proposal == "-k,-h,-l") || mixed != (said(d, "reindexed", x.Where) != "") {
			t.Errorf("%+v", x)
		}
	}
	contrast, err := s.Find("L2", "", "")
	if err != nil {
		t.Fatal(err)
	}
	x, err := s.Compare(context.Background(), contrast)
	if err != nil {
		t.Fatal(err)
	}
	if !(x.Result.Correlation.R > 0.95) {
		t.Errorf("after mending the positions correlate by %.3f", x.Result.Correlation.R)
	}
}

// A lattice that is named with the wrong centring, either way: half of the reflections of a C or I lattice are absent exactly (Hahn 2005,
// International Tables A, table 2.2.13.1).
func TestWrongCentring(t *testing.T) {
	cell := simulate.Cell{A: 11, B: 14.6, C: 18.2, Alpha: 90, Beta: 90, Gamma: 90}
	for _, c := range []struct {
		truth, stated string
		recorded      bool // centring absences stand in the lists
		find, verdict string
		text          string
	}{
		{"C 2 2 21", "P 2 2 21", true, "C", "caution", "write the group of the centred lattice"},
		{"I 2 2 2", "P 2 2 2", true, "I", "caution", "write the group of the centred lattice"},
		{"F 2 2 2", "P 2 2 2", true, "F", "caution", "write the group of the centred lattice"},
		{"C 2 2 21", "P 2 2 21", false, "C", "caution", "hardly any of the reflections"},
		{"P 2 2 21", "C 2 2 21", true, "C", "fails", "what it forbids is there"},
		{"P 2 2 2", "I 2 2 2", true, "I", "fails", "what it forbids is there"},
		{"C 2 2 21", "I 2 2 2", true, "I", "fails", "what it forbids is there"},
		{"C 2 2 21", "C 2 2 21", true, "", "", ""},
		{"C 2 2 21", "C 2 2 21", false, "", "", ""},
		{"P 2 2 21", "P 2 2 21", true, "", "", ""},
	} {
		name := fmt.Sprintf("%s called %s, absences recorded %v", c.truth, c.stated, c.recorded)
		path := small(t, func(p *simulate.Plan) {
			p.SpaceGroup, p.Cell, p.Common.WithCentring = c.truth, cell, c.recorded
			for i := range p.Crystals {
				for j := range p.Crystals[i].Positions {
					p.Crystals[i].Positions[j].WithCentring = c.recorded
				}
			}
		}, "space_group = '"+c.truth+"'", "space_group = '"+c.stated+"'")
		_, d := details(t, path)
		found := ""
		for _, x := range d.Centring {
			if x.Verdict != "caution" && x.Verdict != "fails" {
				continue
			}
			if found != "" && x.Verdict == c.verdict {
				t.Errorf("%s: %s and %s", name, found, x.Centring)
			}
			if x.Verdict == c.verdict {
				found = x.Centring
				if !strings.Contains(x.Why, c.text) || said(d, "centring", "lattice "+x.Centring) != x.Why {
					t.Errorf("%s: %+v", name, x)
				}
			} else if c.verdict == "" {
				t.Errorf("%s: a false alarm: %+v", name, x)
			}
		}
		if found != c.find {
			t.Errorf("%s: found %q, want %q: %+v", name, found, c.find, d.Centring)
		}
	}
}

// Sigmas that are half or twice the true errors are named before anything is scaled, and
// right ones are not; chi squared is the square of the factor.
func TestWrongSigmasOfFiles(t *testing.T) {
	for _, c := range []struct {
		factor float64
		code   string
	}{{0.5, "sigma-small"}, {1, ""}, {2, "sigma-large"}} {
		_, d := details(t, small(t, func(p *simulate.Plan) {
			for i := range p.Crystals {
				for j := range p.Crystals[i].Positions {
					p.Crystals[i].Positions[j].SigmaFactor = c.factor
				}
			}
		}))
		for _, r := range d.Positions {
			x := r.Sigmas.Chi2 * c.factor * c.factor
			if !(math.Abs(x-1) < 0.5) || r.Sigmas.AnyAngle || !(r.Sigmas.Pairs >= 30) {
				t.Errorf("sigmas times %g: %s/%s: %+v", c.factor, r.Crystal, r.Position, r.Sigmas)
			}
			for _, code := range []string{"sigma-small", "sigma-large"} {
				if (said(d, code, r.Crystal+"/"+r.Position) != "") != (code == c.code) {
					t.Errorf("sigmas times %g: %s/%s: %s is wrong: %+v", c.factor, r.Crystal, r.Position, code, r.Sigmas)
				}
			}
		}
	}
}

// cifOf writes a small list with a cell.
func cifOf(cell, group string) string {
	var b strings.Builder
	b.WriteString("data_x\n")
	for k, name := range []string{"length_a", "length_b", "length_c", "angle_alpha", "angle_beta", "angle_gamma"} {
		fmt.Fprintf(&b, "_cell_%s %s\n", name, strings.Fields(cell)[k])
	}
	fmt.Fprintf(&b, "_space_group_name_H-M_alt '%s'\n", group)
	b.WriteString("loop_\n_diffrn_refln_index_h\n_diffrn_refln_index_k\n_diffrn_refln_index_l\n_diffrn_refln_intensity_net\n_diffrn_refln_intensity_u\n")
	for h := range 4 {
		for k := range 4 {
			for l := range 4 {
				if h+k+l > 0 {
					fmt.Fprintf(&b, "%d %d %d %d 1.0\n", h, k, l, 10+h+3*k+7*l)
				}
			}
		}
	}
	return b.String()
}

// A list on axes of another order is refused with the change that mends it, and with
// that change its indices, its cell and its space group go together with the rest: P n m a
// is P b n m on the axes c, a, b (International Tables A, table 1.5.4.4).
func TestAxesOfAnotherOrder(t *testing.T) {
	text := strings.NewReplacer("thin.txt", "thin.cif", "thick.txt", "thick.cif", "[cell]\na = 10.0\nb = 12.0\nc = 15.0\n", "", "space_group = \"P 21 21 21\"\n", "",
		"[columns]\norder = [\"h\", \"k\", \"l\", \"intensity\", \"sigma\", \"phi\", \"frame\"]\n", "").Replace(good)
	files := map[string]string{"thin.cif": cifOf("10 12 15 90 90 90", "P n m a"), "thick.cif": cifOf("15.1 10 12 90 90 90", "P b n m")}
	path := folder(t, text, files)
	_, err := ReadSeries(path)
	if err == nil || !strings.Contains(err.Error(), `thick.cif: its cell differs`) || !strings.Contains(err.Error(), `reindex = "k,l,h"`) || !strings.Contains(err.Error(), "series.toml:12") {
		t.Fatalf("%v", err)
	}
	rewrite(t, path, `files = ["thick.cif"]`, "files = [\"thick.cif\"]\nreindex = \"k,l,h\"")
	s, err := ReadSeries(path)
	if err != nil {
		t.Fatal(err)
	}
	thick := &s.Crystals[0].Positions[1]
	if c := thick.Cell; c.A != 10 || c.B != 12 || c.C != 15.1 || thick.Sources[0].Cell != c {
		t.Errorf("cell %v", c)
	}
	if r := thick.Rows; r.H[5] != 1 || r.K[5] != 2 || r.L[5] != 0 || r.I[5] != 10+3+14 { // was 0 1 2
		t.Errorf("row %d %d %d %g", r.H[5], r.K[5], r.L[5], r.I[5])
	}
	if s.Group.HM() != "P n m a" || len(s.Warnings) > 0 {
		t.Errorf("%s, %+v", s.Group.HM(), s.Warnings)
	}
	// Were the first file the one that is changed, its group would be the series'.
	swapped := folder(t, strings.Replace(text, `files = ["thin.cif"]`, "files = [\"thin.cif\"]\nreindex = \"k,l,h\"", 1),
		map[string]string{"thin.cif": files["thick.cif"], "thick.cif": files["thin.cif"]})
	if s, err = ReadSeries(swapped); err != nil || s.Group.HM() != "P n m a" || s.Cell.C != 15.1 {
		t.Errorf("%v, %+v", err, s)
	}
	// The agreement stands in the table: 0.1 of 15.05 A.
	study, err := analysis.New(*s, nil)
	if err != nil {
		t.Fatal(err)
	}
	d, err := study.IntakeDetails(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	if c := d.Positions[1].Cell; !c.Given || c.Length != "c" || !cmp.Equal(c.LengthPercent, 100*0.1/15.05, cmpopts.EquateApprox(0, 1e-9)) {
		t.Errorf("%+v", c)
	}
}

// Angles in another unit, sense or zero are brought to degrees by the manifest.
func TestAnglesOfTheManifest(t *testing.T) {
	s, err := ReadSeries(folder(t, strings.Replace(good, `files = ["thick.txt"]`, "files = [\"thick.txt\"]\nangle_factor = -2.0\nangle_shift_deg = 5.5", 1), nil))
	if err != nil {
		t.Fatal(err)
	}
	thin, thick := s.Crystals[0].Positions[0].Rows.Phi, s.Crystals[0].Positions[1].Rows.Phi
	for r := range thin {
		if thick[r] != 5.5-2*thin[r] {
			t.Fatalf("row %d: %g became %g", r, thin[r], thick[r])
		}
	}
	for _, c := range []struct{ key, want string }{
		{"angle_factor = nan", "is no factor"}, {"angle_shift_deg = inf", "is no angle"},
	} {
		_, err := ReadSeries(folder(t, strings.Replace(good, `files = ["thick.txt"]`, "files = [\"thick.txt\"]\n"+c.key, 1), nil))
		if err == nil || !strings.Contains(err.Error(), c.want) || !strings.Contains(err.Error(), "series.toml:20") {
			t.Errorf("%s: %v", c.key, err)
		}
	}
	bare := strings.NewReplacer(`"sigma", "phi", "frame"]`, `"sigma", "skip", "skip"]`, `files = ["thick.txt"]`, "files = [\"thick.txt\"]\nangle_factor = 2.0").Replace(good)
	if _, err := ReadSeries(folder(t, bare, nil)); err == nil || !strings.Contains(err.Error(), "have no rotation angles") {
		t.Errorf("no angles: %v", err)
	}
}

// What exclude sets aside is counted by reason, and nothing else goes. The cell is
// 10 12 15, so that d of h00 is 10/h: counts by hand over the list of 6 x 6 x 6 indices.
func TestExcludeIsCounted(t *testing.T) {
	text := strings.Replace(good, `files = ["thick.txt"]`, "files = [\"thick.txt\"]\nexclude = { frames = [4, 20], shells_A = [[4.9, 5.1]], ice = true }", 1)
	s, d := details(t, folder(t, text, nil))
	want := map[string]int{}
	for h := range 6 {
		for k := range 6 {
			for l := range 6 {
				if h+k+l == 0 {
					continue
				}
				space := 1 / math.Sqrt(float64(h*h)/100+float64(k*k)/144+float64(l*l)/225)
				ring := false
				for _, at := range []float64{3.90, 3.67, 3.44, 2.67, 2.25, 2.07, 1.95, 1.92} {
					ring = ring || math.Abs(space-at) < 0.02
				}
				switch frame := h*20 + k*2; {
				case frame == 4 || frame == 20:
					want["frame"]++
				case space >= 4.9 && space <= 5.1:
					want["shell"]++
				case ring:
					want["ice"]++
				default:
					want["kept"]++
				}
			}
		}
	}
	if want["frame"] != 12 || want["shell"] == 0 || want["ice"] == 0 {
		t.Fatalf("the example excludes nothing: %v", want)
	}
	got := map[string]int{}
	for _, m := range d.Remarks {
		if m.Kind != "excluded" {
			continue
		}
		if m.Crystal+"/"+m.Position != "L1/thick" {
			t.Errorf("%+v", m)
		}
		for _, reason := range []string{"frame", "shell", "ice"} {
			if strings.Contains(m.Why, reason) {
				got[reason] = m.Count
			}
		}
	}
	r := d.Positions[1]
	got["kept"] = r.Observations
	for reason, n := range want {
		if got[reason] != n {
			t.Errorf("%s: %d, want %d", reason, got[reason], n)
		}
	}
	if r.Rows != 215 || r.Excluded != want["frame"]+want["shell"]+want["ice"] || d.Positions[0].Observations != 215 || s.Series.Crystals[0].Positions[1].Rows.Len() != 215 {
		t.Errorf("%+v", r)
	}
}
