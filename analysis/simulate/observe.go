package simulate

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/resample"
)

// slowest is the Lorentz factor above which a reflection is too near the rotation
// axis to be recorded when Lorentz is on.
const slowest = 10

// observer measures one position.
type observer struct {
	plan              *Plan
	position          *Position
	list              *indices
	truth             *Truth
	crystal, number   int
	seed              resample.Seed
	deviation         []float64 // standard normal, by unique
	geometryDeviation []float64 // standard normal, by raw index; nil when not wanted
	side              []float64 // 1 or -1 by raw index, 0 for centric ones; nil without polarity
	geometry          Geometry

	law    law
	totalB float64
}

// crossing is one passage of an index through the sphere.
type crossing struct {
	raw     int32
	frame   int32
	phi     float64
	lorentz float64
	signal  float64 // expected electrons, without the Lorentz factor
}

func (o *observer) run(ctx context.Context) (*Measured, error) {
	p := o.position
	r := o.seed.At("misorientation").Stream(0)
	tilt := [3]float64{p.MisorientedDeg * r.Normal(), p.MisorientedDeg * r.Normal(), p.MisorientedDeg * r.Normal()}
	o.geometry.Orientation = product(smallRotation(tilt), o.geometry.Orientation)
	o.totalB = p.B + p.DoseB*p.Dose
	out := &Measured{Plan: *p, Orientation: o.geometry.Orientation, B: o.totalB}
	if o.plan.Law == nil {
		o.law = o.truth.lawOf(p)
		out.Law = make([]float64, len(o.truth.J))
		out.LnDeviation = make([]float64, len(o.truth.J))
		for u := range out.Law {
			out.Law[u] = o.law.at(int32(u), p.Exchange)
			out.LnDeviation[u] = p.Deviation*math.Sqrt(1-p.GeometryShare)*o.deviation[u] - p.Deviation*p.Deviation/2
		}
	}
	for phi := p.TiltDeg[0]; phi <= p.TiltDeg[1]; phi += 0.5 {
		out.AngleDeg = append(out.AngleDeg, phi)
		out.LnK = append(out.LnK, math.Log(p.Counts*p.Gain)+p.lnK(phi))
	}
	cross, err := o.crossings(ctx)
	if err != nil {
		return nil, err
	}
	if p.Once {
		cross = o.once(cross)
	}
	if p.Bleed > 0 {
		o.bleed(cross)
	}
	o.disturb(cross)
	return out, o.record(ctx, cross, out)
}

// lnK is ln K(phi) without counts and gain.
func (p *Position) lnK(phi float64) float64 {
	x := math.Pi * (phi - p.TiltDeg[0]) / (p.TiltDeg[1] - p.TiltDeg[0])
	sum := p.LnScale
	for k, a := range p.Cos {
		sum += a * math.Cos(float64(k+1)*x)
	}
	for k, a := range p.Sin {
		sum += a * math.Sin(float64(k+1)*x)
	}
	return sum
}

// crossings lists every recorded passage in order of index, then angle, with its
// expected signal.
func (o *observer) crossings(ctx context.Context) ([]crossing, error) {
	p := o.position
	frames := int32(math.Ceil((p.TiltDeg[1]-p.TiltDeg[0])/p.FrameDeg - 1e-9))
	out := make([]crossing, 0, len(o.list.raw))
	for i, h := range o.list.raw {
		if i&4095 == 0 && ctx.Err() != nil {
			return nil, ctx.Err()
		}
		absent := o.list.absent[i]
		if (absent == absentScrewGlide && p.OmitForbidden) || (absent == absentCentring && !p.WithCentring) {
			continue
		}
		phis, n := o.geometry.Crossings(h)
		for _, phi := range phis[:n] {
			if phi < p.TiltDeg[0] || phi > p.TiltDeg[1] || (len(p.GapDeg) == 2 && phi >= p.GapDeg[0] && phi <= p.GapDeg[1]) {
				continue
			}
			c := crossing{raw: int32(i), phi: phi, lorentz: 1}
			if p.Lorentz {
				if c.lorentz = o.geometry.Lorentz(h, phi); c.lorentz > slowest {
					continue
				}
			}
			c.frame = min(frames, 1+int32((phi-p.TiltDeg[0])/p.FrameDeg))
			ok, err := o.expect(&c, h)
			if err != nil {
				return nil, err
			}
			if ok {
				out = append(out, c)
			}
		}
	}
	return out, nil
}

