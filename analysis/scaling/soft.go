package scaling

import (
	"fmt"

	"thinward/analysis/intensity"
)

// fixSoft sets curves to a constant that the data do not determine, and reports
// whether there were any. Common curves are judged before relative ones.
func (f *fitter) fixSoft() bool {
	if f.r.t == nil || f.normal == nil {
		return false
	}
	se := f.red.softness(f.r, f.normal)
	bad := false
	for i, b := range f.r.blocks {
		if b.kind == commonCurve && !(se[i] <= f.soft) {
			f.soft = se[i]
		}
		if b.kind != commonCurve || !(se[i] > f.set.MaxLnKSE) || !f.free.common {
			continue
		}
		bad = true
		f.free.common = false
		f.flattenCommon()
		f.note("curve-constant", "", "equivalents at other angles do not fix the common scale curve: standard error of ln K %s along its softest direction, more than %.3g; it was set to a constant (curves between positions are still fitted)", se[i], f.set.MaxLnKSE)
	}
	if !bad {
		for i, b := range f.r.blocks {
			if b.kind == commonCurve || !(se[i] > f.set.MaxLnKSE) {
				continue
			}
			bad = true
			p := b.positions[0]
			f.free.relative[p] = false
			f.flatten(p)
			f.note("relative-constant", where(p), "the data do not fix the scale curve of this position: standard error of ln K %s along its softest direction, more than %.3g; it was set to a constant", se[i], f.set.MaxLnKSE)
		}
	}
	if bad {
		f.r = f.red.build(f.free)
		f.normal, f.inverse = nil, nil
	}
	return bad
}

func (f *fitter) note(code, at, text string, se, limit float64) {
	shown := fmt.Sprintf("%.2g", se)
	if se > 10 {
		shown = "without bound"
	}
	f.fixed = append(f.fixed, intensity.Warning{Code: code, Where: at, Text: fmt.Sprintf(text, shown, limit)})
}

// flattenCommon takes c(phi) out of all curves, leaving d_p.
func (f *fitter) flattenCommon() {
	for _, b := range f.r.blocks {
		if b.kind != commonCurve {
			continue
		}
		c := f.centred(b.positions[0])
		for _, p := range b.positions {
			for i := range c {
				f.s.theta[f.s.off[p]+i] -= c[i]
			}
		}
	}
}

// flatten makes the curve of p parallel to the reference, or constant where it
// stands alone.
func (f *fitter) flatten(p int) {
	off := f.s.off[p]
	ref := make([]float64, f.t.curve[p].functions())
	if r := f.reference(p); r >= 0 {
		copy(ref, f.s.theta[f.s.off[r]:])
	}
	mean := 0.0
	for i, m := range f.red.use[p].mean {
		mean += m * (f.s.theta[off+i] - ref[i])
	}
	for i := range ref {
		f.s.theta[off+i] = ref[i] + mean
	}
}

// reference is the position whose curve is c in the set of p, -1 for none.
func (f *fitter) reference(p int) int {
	if f.t.curve[p].frames {
		return -1
	}
	for q, c := range f.t.curve {
		if f.red.over.component[q] == f.red.over.component[p] && !c.flat && !c.frames && f.red.over.n[q] > 0 {
			return q
		}
	}
	return -1
}

func (f *fitter) centred(p int) []float64 {
	u := f.red.use[p].mean
	off := f.s.off[p]
	mean := 0.0
	for i, m := range u {
		mean += m * f.s.theta[off+i]
	}
	out := make([]float64, len(u))
	for i := range out {
		out[i] = f.s.theta[off+i] - mean
	}
	return out
}
