package scaling

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"
)

// Reference says what residuals are taken from.
type Reference int

// FromJoint takes the joint J of all positions, which shows what the model
// leaves over; FromPosition the mean of the reflection within its position, which
// shows the noise of equivalents alone.
const (
	FromJoint Reference = iota
	FromPosition
)

// String returns the name of the reference.
func (r Reference) String() string {
	return nameOf([]string{"joint intensity", "mean in the position"}, int(r), "reference")
}

// Residuals returns normalised residuals z = (I - g J)/sqrt(v (1-l)), l the
// leverage, per observation; NaN where the observation stands alone. noise nil
// means the reported variance at the expected intensity (before the noise
// model), else the noise model (after). in must be the Input of fit.
func Residuals(in Input, fit *Fit, noise *Noise, from Reference) []float64 {
	v := fit.VarExpected
	if noise != nil {
		v = noise.Variance(in, fit)
	}
	out := make([]float64, in.Len())
	num, den := make([]float64, in.Positions), make([]float64, in.Positions)
	for at := 0; at < len(fit.order); {
		to := at
		for to < len(fit.order) && in.Unique[fit.order[to]] == in.Unique[fit.order[at]] {
			to++
		}
		block := fit.order[at:to]
		group := func(row int32) int32 {
			if from == FromPosition {
				return in.Position[row]
			}
			return 0
		}
		for _, row := range block {
			g, p := fit.Scale[row], group(row)
			num[p] += g * in.I[row] / v[row]
			den[p] += g * g / v[row]
		}
		for _, row := range block {
			g, p := fit.Scale[row], group(row)
			free := 1 - g*g/(v[row]*den[p])
			out[row] = math.NaN()
			if free > 1e-9 {
				out[row] = (in.I[row] - g*num[p]/den[p]) / math.Sqrt(v[row]*free)
			}
		}
		clear(num)
		clear(den)
		at = to
	}
	return out
}

// NormalPlot is a normal probability plot: ordered residuals of one position
// against the quantiles of the normal law at (i-3/8)/(n+1/4) (Blom 1958). Of
// more than a thousand, evenly spaced ranks and both ends are kept.
type NormalPlot struct {
	Position           int
	N                  int
	Expected, Observed []float64
	Correlation, Slope float64 // over all N; NaN below 3
	Beyond3            float64 // share of |z| > 3; 0.0027 of a normal law
}

// NormalPlots makes one plot a position from residuals z as Residuals returns
// them; NaN are left out.
func NormalPlots(in Input, z []float64) []NormalPlot {
	if len(z) != in.Len() {
		panic(fmt.Sprintf("scaling: NormalPlots: %d residuals for %d observations", len(z), in.Len()))
	}
	by := make([][]float64, in.Positions)
	for i, x := range z {
		if !math.IsNaN(x) {
			by[in.Position[i]] = append(by[in.Position[i]], x)
		}
	}
	out := make([]NormalPlot, in.Positions)
	for p, x := range by {
		out[p] = normalPlot(p, x)
	}
	return out
}

func normalPlot(p int, x []float64) NormalPlot {
	const most = 1000
	n := len(x)
	out := NormalPlot{Position: p, N: n, Correlation: math.NaN(), Slope: math.NaN(), Beyond3: math.NaN()}
	slices.Sort(x)
	q := make([]float64, n)
	far := 0
	for i := range q {
		q[i] = distuv.UnitNormal.Quantile((float64(i) + 0.625) / (float64(n) + 0.25))
		if math.Abs(x[i]) > 3 {
			far++
		}
	}
	if n >= 3 {
		out.Correlation = stat.Correlation(q, x, nil)
		_, out.Slope = stat.LinearRegression(q, x, nil, false)
		out.Beyond3 = float64(far) / float64(n)
	}
	keep := min(n, most)
	for k := range keep {
		i := k
		if n > most {
			i = k * (n - 1) / (most - 1)
		}
		out.Expected, out.Observed = append(out.Expected, q[i]), append(out.Observed, x[i])
	}
	return out
}

// By is what residuals are sorted by.
type By int

// Strength is J over the mean of its resolution shell, resolution is s^2.
const (
	ByStrength By = iota
	ByAngle
	ByResolution
)

// String returns the name.
func (b By) String() string {
	return nameOf([]string{"strength", "angle", "resolution"}, int(b), "order")
}

// ChiBin is the mean square of normalised residuals in one bin of one position;
// 1 when the variances are true.
type ChiBin struct {
	Position  int
	Lo, Hi    float64 // range of strength, angle in degrees, or s^2
	N         int
	ChiSquare float64 // mean of z^2
	Robust    float64 // median of z^2 over that of the normal law
}

