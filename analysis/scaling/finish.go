package scaling

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"thinward/analysis/intensity"
	"thinward/analysis/internal/parallel"
)

// finish makes the Fit: one more pass for the covariance, one to write columns.
func (f *fitter) finish(ctx context.Context) (*Fit, error) {
	n, err := f.t.pass(ctx, f.s, passKind{hessian: true, exact: true, meat: true}, f.joint, f.set.Workers)
	if err != nil {
		return nil, err
	}
	f.normal = f.t.normal(f.s, n)
	if n.weight > 0 {
		f.kappa = n.curvature / n.weight
	}
	out := &Fit{
		Iterations: f.round, Converged: f.converged, LargestShift: f.shift,
		Settings: *f.set, Constant: !f.free.common, SoftSE: f.soft,
		curve: f.t.curve, order: f.t.order, Shared: f.s.shared,
	}
	out.Warnings = append(append(out.Warnings, f.warn...), f.fixed...)
	for _, free := range f.free.relative {
		out.RelativeConst = append(out.RelativeConst, !free)
	}
	for p := range f.t.curve {
		out.WeightA = append(out.WeightA, math.Sqrt(f.s.a2[p]))
		out.WeightB = append(out.WeightB, math.Sqrt(f.s.b2[p]))
	}
	f.parameters(out, f.covariance(n, out))
	f.merged(out)
	if err := f.columns(ctx, out); err != nil {
		return nil, err
	}
	f.lastWarnings(out)
	return out, nil
}

// covariance returns the covariance of theta: the inverse of the normal matrix,
// or the sandwich with reflections as units (Huber 1967; White 1980), the prior
// counting as information in both.
func (f *fitter) covariance(n *sums, out *Fit) *mat.SymDense {
	m := f.s.size()
	cov := mat.NewSymDense(m, nil)
	if f.r.t == nil {
		return cov
	}
	_, k := f.r.t.Dims()
	sys := invert(f.r.reduce(f.withPrior(), 0))
	for _, c := range sys.lost {
		out.Warnings = append(out.Warnings, f.lostWarning(c))
	}
	eta := sys.inverse
	if f.set.Covariance == CovRobust {
		if n.clusters > 3*float64(k) {
			meat := symmetric(m, n.meat)
			meat.ScaleSym(n.clusters/(n.clusters-float64(k)), meat)
			meat.AddSym(meat, f.r.prior)
			eta = between(sys.inverse, f.r.reduce(meat, 0))
		} else {
			out.Warnings = append(out.Warnings, intensity.Warning{Code: "few-reflections",
				Text: fmt.Sprintf("%.0f reflections with more than one observation for %d parameters: standard errors rest on the variances alone", n.clusters, k)})
		}
	}
	full := between(f.r.t, eta)
	cov.CopySym(full)
	return cov
}

// between returns a b a'.
func between(a mat.Matrix, b mat.Symmetric) *mat.SymDense {
	var x, y mat.Dense
	x.Mul(a, b)
	y.Mul(&x, a.T())
	n, _ := y.Dims()
	out := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			out.SetSym(i, j, 0.5*(y.At(i, j)+y.At(j, i)))
		}
	}
	return out
}

func (f *fitter) lostWarning(col int) intensity.Warning {
	row := 0
	for i := range f.s.size() {
		if math.Abs(f.r.t.At(i, col)) > math.Abs(f.r.t.At(row, col)) {
			row = i
		}
	}
	for p := range f.t.curve {
		if row == f.s.indexB(f.t, p) {
			return intensity.Warning{Code: "undetermined", Where: where(p), Text: "the data do not determine its B (too narrow a range of resolution?); it was left alone"}
		}
		if row < f.s.indexB(f.t, p) {
			return intensity.Warning{Code: "undetermined", Where: where(p), Text: "the data do not determine part of its scale; it was left alone"}
		}
	}
	panic("scaling: lostWarning: row beyond the parameters")
}

// parameters lays theta and its covariance out as the Fit documents them.
func (f *fitter) parameters(out *Fit, cov *mat.SymDense) {
	var from []int
	for p, c := range f.t.curve {
		n := c.width()
		if c.flat {
			n = 1
		}
		off := f.s.off[p]
		out.covAt = append(out.covAt, len(from))
		out.LnK = append(out.LnK, append([]float64(nil), f.s.theta[off:off+n]...))
		for i := range n {
			from = append(from, off+i)
		}
		ib := f.s.indexB(f.t, p)
		from = append(from, ib)
		mean, se := f.meanLnK(p, cov)
		out.LnKMean = append(out.LnKMean, mean)
		out.LnKMeanSE = append(out.LnKMeanSE, se)
		out.B = append(out.B, f.s.theta[ib])
		out.BSE = append(out.BSE, math.Sqrt(cov.At(ib, ib)))
	}
	out.Cov = mat.NewSymDense(len(from), nil)
	for i, a := range from {
		for j := i; j < len(from); j++ {
			out.Cov.SetSym(i, j, cov.At(a, from[j]))
		}
	}
}

