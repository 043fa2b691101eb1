package result

import (
	"encoding/csv"
	"io"
	"strconv"

	"thinward/analysis"
	"thinward/analysis/crystal"
)

// WriteScaled writes scaled observations as CSV, one row an observation of any
// position. A number that does not exist is an empty field.
func WriteScaled(w io.Writer, tables []analysis.ScaledTable) error {
	head := []string{"crystal", "position", "thickness_nm", "h", "k", "l", "h_unique", "k_unique", "l_unique", "d_A", "phi_deg",
		"I", "su_I", "scale", "J", "su_J", "residual", "weight", "listed"}
	return rows(w, head, func(write func(...string)) {
		for i := range tables {
			t := &tables[i]
			thickness := text(t.ThicknessNM)
			for k := range t.Rows {
				r := &t.Rows[k]
				h, u := indices(r.HKL), indices(r.Unique)
				write(t.Crystal, t.Position, thickness, h[0], h[1], h[2], u[0], u[1], u[2], text(r.D), text(r.Phi),
					text(r.I), text(r.SU), text(r.Scale), text(r.J), text(r.SUJ), text(r.Residual), text(r.Weight), yesNo(r.Listed))
			}
		}
	})
}

// WriteMerged writes merged intensities as CSV, one row a unique reflection of
// any position.
func WriteMerged(w io.Writer, tables []analysis.MergedTable) error {
	head := []string{"crystal", "position", "thickness_nm", "h", "k", "l", "d_A", "J", "su_J", "n", "epsilon", "multiplicity", "centric", "forbidden"}
	return rows(w, head, func(write func(...string)) {
		for i := range tables {
			t := &tables[i]
			thickness := text(t.ThicknessNM)
			for k := range t.Rows {
				r := &t.Rows[k]
				h := indices(r.HKL)
				write(t.Crystal, t.Position, thickness, h[0], h[1], h[2], text(r.D), text(r.J), text(r.SU), strconv.Itoa(r.N),
					strconv.Itoa(r.Epsilon), strconv.Itoa(r.Multiplicity), yesNo(r.Centric), yesNo(r.Forbidden))
			}
		}
	})
}

// WriteChanged writes the most changed reflections as CSV; the column z_by_noise
// is the |z| that this rank has in the median when nothing changed.
func WriteChanged(w io.Writer, list []analysis.ChangedRow) error {
	head := []string{"crystal", "thin", "thick", "rank", "of", "h", "k", "l", "d_A", "J_thin", "su_J_thin", "J_thick", "su_J_thick", "n_thin", "n_thick",
		"strength", "dI", "su_dI", "eps", "z", "z_by_noise", "class", "flags"}
	return rows(w, head, func(write func(...string)) {
		for i := range list {
			r := &list[i]
			h := indices(r.HKL)
			write(r.Crystal, r.Thin, r.Thick, strconv.Itoa(r.Rank), strconv.Itoa(r.Of), h[0], h[1], h[2], text(r.D), text(r.JThin), text(r.SUThin),
				text(r.JThick), text(r.SUThick), strconv.Itoa(r.NThin), strconv.Itoa(r.NThick), text(r.Strength), text(r.DI), text(r.SUDI), text(r.Eps),
				text(r.Z), text(r.ByNoise), r.Class, r.Flags)
		}
	})
}

func rows(w io.Writer, head []string, each func(write func(...string))) error {
	c := csv.NewWriter(w)
	err := c.Write(head)
	each(func(fields ...string) {
		if err == nil {
			err = c.Write(fields)
		}
	})
	c.Flush()
	if err != nil {
		return err
	}
	return c.Error()
}

func indices(h crystal.HKL) [3]string {
	return [3]string{strconv.Itoa(h.H), strconv.Itoa(h.K), strconv.Itoa(h.L)}
}

func yesNo(b bool) string {
	if b {
		return "yes"
	}
	return "no"
}
