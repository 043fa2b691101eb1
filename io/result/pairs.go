package result

import (
	"bufio"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strconv"

	"thinward/analysis"
)

// PairColumns are the columns of pairs.csv in order.
func PairColumns() []string {
	return []string{
		"crystal", "thin", "thick", "h", "k", "l", "d_A", "phi_thin_deg", "phi_thick_deg", "tilt_thin_deg", "tilt_thick_deg", "n_thin", "n_thick",
		"J_thin", "su_J_thin", "J_thick", "su_J_thick", "strength", "strength_axis", "strength_inverse_variance",
		"dI", "su_dI", "eps", "z", "class", "flags",
	}
}

// WritePairs writes one row a pair. A number that does not exist is an empty
// field.
func WritePairs(w io.Writer, rows []analysis.PairRow) error {
	buffered := bufio.NewWriter(w)
	c := csv.NewWriter(buffered)
	if err := c.Write(PairColumns()); err != nil {
		return err
	}
	for i := range rows {
		r := &rows[i]
		if err := c.Write([]string{
			r.Crystal, r.Thin, r.Thick,
			strconv.Itoa(r.HKL.H), strconv.Itoa(r.HKL.K), strconv.Itoa(r.HKL.L),
			text(r.D), text(r.PhiThin), text(r.PhiThick), text(r.TiltThin), text(r.TiltThick), strconv.Itoa(r.NThin), strconv.Itoa(r.NThick),
			text(r.JThin), text(r.SUThin), text(r.JThick), text(r.SUThick),
			text(r.Strength), r.Axis, text(r.InverseVariance),
			text(r.DI), text(r.SUDI), text(r.Eps), text(r.Z), r.Class, r.Flags,
		}); err != nil {
			return err
		}
	}
	c.Flush()
	if err := c.Error(); err != nil {
		return err
	}
	return buffered.Flush()
}

func text(f float64) string {
	if math.IsNaN(f) {
		return ""
	}
	return strconv.FormatFloat(f, 'g', -1, 64)
}

// ReadPairs reads what WritePairs wrote.
func ReadPairs(r io.Reader) ([]analysis.PairRow, error) {
	c := csv.NewReader(bufio.NewReader(r))
	c.FieldsPerRecord = len(PairColumns())
	head, err := c.Read()
	if err != nil {
		return nil, fmt.Errorf("pairs: no header: %w", err)
	}
	for i, name := range PairColumns() {
		if head[i] != name {
			return nil, fmt.Errorf("pairs: column %d is %q, not %q", i+1, head[i], name)
		}
	}
	var rows []analysis.PairRow
	for {
		f, err := c.Read()
		if err == io.EOF {
			return rows, nil
		}
		if err != nil {
			return nil, fmt.Errorf("pairs: %w", err)
		}
		row, err := parsePair(f)
		if err != nil {
			line, _ := c.FieldPos(0)
			return nil, fmt.Errorf("pairs: line %d: %w", line, err)
		}
		rows = append(rows, row)
	}
}

func parsePair(f []string) (analysis.PairRow, error) {
	r := analysis.PairRow{Crystal: f[0], Thin: f[1], Thick: f[2], Axis: f[18], Class: f[24], Flags: f[25]}
	for _, x := range []struct {
		at  int
		dst *int
	}{{3, &r.HKL.H}, {4, &r.HKL.K}, {5, &r.HKL.L}, {11, &r.NThin}, {12, &r.NThick}} {
		n, err := strconv.Atoi(f[x.at])
		if err != nil {
			return r, fmt.Errorf("column %s: %q is no integer", PairColumns()[x.at], f[x.at])
		}
		*x.dst = n
	}
	for _, x := range []struct {
		at  int
		dst *float64
	}{
		{6, &r.D}, {7, &r.PhiThin}, {8, &r.PhiThick}, {9, &r.TiltThin}, {10, &r.TiltThick}, {13, &r.JThin}, {14, &r.SUThin}, {15, &r.JThick}, {16, &r.SUThick},
		{17, &r.Strength}, {19, &r.InverseVariance}, {20, &r.DI}, {21, &r.SUDI}, {22, &r.Eps}, {23, &r.Z},
	} {
		if f[x.at] == "" {
			*x.dst = math.NaN()
			continue
		}
		v, err := strconv.ParseFloat(f[x.at], 64)
		if err != nil {
			return r, fmt.Errorf("column %s: %q is no number", PairColumns()[x.at], f[x.at])
		}
		*x.dst = v
	}
	return r, nil
}
