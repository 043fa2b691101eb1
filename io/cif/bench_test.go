package cif_test

import (
	"bytes"
	"compress/gzip"
	"fmt"
	"math/rand/v2"
	"runtime"
	"testing"

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
	plain := manyRows(rows)
	for _, bench := range []struct {
		format string
		data   []byte
	}{{"cif", plain}, {"cif.gz", zipped(b, plain)}} {
		b.Run("format="+bench.format, func(b *testing.B) {
			b.ReportAllocs()
			b.SetBytes(int64(len(plain)))
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
