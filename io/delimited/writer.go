package delimited

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"

	"thinward/analysis/intensity"
)

// Write writes c as column text that reads back the same: a header line of the
// column names, then a row each with the shortest exact digits; with o.Widths no
// header and right-aligned fields, where a number that does not fit is an error.
// nil o and zero fields mean: all columns c has, apart by commas. A skip column is
// written as ?. NaN is written as ?; an infinity, and columns of unequal length, are
// errors, as are names in o.Order that c has no column for.
func Write(w io.Writer, c *intensity.Columns, o *Options) error {
	var opt Options
	if o != nil {
		opt = *o
	}
	if len(opt.Order) == 0 {
		opt.Order = allNames(c)
	}
	roles, _, problem, remedy := opt.check()
	if problem != "" {
		return fmt.Errorf("delimited: %s; %s", problem, remedy)
	}
	if opt.Delimiter == 0 {
		opt.Delimiter = ','
	}
	if err := fits(c, roles); err != nil {
		return err
	}
	out := bufio.NewWriterSize(w, 1<<16)
	if len(opt.Widths) == 0 {
		for j, r := range roles {
			if j > 0 {
				out.WriteByte(opt.Delimiter)
			}
			out.WriteString(roleNames[r])
		}
		out.WriteByte('\n')
	}
	var field []byte
	for i := range c.I {
		for j, r := range roles {
			field = appendField(field[:0], c, r, i)
			if len(opt.Widths) > 0 {
				if len(field) > opt.Widths[j] {
					return fmt.Errorf("delimited: row %d: %s does not fit %d characters of column %d (%s)", i, field, opt.Widths[j], j+1, roleNames[r])
				}
				for pad := opt.Widths[j] - len(field); pad > 0; pad-- {
					out.WriteByte(' ')
				}
			} else if j > 0 {
				out.WriteByte(opt.Delimiter)
			}
			out.Write(field)
		}
		if err := out.WriteByte('\n'); err != nil {
			return err
		}
	}
	return out.Flush()
}

func allNames(c *intensity.Columns) []string {
	order := []string{"h", "k", "l", "intensity", "sigma"}
	if c.Phi != nil {
		order = append(order, "phi")
	}
	if c.Frame != nil {
		order = append(order, "frame")
	}
	if c.Partiality != nil {
		order = append(order, "partiality")
	}
	return order
}

func fits(c *intensity.Columns, roles []role) error {
	n := len(c.I)
	lengths := [len(roleNames)]int{n, len(c.H), len(c.K), len(c.L), n, len(c.Sigma), len(c.Phi), len(c.Frame), len(c.Partiality)}
	for _, r := range roles {
		if lengths[r] != n {
			return fmt.Errorf("delimited: the column %s has %d values for %d rows", roleNames[r], lengths[r], n)
		}
	}
	for i := range c.I {
		for _, x := range [...]float64{c.I[i], c.Sigma[i], at(c.Phi, i), at(c.Partiality, i)} {
			if math.IsInf(x, 0) {
				return fmt.Errorf("delimited: row %d holds an infinity", i)
			}
		}
	}
	return nil
}

func at(x []float64, i int) float64 {
	if i < len(x) {
		return x[i]
	}
	return 0
}

func appendField(b []byte, c *intensity.Columns, r role, i int) []byte {
	x := math.NaN()
	switch r {
	case roleH:
		return strconv.AppendInt(b, int64(c.H[i]), 10)
	case roleK:
		return strconv.AppendInt(b, int64(c.K[i]), 10)
	case roleL:
		return strconv.AppendInt(b, int64(c.L[i]), 10)
	case roleFrame:
		return strconv.AppendInt(b, int64(c.Frame[i]), 10)
	case roleIntensity:
		x = c.I[i]
	case roleSigma:
		x = c.Sigma[i]
	case rolePhi:
		x = c.Phi[i]
	case rolePartiality:
		x = c.Partiality[i]
	}
	if math.IsNaN(x) {
		return append(b, '?')
	}
	return strconv.AppendFloat(b, x, 'g', -1, 64)
}