// expect sets the signal of a crossing from the law of the position.
func (o *observer) expect(c *crossing, h crystal.HKL) (bool, error) {
	p, u := o.position, o.list.unique[c.raw]
	var j float64
	if o.plan.Law != nil {
		var ok bool
		if j, ok = o.plan.Law(o.crystal, o.number, h); !ok {
			return false, nil
		}
		if !(j >= 0) || math.IsInf(j, 0) {
			return false, fmt.Errorf("simulate: Law gave %g for %d %d %d, crystal %d, position %d; it must be finite and not negative", j, h.H, h.K, h.L, o.crystal, o.number)
		}
	} else {
		m := o.law.m
		if p.TiltThickens {
			m = 1 - math.Pow(1-m, 1/math.Cos((c.phi-p.TiltZeroDeg)*math.Pi/180))
		}
		x := math.Sqrt(1-p.GeometryShare) * o.deviation[u]
		if o.geometryDeviation != nil {
			x += math.Sqrt(p.GeometryShare) * o.geometryDeviation[c.raw]
		}
		j = o.law.at(u, m) * math.Exp(p.Deviation*x-p.Deviation*p.Deviation/2)
		if p.Polarity > 0 {
			j = math.Max(0, j+p.Polarity*o.side[c.raw]*math.Sqrt(j*o.truth.Local[u]))
		}
		if o.list.absent[c.raw] == absentCentring {
			j = 0 // no lattice point: an exchange fills what screws and glides forbid, never this
		}
	}
	c.signal = p.Counts * j * math.Exp(p.lnK(c.phi)-2*o.totalB*o.truth.S2[u])
	if p.CurbForm == CurbRate {
		c.signal *= math.Exp(-p.Curb * c.signal / p.Counts)
	}
	return true, nil
}

// once keeps the first crossing of each unique reflection, as lists that were merged
// elsewhere do.
func (o *observer) once(cross []crossing) []crossing {
	seen := make([]bool, len(o.truth.J))
	var out []crossing
	for _, c := range cross {
		if u := o.list.unique[c.raw]; !seen[u] {
			seen[u] = true
			out = append(out, c)
		}
	}
	return out
}

// bleed adds to each crossing a share of the signal of the six nearest lattice
// points that cross within one frame width.
func (o *observer) bleed(cross []crossing) {
	first := make([]int32, len(o.list.raw))
	for i := range first {
		first[i] = -1
	}
	for i := len(cross) - 1; i >= 0; i-- {
		first[cross[i].raw] = int32(i)
	}
	gain := make([]float64, len(cross))
	for i := range cross {
		h := o.list.raw[cross[i].raw]
		for _, d := range [6]crystal.HKL{{H: 1}, {H: -1}, {K: 1}, {K: -1}, {L: 1}, {L: -1}} {
			n := o.list.lookup(crystal.HKL{H: h.H + d.H, K: h.K + d.K, L: h.L + d.L})
			if n < 0 || first[n] < 0 {
				continue
			}
			for k := int(first[n]); k < len(cross) && cross[k].raw == n; k++ {
				if math.Abs(cross[k].phi-cross[i].phi) < o.position.FrameDeg {
					gain[i] += o.position.Bleed * cross[k].signal
				}
			}
		}
	}
	for i := range cross {
		cross[i].signal += gain[i]
	}
}

// disturb applies the fresh errors, each of mean 1: scatter and frame jitter are
// log-normal with exactly the stated relative sd.
func (o *observer) disturb(cross []crossing) {
	p := o.position
	if p.FrameJitter > 0 {
		r := o.seed.At("frame jitter").Stream(0)
		var factor []float64
		for i := range cross {
			for int(cross[i].frame) >= len(factor) {
				factor = append(factor, lognormal(r, p.FrameJitter))
			}
			cross[i].signal *= factor[cross[i].frame]
		}
	}
	if p.Scatter > 0 {
		r := o.seed.At("scatter").Stream(0)
		for i := range cross {
			cross[i].signal *= lognormal(r, p.Scatter)
		}
	}
	if p.OutlierShare > 0 {
		r := o.seed.At("outlier").Stream(0)
		for i := range cross {
			if r.Float64() < p.OutlierShare {
				cross[i].signal *= p.OutlierFactor
			}
		}
	}
}

func lognormal(r *resample.Stream, sd float64) float64 {
	v := math.Log1p(sd * sd)
	return math.Exp(math.Sqrt(v)*r.Normal() - v/2)
}