func (f *fitter) meanLnK(p int, cov *mat.SymDense) (mean, se float64) {
	if f.red.use[p].n == 0 {
		return 0, math.Inf(1)
	}
	u := f.red.use[p].mean
	off := f.s.off[p]
	v := 0.0
	for i, a := range u {
		mean += a * f.s.theta[off+i]
		for j, b := range u {
			v += a * b * cov.At(off+i, off+j)
		}
	}
	if v < 1e-20 {
		v = 0
	}
	return mean, math.Sqrt(v)
}

// merged writes J, its variance and counts over unique numbers.
func (f *fitter) merged(out *Fit) {
	top := f.t.id[len(f.t.id)-1] + 1
	out.J, out.JVar, out.N = make([]float64, top), make([]float64, top), make([]int32, top)
	for h := range out.JVar {
		out.JVar[h] = math.Inf(1)
	}
	for g, h := range f.t.id {
		out.J[h] = f.s.j[g]
		out.JVar[h] = 1 / (f.kappa * f.s.dj[g])
		out.N[h] = f.t.first[g+1] - f.t.first[g]
	}
}

// columns writes scale, v' and weights back in the order of the input, and
// lists outliers.
func (f *fitter) columns(ctx context.Context, out *Fit) error {
	n := len(f.t.order)
	out.Scale, out.VarExpected, out.Weight = make([]float64, n), make([]float64, n), make([]float64, n)
	lists := make([][]Outlier, f.t.chunks())
	err := parallel.For(ctx, f.t.chunks(), f.set.Workers, func(_ context.Context, c int) error {
		w := &worker{t: f.t, s: f.s}
		w.prepare()
		for g := f.t.chunk[c]; g < f.t.chunk[c+1]; g++ {
			lo := int(f.t.first[g])
			w.obs = grown(w.obs, int(f.t.first[g+1])-lo)
			w.load(g, lo)
			for k := range w.obs {
				o := &w.obs[k]
				row := f.t.order[lo+k]
				out.Scale[row] = o.g
				out.VarExpected[row] = o.vExp
				weight := 1.0
				if !math.IsInf(f.s.nu, 1) {
					weight = o.tw * f.s.nu / (f.s.nu + 1)
				}
				out.Weight[row] = weight
				if weight < f.set.OutlierBelow {
					lists[c] = append(lists[c], f.outlier(g, int(row), o, weight))
				}
			}
		}
		return nil
	})
	for _, l := range lists {
		out.Outliers = append(out.Outliers, l...)
	}
	return err
}

func grown(o []obs, n int) []obs {
	if cap(o) < n {
		return make([]obs, n, 2*n)
	}
	return o[:n]
}

func (f *fitter) outlier(g, row int, o *obs, weight float64) Outlier {
	x := Outlier{
		Row: row, Position: int32(o.p), Unique: f.t.id[g], Raw: f.in.Raw[row], S2: f.t.s2[g], Phi: math.NaN(),
		I: f.in.I[row], Expected: o.g * f.s.j[g], Sigma: math.Sqrt(o.vAll), Weight: weight,
	}
	if f.in.angled(o.p) {
		x.Phi = f.in.Phi[row]
	}
	x.Z = (x.I - x.Expected) / x.Sigma
	return x
}

func (f *fitter) lastWarnings(out *Fit) {
	count := make([]int, f.in.Positions)
	for _, o := range out.Outliers {
		count[o.Position]++
	}
	for p, c := range count {
		share := 0.0
		if n := f.red.use[p].n; n > 0 {
			share = float64(c) / float64(n)
		}
		out.OutlierShare = append(out.OutlierShare, share)
		if share > f.set.OutlierShare {
			out.Warnings = append(out.Warnings, intensity.Warning{Code: "outliers", Where: where(p),
				Text: fmt.Sprintf("%d observations (%.2g %%) have a relative weight below %.3g, more than %.3g %%: they lie farther from the intensity that all positions share than their noise explains, by errors or by a real change with thickness",
					c, 100*share, f.set.OutlierBelow, 100*f.set.OutlierShare)})
		}
		if f.joint[p] && !f.s.report && f.red.use[p].n > 0 {
			out.Warnings = append(out.Warnings, intensity.Warning{Code: "noise-in-weights", Where: where(p),
				Text: "too few equivalents in this position: the noise in the weights was taken from differences between positions"})
		}
	}
	if !out.Converged {
		out.Warnings = append(out.Warnings, intensity.Warning{Code: "not-converged",
			Text: fmt.Sprintf("after %d rounds the largest shift is still %.2g of its standard error", out.Iterations, out.LargestShift)})
	}
}