// ChiSquare bins residuals z into equal-count bins by position. Positions without
// angles have no bins by angle. bins below 1 mean 10.
func ChiSquare(in Input, fit *Fit, z []float64, by By, bins int) []ChiBin {
	if len(z) != in.Len() {
		panic(fmt.Sprintf("scaling: ChiSquare: %d residuals for %d observations", len(z), in.Len()))
	}
	if bins < 1 {
		bins = 10
	}
	key := sortKey(in, fit, by)
	rows := make([][]int32, in.Positions)
	for i, x := range z {
		if p := in.Position[i]; !math.IsNaN(x) && (by != ByAngle || in.angled(int(p))) {
			rows[p] = append(rows[p], int32(i))
		}
	}
	var out []ChiBin
	for p, r := range rows {
		slices.SortFunc(r, func(a, b int32) int { return cmp.Or(cmp.Compare(key[a], key[b]), cmp.Compare(a, b)) })
		for k := range bins {
			part := r[k*len(r)/bins : (k+1)*len(r)/bins]
			if len(part) == 0 {
				continue
			}
			c := ChiBin{Position: p, Lo: key[part[0]], Hi: key[part[len(part)-1]], N: len(part)}
			z2 := make([]float64, len(part))
			for i, row := range part {
				z2[i] = z[row] * z[row]
				c.ChiSquare += z2[i] / float64(len(part))
			}
			c.Robust = median(z2) / chi2Median
			out = append(out, c)
		}
	}
	return out
}

// chi2Median is the median of chi-square with one degree of freedom (the square
// of the normal quartile).
const chi2Median = 0.454936423119572

func sortKey(in Input, fit *Fit, by By) []float64 {
	switch by {
	case ByAngle:
		if in.Phi == nil {
			return make([]float64, in.Len())
		}
		return in.Phi
	case ByResolution:
		return in.S2
	}
	t := &table{}
	t.sort(&in)
	j := make([]float64, len(t.id))
	for g, h := range t.id {
		j[g] = fit.J[h]
		t.s2[g] = in.S2[t.order[t.first[g]]]
	}
	e := t.strength(j)
	out := make([]float64, in.Len())
	for g := range t.id {
		for _, row := range t.order[t.first[g]:t.first[g+1]] {
			out[row] = e[g]
		}
	}
	return out
}

// AngleBin is what the scale curve leaves over in one stretch of angle.
type AngleBin struct {
	Position int
	Lo, Hi   float64 // degrees
	N        int
	LnK, SE  float64 // ln of observed over expected, and its standard error
}

// AngleResiduals returns the mean residual of ln K in bins of the given width in
// degrees, sum w g J (I - g J) / sum w (g J)^2 with the weights of the noise
// model (nil: of the reported variances) and the relative weights of the fit.
// width 0 means 2; bins without observations are left out. Errors: width
// negative or not finite.
func AngleResiduals(in Input, fit *Fit, noise *Noise, width float64) ([]AngleBin, error) {
	if width == 0 {
		width = 2
	}
	if !(width > 0) || math.IsInf(width, 1) {
		return nil, fmt.Errorf("scaling: bin width is %g degrees, must be positive", width)
	}
	v := fit.VarExpected
	if noise != nil {
		v = noise.Variance(in, fit)
	}
	type key struct {
		p int32
		k int
	}
	type sum struct {
		n           int
		num, den, s float64
	}
	acc := map[key]*sum{}
	for i, p := range in.Position {
		if !in.angled(int(p)) {
			continue
		}
		k := key{p, int(math.Floor(in.Phi[i] / width))}
		a := acc[k]
		if a == nil {
			a = &sum{}
			acc[k] = a
		}
		gj := fit.Scale[i] * fit.J[in.Unique[i]]
		w := fit.Weight[i] / v[i]
		a.n++
		a.num += w * gj * (in.I[i] - gj)
		a.den += w * gj * gj
		a.s += w * w * gj * gj * v[i]
	}
	out := make([]AngleBin, 0, len(acc))
	for k, a := range acc {
		if a.den > 0 {
			out = append(out, AngleBin{Position: int(k.p), Lo: float64(k.k) * width, Hi: float64(k.k+1) * width, N: a.n, LnK: a.num / a.den, SE: math.Sqrt(a.s) / a.den})
		}
	}
	slices.SortFunc(out, func(a, b AngleBin) int {
		return cmp.Or(cmp.Compare(a.Position, b.Position), cmp.Compare(a.Lo, b.Lo))
	})
	return out, nil
}
