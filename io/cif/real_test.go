package cif_test

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"thinward/io/cif"
)

// realFile finds the public example files, which are not part of the project, in
// THINWARD_REAL or in shared/real beside any folder above.
func realFile(t *testing.T, name string) string {
	t.Helper()
	if dir := os.Getenv("THINWARD_REAL"); dir != "" {
		return filepath.Join(dir, name)
	}
	dir, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	for {
		path := filepath.Join(dir, "shared", "real", name)
		if _, err := os.Stat(path); err == nil {
			return path
		}
		up := filepath.Dir(dir)
		if up == dir {
			t.Skip("the public example files are not here")
		}
		dir = up
	}
}

func TestRealMolecular(t *testing.T) {
	for _, tt := range []struct {
		file                 string
		rows                 int
		minI                 float64
		firstH, firstK, last int
		firstI, firstSigma   float64
	}{
		{file: "molecular-thin.cif", rows: 3570, firstH: -2, firstK: -11, last: -1, firstI: 2813, firstSigma: 1105.8},
		{file: "molecular-thick.cif", rows: 8013},
	} {
		t.Run(tt.file, func(t *testing.T) {
			f, err := cif.ReadFile(realFile(t, tt.file))
			if err != nil {
				t.Fatal(err)
			}
			r, err := f.Read(cif.Selection{})
			if err != nil {
				t.Fatal(err)
			}
			if r.Rows != tt.rows || r.Columns.Len() != tt.rows || len(r.SetAside) != 0 {
				t.Errorf("rows %d, used %d, aside %v; want %d of the README beside the file", r.Rows, r.Columns.Len(), r.SetAside, tt.rows)
			}
			if tt.firstI != 0 && (r.Columns.I[0] != tt.firstI || r.Columns.Sigma[0] != tt.firstSigma || int(r.Columns.H[0]) != tt.firstH || int(r.Columns.K[0]) != tt.firstK) {
				t.Errorf("first row %d %d %d %g %g", r.Columns.H[0], r.Columns.K[0], r.Columns.L[0], r.Columns.I[0], r.Columns.Sigma[0])
			}
			if r.Merged || r.Columns.Frame == nil || r.Columns.Phi != nil {
				t.Errorf("merged %v, frames %v, angles %v; want single measurements with frames and no angles", r.Merged, r.Columns.Frame != nil, r.Columns.Phi != nil)
			}
			if r.Cell == nil || r.Cell.Beta != 93.0492 || len(r.Operators) != 4 || r.HM != "P 1 21/n 1" || r.SymmetrySource() != "operators" {
				t.Errorf("facts %+v", r.Facts)
			}
			if r.Probe != "electron" || r.EnergyKeV < 199.5 || r.EnergyKeV > 200.5 {
				t.Errorf("probe %q, energy %g keV; 0.02508 A is 200 kV", r.Probe, r.EnergyKeV)
			}
			negative := 0
			for _, i := range r.Columns.I {
				if i < 0 {
					negative++
				}
			}
			if negative == 0 {
				t.Error("no negative intensities; the README says there are some")
			}
		})
	}
}

func TestRealTwoBlocks(t *testing.T) {
	f, err := cif.ReadFile(realFile(t, "macromolecular-two-blocks.cif"))
	if err != nil {
		t.Fatal(err)
	}
	lists := f.Lists()
	if len(lists) != 2 || !lists[0].Merged || lists[1].Merged || lists[0].Block != lists[1].Block {
		t.Fatalf("lists %+v", lists)
	}
	if len(f.Warnings) != 1 || f.Warnings[0].Code != "repeated-block" {
		t.Errorf("warnings %v, want one of a repeated block code", f.Warnings)
	}
	if len(lists[1].DiffrnIDs) != 2 || lists[1].DiffrnIDs[0].Rows+lists[1].DiffrnIDs[1].Rows != lists[1].Rows {
		t.Errorf("data sets %v of %d rows", lists[1].DiffrnIDs, lists[1].Rows)
	}
	if _, err := f.Read(cif.Selection{}); err == nil || !strings.Contains(err.Error(), "several reflection lists") || !strings.Contains(err.Error(), `"#1"`) {
		t.Errorf("without a pick: %v", err)
	}
	if _, err := f.Read(cif.Selection{Pick: "#2"}); err == nil || !strings.Contains(err.Error(), "2 data sets told apart by diffrn_id") {
		t.Errorf("two scans without a pick: %v", err)
	}
	total := 0
	for _, pick := range []string{"#2/1", "#2/diffrn=2"} {
		r, err := f.Read(cif.Selection{Pick: pick})
		if err != nil {
			t.Fatal(err)
		}
		total += r.Rows
		if r.Columns.Phi == nil || r.Columns.Frame == nil || r.HM != "P 1 21 1" || r.Number != 4 || r.Cell.B != 185.180 {
			t.Errorf("%s: %+v", pick, r.Facts)
		}
	}
	if total != lists[1].Rows {
		t.Errorf("the two scans have %d rows of %d", total, lists[1].Rows)
	}
	r, err := f.Read(cif.Selection{Pick: "#2", All: true})
	if err != nil || r.Rows != total {
		t.Errorf("all scans: %v", err)
	}
	r, err = f.Read(cif.Selection{Pick: "_refln"})
	if err != nil || !r.Merged || r.Columns.I[0] != 367.829 || r.Columns.Sigma[0] != 28.0323 {
		t.Errorf("merged list: %v", err)
	}
}
