package cif_test

import (
	"bytes"
	"compress/gzip"
	"fmt"
	"io"
	"math/rand/v2"
	"runtime"
	"testing"

	inflate "github.com/klauspost/compress/gzip"

	"thinward/io/cif"
)

// manyRows is an invented list of single measurements of n rows, about 33 bytes each.
func manyRows(n int) []byte {
	r := rand.New(rand.NewPCG(1, 2))
	var b bytes.Buffer
	b.WriteString("data_tarn\n_cell_length_a 24.1\n_cell_length_b 31.2\n_cell_length_c 40.3\n_cell_angle_alpha 90\n_cell_angle_beta 90\n_cell_angle_gamma 90\n" +
		"loop_\n_diffrn_refln_index_h\n_diffrn_refln_index_k\n_diffrn_refln_index_l\n_diffrn_refln_intensity_net\n_diffrn_refln_intensity_u\n_diffrn_refln.pdbx_scan_angle\n")
	for range n {
		fmt.Fprintf(&b, "%d %d %d %.2f %.2f %.3f\n", r.IntN(20)+1, r.IntN(51)-25, r.IntN(61)-30, r.NormFloat64()*800+500, r.Float64()*40+2, r.Float64()*120-60)
	}
	return b.Bytes()
}

// macromolecularRows is the same with the columns of a macromolecular file, of which
// three are not used, about 55 bytes a row.
func macromolecularRows(n int) []byte {
	r := rand.New(rand.NewPCG(3, 4))
	var b bytes.Buffer
	b.WriteString("data_tarn\nloop_\n")
	for _, item := range []string{"diffrn_id", "id", "index_h", "index_k", "index_l", "intensity_net", "intensity_sigma", "pdbx_scan_angle", "pdbx_image_id", "pdbx_detector_x", "pdbx_detector_y"} {
		b.WriteString("_diffrn_refln." + item + "\n")
	}
	for i := range n {
		fmt.Fprintf(&b, "1 %d %d %d %d %.2f %.2f %.3f %d %.1f %.1f\n", i+1, r.IntN(20)+1, r.IntN(51)-25, r.IntN(61)-30, r.NormFloat64()*800+500, r.Float64()*40+2,
			r.Float64()*120-60, i/900+1, r.Float64()*2000, r.Float64()*2000)
	}
	return b.Bytes()
}

// BenchmarkInflate is the limit that no reader of gzip can pass.
func BenchmarkInflate(b *testing.B) {
	plain := manyRows(950000)
	data := zipped(b, plain)
	buffer := make([]byte, 1<<17)
	b.SetBytes(int64(len(plain)))
	for b.Loop() {
		z, err := inflate.NewReader(bytes.NewReader(data))
		if err != nil {
			b.Fatal(err)
		}
		for err == nil {
			_, err = z.Read(buffer)
		}
		if err != io.EOF {
			b.Fatal(err)
		}
	}
}

func zipped(tb testing.TB, data []byte) []byte {
	var b bytes.Buffer
	z := gzip.NewWriter(&b)
	if _, err := z.Write(data); err != nil {
		tb.Fatal(err)
	}
	if err := z.Close(); err != nil {
		tb.Fatal(err)
	}
	return b.Bytes()
}

func BenchmarkRead(b *testing.B) {
	const rows = 950000
	plain, wide := manyRows(rows), macromolecularRows(rows)
	for _, bench := range []struct {
		format string
		data   []byte
		bytes  int
	}{{"cif", plain, len(plain)}, {"cif.gz", zipped(b, plain), len(plain)}, {"mmcif", wide, len(wide)}} {
		b.Run("format="+bench.format, func(b *testing.B) {
			b.ReportAllocs()
			b.SetBytes(int64(bench.bytes))
			for b.Loop() {
				f, err := cif.Parse("bench.cif", bench.data)
				if err != nil {
					b.Fatal(err)
				}
				r, err := f.Read(cif.Selection{})
				if err != nil || r.Columns.Len() != rows {
					b.Fatal(err)
				}
			}
		})
	}
}

// BenchmarkHeld measures what a list costs in memory once its text is dropped.
func BenchmarkHeld(b *testing.B) {
	const rows = 500000
	data := manyRows(rows)
	var before, after runtime.MemStats
	for b.Loop() {
		runtime.GC()
		runtime.ReadMemStats(&before)
		f, err := cif.Parse("bench.cif", data)
		if err != nil {
			b.Fatal(err)
		}
		r, err := f.Read(cif.Selection{})
		if err != nil {
			b.Fatal(err)
		}
		f = nil
		runtime.GC()
		runtime.ReadMemStats(&after)
		b.ReportMetric(float64(int64(after.HeapAlloc)-int64(before.HeapAlloc))/rows, "B/obs")
		runtime.KeepAlive(r)
	}
}
