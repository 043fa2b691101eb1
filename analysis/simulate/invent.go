package simulate

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/electron"
	"thinward/analysis/internal/parallel"
	"thinward/analysis/resample"
)

// Invent returns the series of a plan. The same plan gives the same bits on any
// number of cores. Random streams are named after the crystal, the position and
// the purpose, so adding a position or changing a noise setting leaves the structure,
// the orientations and the deviations of the others as they are. A plan that
// fails Check, too little room for the atoms, or an end of ctx is an error.
func Invent(ctx context.Context, plan *Plan) (*Series, error) {
	if plan == nil {
		panic("simulate: Invent: nil plan")
	}
	s := &Series{Plan: plan.filled()}
	p := &s.Plan
	if err := p.check(); err != nil {
		return nil, err
	}
	group, err := crystal.Lookup(p.SpaceGroup)
	if err != nil {
		return nil, fmt.Errorf("simulate: space_group: %w", err)
	}
	declared := group
	if p.Declared != "" {
		if declared, err = crystal.Lookup(p.Declared); err != nil {
			return nil, fmt.Errorf("simulate: declared: %w", err)
		}
	}
	cell := crystal.Cell(p.Cell)
	seed := resample.NewSeed(p.Seed).At("invent")
	list, truth, err := enumerate(ctx, cell, group, p.DMin)
	if err != nil {
		return nil, err
	}
	if err := truth.intensities(ctx, p, group, seed); err != nil {
		return nil, err
	}
	s.Group, s.Truth, s.Wavelength = declared, *truth, electron.Wavelength(p.EnergyKeV)
	sides := polarity(p, group, list, truth, seed)
	var jobs []*observer
	for i := range p.Crystals {
		c := &p.Crystals[i]
		own := seed.At(c.Name)
		u := c.orientation(own)
		s.Specimens = append(s.Specimens, Specimen{Name: c.Name, Orientation: u, Positions: make([]Measured, len(c.Positions))})
		common := chain(own.At("deviation"), len(truth.J), len(c.Positions), c.Neighbours)
		for j := range c.Positions {
			jobs = append(jobs, &observer{
				plan: p, position: &c.Positions[j], list: list, truth: truth, crystal: i, number: j, side: sides,
				seed: own.At(c.Positions[j].Name), deviation: common[j],
				geometry: Geometry{Wavelength: s.Wavelength, Reciprocal: reciprocalBasis(cell), Orientation: u},
			})
		}
		c.ownDeviations(own, list, jobs[len(jobs)-len(c.Positions):])
	}
	err = parallel.For(ctx, len(jobs), 0, func(ctx context.Context, i int) error {
		m, err := jobs[i].run(ctx)
		if err == nil {
			s.Specimens[jobs[i].crystal].Positions[jobs[i].number] = *m
		}
		return err
	})
	if err != nil {
		return nil, err
	}
	return s, nil
}

func (c *Crystal) orientation(seed resample.Seed) [3][3]float64 {
	if len(c.Euler) == 3 {
		return eulerRotation(c.Euler)
	}
	r := seed.At("orientation").Stream(0)
	return quaternionRotation(r.Normal(), r.Normal(), r.Normal(), r.Normal())
}

// ownDeviations draws the part of the deviations that each raw index has of its
// own, only where a position wants it.
func (c *Crystal) ownDeviations(seed resample.Seed, list *indices, jobs []*observer) {
	wanted := false
	for _, j := range jobs {
		wanted = wanted || (j.position.GeometryShare > 0 && j.position.Deviation > 0)
	}
	if !wanted {
		return
	}
	own := chain(seed.At("geometry"), len(list.raw), len(c.Positions), c.Neighbours)
	for i, j := range jobs {
		j.geometryDeviation = own[i]
	}
}

// chain returns, for each of the positions, n standard normal numbers that form
// a stationary first-order autoregression along the positions.
func chain(seed resample.Seed, n, positions int, rho float64) [][]float64 {
	out := make([][]float64, positions)
	fresh := math.Sqrt(1 - rho*rho)
	for p := range out {
		r := seed.Stream(p)
		out[p] = make([]float64, n)
		for i := range out[p] {
			out[p][i] = r.Normal()
			if p > 0 {
				out[p][i] = float64(rho*out[p-1][i]) + float64(fresh*out[p][i])
			}
		}
	}
	return out
}

// ExchangeBetween returns the true m of the contrast of two positions of one
// crystal, 1 - (1-m_thick)/(1-m_thin) of ExchangeMean, NaN with Plan.Law or when m_thin
// is 1. It panics for numbers out of range.
func (s *Series) ExchangeBetween(specimen, thin, thick int) float64 {
	a, b := &s.Specimens[specimen].Positions[thin], &s.Specimens[specimen].Positions[thick]
	left := 1 - a.ExchangeMean()
	if s.Plan.Law != nil || left == 0 {
		return math.NaN()
	}
	return 1 - (1-b.ExchangeMean())/left
}

// ExchangeMean is the exchange of the position: that of its plan or, where the
// path grows with tilt, its mean over the rows, 1 - <(1-m)^(1/cos(phi - TiltZeroDeg))>.
func (m *Measured) ExchangeMean() float64 {
	p := &m.Plan
	if !p.TiltThickens || m.Rows.Len() == 0 {
		return p.Exchange
	}
	left := 0.0
	for _, phi := range m.Rows.Phi {
		left += math.Pow(1-p.Exchange, 1/math.Cos((phi-p.TiltZeroDeg)*math.Pi/180))
	}
	return 1 - left/float64(m.Rows.Len())
}
