package manifest

import (
	"bytes"
	"compress/gzip"
	"context"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"

	"github.com/pelletier/go-toml/v2"

	"thinward/analysis/simulate"
	"thinward/io/cif"
)

// ReadPlan reads the plan of an invented series.
func ReadPlan(path string) (*simulate.Plan, error) {
	data, err := os.ReadFile(path)
	if err != nil {
		return nil, &Error{File: path, Problem: "cannot be read: " + cause(err), Remedy: "check the path", Err: err}
	}
	p := new(simulate.Plan)
	d := toml.NewDecoder(bytes.NewReader(data))
	d.DisallowUnknownFields()
	if err := d.Decode(p); err != nil {
		e := decodeError(path, data, err)
		if m, ok := e.(*Error); ok {
			m.Remedy = "see the plan that invent writes beside a series"
		}
		return nil, e
	}
	if err := p.Check(); err != nil {
		return nil, &Error{File: path, Problem: err.Error(), Remedy: "correct the plan", Err: err}
	}
	return p, nil
}

// Invent makes the series of a plan and writes it into dir: series.toml, one
// gzipped CIF a position, the plan, and truth.json. The same plan gives the same
// bytes. Files of these names are replaced.
func Invent(ctx context.Context, plan *simulate.Plan, dir string) error {
	series, err := simulate.Invent(ctx, plan)
	if err != nil {
		return err
	}
	return WriteInvented(series, plan, dir)
}

// WriteInvented writes what Invent writes of a series that was made in memory. plan is
// what plan.toml holds; a Law is not written, so that such a file makes the series
// without it.
func WriteInvented(series *simulate.Series, plan *simulate.Plan, dir string) error {
	if err := os.MkdirAll(dir, 0o777); err != nil {
		return err
	}
	for i := range series.Specimens {
		for j := range series.Specimens[i].Positions {
			if err := writePosition(dir, series, i, j); err != nil {
				return err
			}
		}
	}
	text, err := toml.Marshal(plan)
	if err != nil {
		return fmt.Errorf("plan: %w", err)
	}
	if plan.Law != nil {
		text = append([]byte("# The intensities came from a law that a plan cannot hold. From this file alone invent makes\n# the kinematic twin: the same structure, orientations and noise.\n"), text...)
	}
	if err := writeFile(filepath.Join(dir, "plan.toml"), text); err != nil {
		return err
	}
	if text, err = toml.Marshal(inventedManifest(series)); err != nil {
		return fmt.Errorf("manifest: %w", err)
	}
	if err := writeFile(filepath.Join(dir, "series.toml"), append([]byte("# An invented series: its truth stands in truth.json, what made it in plan.toml.\n"), text...)); err != nil {
		return err
	}
	if text, err = json.MarshalIndent(truthOf(series), "", "  "); err != nil {
		return fmt.Errorf("truth: %w", err)
	}
	return writeFile(filepath.Join(dir, "truth.json"), append(text, '\n'))
}

// writeFile writes beside and renames, so that no half-written file stays.
func writeFile(path string, data []byte) error {
	tmp, err := os.CreateTemp(filepath.Dir(path), ".thinward-*")
	if err != nil {
		return err
	}
	defer os.Remove(tmp.Name())
	if _, err := tmp.Write(data); err != nil {
		tmp.Close()
		return err
	}
	if err := tmp.Chmod(0o644); err != nil {
		tmp.Close()
		return err
	}
	if err := tmp.Close(); err != nil {
		return err
	}
	return os.Rename(tmp.Name(), path)
}

func fileOf(crystal, position string) string { return crystal + "-" + position + ".cif.gz" }

// declared is the space group that the series is said to have.
func declared(s *simulate.Series) string {
	if s.Plan.Declared != "" {
		return s.Plan.Declared
	}
	return s.Plan.SpaceGroup
}

func inventedManifest(s *simulate.Series) *File {
	f := &File{Title: s.Plan.Title, EnergyKeV: s.Plan.EnergyKeV, SpaceGroup: declared(s), Seed: s.Plan.Seed, ThicknessScaleSU: s.Plan.ThicknessScaleSU}
	for i := range s.Specimens {
		c := Crystal{Name: s.Specimens[i].Name}
		for j := range s.Specimens[i].Positions {
			p := &s.Specimens[i].Positions[j].Plan
			tilt := p.TiltZeroDeg
			c.Position = append(c.Position, Position{
				Name: p.Name, ThicknessNM: p.ThicknessNM, ThicknessSUNM: p.ThicknessSUNM, Order: p.Order, Dose: round(p.Dose, 6),
				TiltZeroDeg: &tilt, ReplicateOf: p.ReplicateOf, Files: []string{fileOf(c.Name, p.Name)},
			})
		}
		f.Crystal = append(f.Crystal, c)
	}
	return f
}

