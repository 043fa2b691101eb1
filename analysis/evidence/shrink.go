package evidence

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/resample"
)

// Shrunk holds, reflection by reflection, what is known of a true intensity that
// was measured as J with variance Var when intensities of its kind follow
// Wilson's law with mean Local (French & Wilson 1978, Acta Cryst. A34:517): the
// density is proportional to
//
//	exp(-(J-x)^2/(2 Var)) exp(-x/Local)                 acentric,
//	exp(-(J-x)^2/(2 Var)) exp(-x/(2 Local)) / sqrt(x)   centric,  x > 0.
type Shrunk struct {
	J, Var, Local []float64
	Centric       []bool
	// table holds quantiles of the centric densities.
	table [][]float64
}

// tableSize is the number of equal steps of probability in the quantiles of a
// centric density; the first and the last step end where a tenth of one is left, so
// that they do not reach into the empty tails.
const tableSize = 256

// NewShrunk prepares the densities. All columns are parallel; centric nil means
// acentric. Errors: unequal lengths, J not finite, Var or Local not above 0.
func NewShrunk(j, variance, local []float64, centric []bool) (*Shrunk, error) {
	if len(variance) != len(j) || len(local) != len(j) || (centric != nil && len(centric) != len(j)) {
		return nil, fmt.Errorf("evidence: NewShrunk: columns differ in length")
	}
	s := &Shrunk{J: j, Var: variance, Local: local, Centric: centric, table: make([][]float64, len(j))}
	for i := range j {
		if math.IsNaN(j[i]) || math.IsInf(j[i], 0) || !(variance[i] > 0) || !(local[i] > 0) || math.IsInf(variance[i]+local[i], 0) {
			return nil, fmt.Errorf("evidence: NewShrunk: reflection %d has J = %g, variance %g, local mean %g", i, j[i], variance[i], local[i])
		}
		if centric != nil && centric[i] {
			s.table[i] = centricQuantiles(j[i], math.Sqrt(variance[i]), local[i])
		}
	}
	return s, nil
}

// Draw returns one true intensity of reflection i that the measurement allows.
func (s *Shrunk) Draw(i int, r *resample.Stream) float64 {
	if t := s.table[i]; t != nil {
		x := r.Float64() * tableSize
		k := int(x)
		f := x - float64(k)
		v := float64((1-f)*t[k]) + float64(f*t[k+1])
		return v * v
	}
	sd := math.Sqrt(s.Var[i])
	return truncatedNormal(s.J[i]-s.Var[i]/s.Local[i], sd, r.Open())
}

// Mean is the mean of the density of reflection i.
func (s *Shrunk) Mean(i int) float64 {
	if t := s.table[i]; t != nil {
		sum := 0.0
		for k := range tableSize {
			a, b := t[k], t[k+1]
			sum += (a*a + a*b + b*b) / 3
		}
		return sum / tableSize
	}
	sd := math.Sqrt(s.Var[i])
	mu := s.J[i] - s.Var[i]/s.Local[i]
	return mu + sd*inverseMills(-mu/sd)
}

// inverseMills is phi(x)/(1 - Phi(x)); far in the tail by its asymptotic series
// (Abramowitz & Stegun 1964, 26.2.12).
func inverseMills(x float64) float64 {
	if x > 20 {
		y := 1 / (x * x)
		return x / (1 - y*(1-3*y*(1-5*y)))
	}
	return distuv.UnitNormal.Prob(x) / distuv.UnitNormal.Survival(x)
}

// truncatedNormal is the quantile at u of a normal law cut off below 0; far in
// the tail that is exponential.
func truncatedNormal(mu, sd, u float64) float64 {
	a := -mu / sd
	if a > 6 {
		return -sd * math.Log(u) / (a + 1/a)
	}
	x := -distuv.UnitNormal.Quantile(u * distuv.UnitNormal.Survival(a))
	return math.Max(mu+sd*x, 0)
}

// centricQuantiles tabulates quantiles of F = sqrt(x), whose density
// exp(-(J-F^2)^2/(2 sd^2) - F^2/(2 Local)) has no pole, by the trapezium rule.
func centricQuantiles(j, sd, local float64) []float64 {
	top := math.Sqrt(math.Max(0, j-sd*sd/(2*local)) + 6*sd)
	top = math.Min(top, math.Sqrt(math.Max(0, j)+60*local))
	const n = 512
	ln := func(f float64) float64 {
		d := (j - f*f) / sd
		return -0.5*d*d - 0.5*f*f/local
	}
	peak := math.Inf(-1)
	for k := 0; k <= n; k++ {
		peak = math.Max(peak, ln(top*float64(k)/n))
	}
	var sum [n + 1]float64
	last := math.Exp(ln(0) - peak)
	for k := 1; k <= n; k++ {
		next := math.Exp(ln(top*float64(k)/n) - peak)
		sum[k] = sum[k-1] + (last+next)/2
		last = next
	}
	out := make([]float64, tableSize+1)
	k := 0
	for q := range out {
		want := sum[n] * math.Max(0.1/tableSize, math.Min(float64(q)/tableSize, 1-0.1/tableSize))
		for k < n-1 && sum[k+1] < want {
			k++
		}
		f := 0.0
		if d := sum[k+1] - sum[k]; d > 0 {
			f = math.Max(0, math.Min(1, (want-sum[k])/d))
		}
		out[q] = top * (float64(k) + f) / n
	}
	out[0] = math.Max(out[0], 0)
	return out
}
