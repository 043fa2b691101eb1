package scaling

import (
	"math"
	"math/rand/v2"
)

// simPlan describes an invented crystal measured at several positions.
type simPlan struct {
	seed       uint64
	unique     int
	mates      int // raw indices a reflection, at independent angles
	lnGain     []float64
	b          []float64 // B of each position
	noiseB     []float64 // multiplicative error of each position
	shared     float64   // share of its variance common to positions
	tailDF     float64   // of the multiplicative error, 0 normal
	sigma      []float64 // factor on reported sigmas
	background float64
	span       float64 // angles run from -span to span
	flat       bool    // no curve
	jitter     float64 // spread of the angle of one raw index between positions
}

func (p simPlan) filled() simPlan {
	if p.unique == 0 {
		p.unique = 600
	}
	if p.mates == 0 {
		p.mates = 4
	}
	if p.lnGain == nil {
		p.lnGain = []float64{5, 5.4, 5.8}
	}
	if p.b == nil {
		p.b = []float64{0, 0.8, 1.5}
	}
	if p.noiseB == nil {
		p.noiseB = []float64{0.05, 0.05, 0.05}
	}
	if p.background == 0 {
		p.background = 20
	}
	if p.span == 0 {
		p.span = 60
	}
	return p
}

// simTruth is what went in.
type simTruth struct {
	plan  simPlan
	lnK   func(p int, phi float64) float64 // in the gauge of the fit
	j     []float64
	curve float64
}

func (p simPlan) trueLnK(pos int, phi float64) float64 {
	if p.flat {
		return p.lnGain[pos]
	}
	x := phi / 60
	return p.lnGain[pos] + 0.25*math.Cos(3*x) - 0.15*x + 0.1*float64(pos)*math.Sin(2.5*x+0.5*float64(pos))
}

func simulate(plan simPlan) (Input, simTruth) {
	p := plan.filled()
	rng := rand.New(rand.NewPCG(p.seed, 77))
	var in Input
	in.Positions = len(p.lnGain)
	j := make([]float64, p.unique)
	heavy := func() float64 {
		if p.tailDF == 0 {
			return rng.NormFloat64()
		}
		chi := 0.0
		for range int(p.tailDF) {
			x := rng.NormFloat64()
			chi += x * x
		}
		return rng.NormFloat64() / math.Sqrt(chi/p.tailDF)
	}
	for h := range p.unique {
		s := 0.5 * math.Cbrt(rng.Float64())
		s2 := s * s
		j[h] = math.Exp(-8*s2) * rng.ExpFloat64()
		for m := range p.mates {
			phi := p.span * (2*rng.Float64() - 1)
			common := heavy()
			for pos := range p.lnGain {
				if rng.Float64() > 0.9 {
					continue
				}
				at := math.Max(-p.span, math.Min(p.span, phi+p.jitter*rng.NormFloat64()))
				dev := p.noiseB[pos] * (math.Sqrt(p.shared)*common + math.Sqrt(1-p.shared)*heavy())
				g := math.Exp(p.trueLnK(pos, at) - 2*p.b[pos]*s2)
				mean := g * j[h] * math.Max(0, 1+dev)
				count := poisson(rng, mean+p.background)
				f := 1.0
				if p.sigma != nil {
					f = p.sigma[pos]
				}
				in.S2 = append(in.S2, s2)
				in.I = append(in.I, count-p.background+math.Sqrt(0.3*p.background)*rng.NormFloat64())
				in.Var = append(in.Var, f*f*(count+0.3*p.background+0.5))
				in.Phi = append(in.Phi, at)
				in.Unique = append(in.Unique, int32(h))
				in.Raw = append(in.Raw, int32(h*p.mates+m))
				in.Position = append(in.Position, int32(pos))
			}
		}
	}
	mean, n := 0.0, 0.0
	for i := range in.I {
		if in.Position[i] == 0 {
			mean += p.trueLnK(0, in.Phi[i])
			n++
		}
	}
	mean /= n
	return in, simTruth{plan: p, j: j, lnK: func(pos int, phi float64) float64 { return p.trueLnK(pos, phi) - mean }}
}

// poisson draws by inversion for small means, by a rounded normal with the right
// third moment to first order for large ones.
func poisson(rng *rand.Rand, mean float64) float64 {
	if mean > 60 {
		z := rng.NormFloat64()
		return math.Max(0, math.Round(mean+math.Sqrt(mean)*z+(z*z-1)/6))
	}
	limit, k, prod := math.Exp(-mean), 0.0, rng.Float64()
	for prod > limit {
		k++
		prod *= rng.Float64()
	}
	return k
}