func writePosition(dir string, s *simulate.Series, i, j int) error {
	m := &s.Specimens[i].Positions[j]
	var out bytes.Buffer
	z, err := gzip.NewWriterLevel(&out, gzip.BestCompression)
	if err != nil {
		return err
	}
	w := cif.NewWriter(z)
	if err := w.Block(s.Specimens[i].Name + "-" + m.Plan.Name); err != nil {
		return err
	}
	if err := w.Comment("An invented list: no crystal was measured."); err != nil {
		return err
	}
	for _, item := range []struct {
		name  string
		value cif.Value
	}{
		{"_cell_length_a", cif.Num(s.Plan.Cell.A)}, {"_cell_length_b", cif.Num(s.Plan.Cell.B)}, {"_cell_length_c", cif.Num(s.Plan.Cell.C)},
		{"_cell_angle_alpha", cif.Num(s.Plan.Cell.Alpha)}, {"_cell_angle_beta", cif.Num(s.Plan.Cell.Beta)}, {"_cell_angle_gamma", cif.Num(s.Plan.Cell.Gamma)},
		{"_space_group_name_H-M_alt", cif.Str(declared(s))},
		{"_diffrn_radiation_probe", cif.Str("electron")},
		{"_diffrn_radiation_wavelength", cif.Num(round(s.Wavelength, 7))},
	} {
		if err := w.Item(item.name, item.value); err != nil {
			return err
		}
	}
	names := []string{"_diffrn_refln.index_h", "_diffrn_refln.index_k", "_diffrn_refln.index_l", "_diffrn_refln.intensity_net",
		"_diffrn_refln.intensity_net_su", "_diffrn_refln.pdbx_scan_angle", "_diffrn_refln.pdbx_image_id"}
	if err := w.Loop(names); err != nil {
		return err
	}
	c := m.Rows
	for r := range c.I {
		if err := w.Row([]cif.Value{
			cif.Int(int(c.H[r])), cif.Int(int(c.K[r])), cif.Int(int(c.L[r])), cif.Num(round(c.I[r], 2)), cif.Num(math.Max(round(c.Sigma[r], 2), 0.01)),
			cif.Num(round(c.Phi[r], 2)), cif.Int(int(c.Frame[r])),
		}); err != nil {
			return err
		}
	}
	if err := w.Close(); err != nil {
		return err
	}
	if err := z.Close(); err != nil {
		return err
	}
	return writeFile(filepath.Join(dir, fileOf(s.Specimens[i].Name, m.Plan.Name)), out.Bytes())
}

func round(x float64, digits int) float64 {
	p := math.Pow(10, float64(digits))
	return math.Round(x*p) / p
}

// Truth is what truth.json of an invented series holds. Contrasts is empty when the
// intensities come from a law of their own.
type Truth struct {
	Title     string          `json:"title"`
	Note      string          `json:"note,omitempty"`
	Unique    int             `json:"unique"`
	Contrasts []TruthContrast `json:"contrasts"`
	Positions []TruthPosition `json:"positions"`
}

// TruthContrast is the true exchange between two positions of one crystal.
type TruthContrast struct {
	Crystal string  `json:"crystal"`
	Thin    string  `json:"thin"`
	Thick   string  `json:"thick"`
	M       float64 `json:"m"`
}

// TruthPosition is what one position was made with, M as its mean over the rows where
// the path grows with tilt. M, Q, O and Deviation are null when
// the intensities come from a law of their own, in which they have no meaning: not
// 0, which would say that thickness does nothing.
type TruthPosition struct {
	Crystal     string   `json:"crystal"`
	Position    string   `json:"position"`
	ThicknessNM float64  `json:"thickness_nm"`
	M           *float64 `json:"m"`
	Q           *float64 `json:"q"`
	O           *float64 `json:"o"`
	Deviation   *float64 `json:"deviation"`
	B           float64  `json:"b"`
	Rows        int      `json:"rows"`
}

func truthOf(s *simulate.Series) *Truth {
	t := &Truth{Title: s.Plan.Title, Unique: len(s.Truth.HKL)}
	if s.Plan.Law != nil {
		t.Note = "The intensities come from a law of their own; m, q, o and deviation have no part in them and are null, and no contrast has an m by construction."
	}
	for i := range s.Specimens {
		list := s.Specimens[i].Positions
		for j := range list {
			p := &list[j].Plan
			made := TruthPosition{Crystal: s.Specimens[i].Name, Position: p.Name, ThicknessNM: p.ThicknessNM, B: list[j].B, Rows: list[j].Rows.Len()}
			if s.Plan.Law == nil {
				m := list[j].ExchangeMean()
				made.M, made.Q, made.O, made.Deviation = &m, &p.Curb, &p.Offset, &p.Deviation
			}
			t.Positions = append(t.Positions, made)
			for k := range list {
				if list[k].Plan.ThicknessNM > p.ThicknessNM {
					if m := s.ExchangeBetween(i, j, k); !math.IsNaN(m) {
						t.Contrasts = append(t.Contrasts, TruthContrast{Crystal: s.Specimens[i].Name, Thin: p.Name, Thick: list[k].Plan.Name, M: m})
					}
				}
			}
		}
	}
	return t
}
