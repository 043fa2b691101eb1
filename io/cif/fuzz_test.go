package cif

import (
	"bytes"
	"errors"
	"testing"
	"time"
)

func seeds(f *testing.F) {
	for _, e := range grammarExamples {
		f.Add([]byte(e.text))
	}
	for _, s := range []string{
		listHead + "1 2 3 10 1\n4 5 6 -7(2) ?\n",
		mmHead + "1 1 2 3 10 1 4\nb -1 -2 -3 1e3 .5 5 # x\n",
		"data_a\n_x_hkl_file\n;\n   1   0   0   10.00    1.00   1\n   0   0   0    0.00    0.00\n;\n",
		"data_a\n_iucr_refine_fcf_details\n;\n" + listHead + "1 0 0 10 1\n;\n" + cellLines,
		"data_a loop_ _refln_index_h _refln_index_k _refln_index_l _refln_intensity_meas _refln_intensity_sigma _refln_scale_group_code _refln_include_status 1 2 3 4 5 6%7 - 'a' 1 2 3 4 5 x",
		"#\\#CIF_2.0\ndata_a _l [1 {'a':\"b\"}\n;t\n; ] loop_ _diffrn_refln.hkl _diffrn_refln.intensity_net _diffrn_refln.intensity_net_su [1 -2 3] 10 1 ? 2 2 ",
		"data_a _refln.index_h 1 _refln.index_k 2 _refln.index_l 3 _refln.pdbx_I_plus 4 _refln.pdbx_I_plus_sigma 1 _refln.pdbx_I_minus ? _refln.pdbx_I_minus_sigma '1'",
		"\x1f\x8b\x08\x00\x00\x00\x00\x00\x00\x00",
	} {
		f.Add([]byte(s))
	}
}

// FuzzParse: no input may panic or hang; errors are typed and name the file; what is
// read can be written and reads the same again.
func FuzzParse(f *testing.F) {
	seeds(f)
	f.Fuzz(func(t *testing.T, data []byte) {
		start := time.Now()
		file, err := Parse("f.cif", data)
		if spent := time.Since(start); spent > 5*time.Second {
			t.Fatalf("took %v for %d bytes", spent, len(data))
		}
		if err != nil {
			var e *Error
			if !errors.As(err, &e) || e.File != "f.cif" || e.Problem == "" || e.Remedy == "" || e.Line < 0 {
				t.Fatalf("error %#v", err)
			}
			return
		}
		rewrite(t, file)
	})
}

// rewrite writes the items and loops of values of file and compares what is read
// back; what a Writer refuses is left out.
func rewrite(t *testing.T, file *File) {
	for _, b := range file.Blocks {
		var out bytes.Buffer
		w := NewWriter(&out)
		if w.Block(b.Code) != nil {
			continue
		}
		for _, it := range b.Items {
			w.Item(it.Name, it.Value)
		}
		for _, l := range b.Loops {
			if l.Reflections {
				continue
			}
			w.Loop(l.Names)
			for i := range l.Rows {
				row := make([]Value, len(l.Names))
				for j := range row {
					row[j] = l.At(i, j)
				}
				w.Row(row)
			}
		}
		if w.Close() != nil {
			continue
		}
		again, err := Parse("again.cif", out.Bytes())
		if err != nil {
			t.Fatalf("what was written cannot be read: %v\n%s", err, out.Bytes())
		}
		c := again.Blocks[0]
		for i, it := range b.Items {
			if got := c.Items[i]; got.Name != it.Name || !same(got.Value, it.Value) {
				t.Fatalf("item %s: wrote %q, read %q", it.Name, it.Value.Text, got.Value.Text)
			}
		}
		n := 0
		for _, l := range b.Loops {
			if l.Reflections {
				continue
			}
			for i := range l.Rows {
				for j := range l.Names {
					if got := c.Loops[n].At(i, j); !same(got, l.At(i, j)) {
						t.Fatalf("loop value %d %d: wrote %q, read %q", i, j, l.At(i, j).Text, got.Text)
					}
				}
			}
			n++
		}
	}
}

// FuzzReflections: whatever lists a file holds, reading them neither panics nor gives
// rows that an analysis cannot use; rows used and set aside add up.
func FuzzReflections(f *testing.F) {
	seeds(f)
	f.Fuzz(func(t *testing.T, data []byte) {
		file, err := Parse("f.cif", data)
		if err != nil {
			return
		}
		picks := []Selection{{}, {All: true}, {Pick: "#1", All: true}, {Pick: "%1"}}
		for _, l := range file.Lists() {
			picks = append(picks, Selection{Pick: l.Block + "/" + l.Category, All: true})
			for _, s := range l.DiffrnIDs {
				picks = append(picks, Selection{Pick: "diffrn=" + s.Code})
			}
		}
		for _, pick := range picks[:min(len(picks), 12)] {
			r, err := file.Read(pick)
			if err != nil {
				var e *Error
				if !errors.As(err, &e) || e.Remedy == "" {
					t.Fatalf("error %#v", err)
				}
				continue
			}
			total := r.Columns.Len()
			for _, a := range r.SetAside {
				total += a.Count
				if a.Count < 1 || a.FirstLine < 1 {
					t.Fatalf("set aside %+v", a)
				}
			}
			if total != r.Rows {
				t.Fatalf("%d rows, %d accounted for", r.Rows, total)
			}
			for i := range r.Columns.I {
				if !(r.Columns.Sigma[i] > 0) || r.Columns.I[i] != r.Columns.I[i] {
					t.Fatalf("row %d: %g %g", i, r.Columns.I[i], r.Columns.Sigma[i])
				}
			}
		}
	})
}
