package simulate

// Tarn returns the plan of the demonstration, "Tarn peptide, three wedges":
// crystals L1, L2 and L3 with positions thin, mid and thick. Exchange grows as the
// path, -ln(1-m) = 0.455 per micrometre of it at any tilt, with a little curb, a small offset,
// deviations of 10, 20 and 30 %, 4 % scatter of single observations, and forbidden reflections
// that the exchange fills. Orders of measurement differ, so dose does not follow thickness.
func Tarn() *Plan {
	p := &Plan{
		Title: "Tarn peptide, three wedges", EnergyKeV: 300, SpaceGroup: "P 21 21 21", Seed: 20260102,
		DMin: 1.15, ThicknessScaleSU: 0.1,
		Cell:      Cell{A: 11.1, B: 14.7, C: 18.3, Alpha: 90, Beta: 90, Gamma: 90},
		Structure: Structure{B: 1.5},
		Common:    Position{FrameDeg: 0.5, MisorientedDeg: 0.05, Background: 25, Readout: 2, Scatter: 0.04, DoseB: 0.05, TiltThickens: true},
	}
	thickness := [3][3]float64{{140, 220, 310}, {150, 235, 320}, {130, 215, 300}}
	exchange := [3][3]float64{{0.062, 0.095, 0.132}, {0.066, 0.101, 0.135}, {0.057, 0.093, 0.128}}
	order := [3][3]int{{1, 2, 3}, {3, 2, 1}, {2, 3, 1}}
	tilt := [3][]float64{{-58, 55}, {-55, 60}, {-60, 56}}
	for i, name := range []string{"L1", "L2", "L3"} {
		c := Crystal{Name: name, Neighbours: 0.7}
		for j, place := range []string{"thin", "mid", "thick"} {
			c.Positions = append(c.Positions, Position{
				Name: place, ThicknessNM: thickness[i][j], ThicknessSUNM: []float64{12, 15, 20}[j],
				Order: order[i][j], Dose: 1.2 * float64(order[i][j]), TiltDeg: tilt[i],
				Counts: 2.2 * thickness[i][j], LnScale: 0.1 * float64(i-1),
				Cos:      []float64{0.12 - 0.05*float64(j), 0.06},
				Sin:      []float64{-0.25 - 0.06*float64(i), 0.03 * float64(j)},
				Exchange: exchange[i][j], Curb: []float64{0.001, 0.004, 0.008}[j], Offset: []float64{0, 0.001, 0.002}[j],
				Deviation: []float64{0.1, 0.2, 0.3}[j],
			})
		}
		p.Crystals = append(p.Crystals, c)
	}
	return p
}

// Null returns a plan of three crystals and three positions with 1500 unique
// reflections in which nothing changes with thickness: deviations of 30 % in every
// position, neighbours correlated by 0.7, and 10 % scatter.
func Null(seed uint64) *Plan {
	p := Sound(seed)
	p.Title = "Null series"
	p.Common.Deviation, p.Common.Scatter = 0.3, 0.1
	return p
}

// Sound returns the plan that the Flaw plans start from: three crystals and three
// positions, 1500 unique reflections, nothing that changes with thickness and no
// artefact: deviations of 5 %, 4 % scatter, counts in proportion to thickness, orders
// of measurement that differ between crystals and no damage.
func Sound(seed uint64) *Plan {
	p := &Plan{
		Title: "Sound series", SpaceGroup: "P 21 21 21", Seed: seed, DMin: 1.2,
		Cell:      Cell{A: 13.1, B: 16.1, C: 19.9, Alpha: 90, Beta: 90, Gamma: 90},
		Structure: Structure{B: 1.5},
		Common:    Position{Background: 20, Readout: 1, Scatter: 0.04, Deviation: 0.05},
	}
	order := [3][3]int{{1, 2, 3}, {3, 2, 1}, {2, 3, 1}}
	for i, name := range []string{"L1", "L2", "L3"} {
		c := Crystal{Name: name, Neighbours: 0.7}
		for j, place := range []string{"thin", "mid", "thick"} {
			t := 140 + 85*float64(j)
			c.Positions = append(c.Positions, Position{
				Name: place, ThicknessNM: t, ThicknessSUNM: 0.08 * t, Order: order[i][j], Dose: 1.2 * float64(order[i][j]),
				Counts: 2 * t, Cos: []float64{0.1, 0.03 * float64(j)}, Sin: []float64{-0.2},
			})
		}
		p.Crystals = append(p.Crystals, c)
	}
	return p
}

// Replicates returns Sound(seed) with a second place of the thinnest thickness in every
// crystal, "again", declared a replicate of "thin": the full null. Its deviations
// are as related to its neighbours' as those of any two places.
func Replicates(seed uint64) *Plan {
	p := Sound(seed)
	p.Title = "Series with replicates"
	for i := range p.Crystals {
		c := &p.Crystals[i]
		again := c.Positions[0]
		again.Name, again.ReplicateOf, again.Order = "again", "thin", 4
		again.Dose = 1.2 * float64(again.Order)
		c.Positions = append(c.Positions[:1:1], append([]Position{again}, c.Positions[1:]...)...)
	}
	return p
}

// Kinematic returns the twin of a plan in which thickness changes nothing: no
// exchange, curb, offset or deviation, and no Law. Structure, orientations, scale, B
// and noise settings stay.
func (p *Plan) Kinematic() *Plan {
	out := p.filled()
	out.Law = nil
	plain := func(q *Position) {
		q.Exchange, q.Curb, q.Offset, q.Deviation, q.TiltThickens = 0, 0, 0, 0, false
	}
	plain(&out.Common)
	for i := range out.Crystals {
		out.Crystals[i].Wedge = nil
		for j := range out.Crystals[i].Positions {
			plain(&out.Crystals[i].Positions[j])
		}
	}
	return &out
}

// WithExchange returns a copy of the plan, defaults filled in, in which the position of
// rank j of each crystal by order listed has exchange m[j]; positions beyond len(m) stay.
func (p *Plan) WithExchange(m ...float64) *Plan {
	out := p.filled()
	for i := range out.Crystals {
		for j := range min(len(m), len(out.Crystals[i].Positions)) {
			out.Crystals[i].Positions[j].Exchange = m[j]
		}
	}
	return &out
}
