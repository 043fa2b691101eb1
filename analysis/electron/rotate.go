package electron

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/parallel"
)

// Sweep is a slab of crystal that turns about an axis. The laboratory frame has the
// beam along +z and the rotation axis along x.
type Sweep struct {
	EnergyKeV   float64
	Reciprocal  [3][3]float64 // columns a*, b*, c* in a Cartesian frame of the crystal, 1/angstrom
	Orientation [3][3]float64 // crystal frame to laboratory at rotation angle 0
	TiltDeg     [2]float64    // lowest and highest rotation angle
	TiltZeroDeg float64       // angle at which the beam runs along the normal of the slab
	ThicknessNM []float64     // of the slab along its normal
}

// BeamSettings steer Rotate; nil and zero fields mean the defaults.
type BeamSettings struct {
	// DMin is the resolution limit of the beams in angstrom; 0 = 1.
	DMin float64
	// Excitation is the largest excitation error |s| in 1/angstrom at which a beam takes
	// part; 0 = 0.012. Coupling lets strong beams farther off take part too, those with
	// 2 K |s| up to Coupling |U|, which is |w| = |s| xi up to half of Coupling; 0 = 20,
	// negative = none.
	Excitation, Coupling float64
	// StepDeg is the rotation between two calculations; 0 takes 0.7 DMin/t, t the longest
	// path, which samples the fastest rocking curve finely enough to integrate it.
	StepDeg float64
	// MostBeams bounds the number of beams at one angle; 0 = 800.
	MostBeams int
	// Slowest is the least distance from the rotation axis over |g| of a reflection that is
	// listed; 0 = 0.25.
	Slowest float64
	// Workers is the number of goroutines; 0 = all processors. It never changes a result.
	Workers int
}

// Rotated holds integrated intensities of the reflections that passed the sphere wholly
// during a sweep, in order of index.
type Rotated struct {
	HKL []crystal.HKL
	// Kinematic is |F|^2 in square angstrom. Dynamical is the intensity integrated over
	// rotation, by thickness and reflection, over what the same integral gives a
	// reflection of unit F in the kinematic limit: it tends to Kinematic as the thickness goes to 0.
	Kinematic []float64
	Dynamical [][]float64
	// MeanBeams and MostBeams count the beams over the angles. Unitarity is the largest
	// distance of the sum of all currents from 1.
	MeanBeams float64
	MostBeams int
	Unitarity float64
	Angles    int
}

// Rotate calculates the dynamical intensities of a perfect, elastic slab by the eigenvalue method
// at every StepDeg of a sweep and integrates them over rotation. At each angle one
// diagonalisation serves all thicknesses; the path in the slab grows as 1/cos of the tilt.
// Beams are chosen as BeamSettings say, with excitation errors from the exact
// Ewald sphere. With the default limits the intensities of a crystal of light atoms at 30 to 100 nm
// were within 2.5 % of the mean intensity (root mean square) of what twice the excitation
// limit and DMin 0.9 give, and 2 % of that was DMin. The mean inner potential is left out, it changes K by 1e-4. The same input gives
// the same bits with any number of workers. It returns an error for an energy, thickness, range or
// limit that is not positive, tilts of 85 degrees and more from TiltZeroDeg, unknown elements, too many
// beams, or when ctx ends.
func Rotate(ctx context.Context, st *Structure, sw *Sweep, set *BeamSettings) (*Rotated, error) {
	o := set.filled(sw)
	if err := sw.check(&o); err != nil {
		return nil, err
	}
	f, err := newField(ctx, st, sw.EnergyKeV, 2/o.DMin)
	if err != nil {
		return nil, err
	}
	r := &rotation{sweep: sw, set: &o, field: f, k: 1 / Wavelength(sw.EnergyKeV)}
	r.list(st.Cell)
	steps := max(1, int(math.Ceil((sw.TiltDeg[1]-sw.TiltDeg[0])/o.StepDeg-1e-9)))
	width := (sw.TiltDeg[1] - sw.TiltDeg[0]) / float64(steps)
	shots := make([]shot, steps)
	err = parallel.For(ctx, steps, o.Workers, func(_ context.Context, i int) error {
		return r.shoot(&shots[i], sw.TiltDeg[0]+(float64(i)+0.5)*width)
	})
	if err != nil {
		return nil, err
	}
	unit := math.Pi * st.Cell.Volume() / Gamma(sw.EnergyKeV)
	return r.integrate(shots, width, unit*unit), nil
}

func (s *BeamSettings) filled(sw *Sweep) BeamSettings {
	var o BeamSettings
	if s != nil {
		o = *s
	}
	for _, d := range []struct {
		v   *float64
		def float64
	}{{&o.DMin, 1}, {&o.Excitation, 0.012}, {&o.Coupling, 20}, {&o.Slowest, 0.25}} {
		if *d.v == 0 {
			*d.v = d.def
		}
	}
	if o.MostBeams == 0 {
		o.MostBeams = 800
	}
	if o.StepDeg == 0 {
		longest := 0.0
		for _, t := range sw.ThicknessNM {
			for _, phi := range sw.TiltDeg {
				longest = math.Max(longest, 10*t/sw.cosine(phi))
			}
		}
		o.StepDeg = 0.7 * o.DMin / longest * 180 / math.Pi
	}
	return o
}

func (s *Sweep) cosine(phi float64) float64 { return math.Cos((phi - s.TiltZeroDeg) * math.Pi / 180) }

func (s *Sweep) check(o *BeamSettings) error {
	if !(s.EnergyKeV > 0) {
		return fmt.Errorf("electron: energy %g keV is not positive", s.EnergyKeV)
	}
	if !(s.TiltDeg[1] > s.TiltDeg[0]) {
		return fmt.Errorf("electron: tilt range %v does not rise", s.TiltDeg)
	}
	for _, phi := range s.TiltDeg {
		if !(math.Abs(phi-s.TiltZeroDeg) < 85) {
			return fmt.Errorf("electron: tilt %g is 85 degrees or more from %g, where the slab faces the beam", phi, s.TiltZeroDeg)
		}
	}
	if len(s.ThicknessNM) == 0 {
		return fmt.Errorf("electron: no thickness")
	}
	for i, t := range s.ThicknessNM {
		if !(t > 0) || math.IsInf(t, 0) {
			return fmt.Errorf("electron: thickness %d is %g nm, not positive", i, t)
		}
	}
	if !(o.DMin > 0 && o.Excitation > 0 && o.StepDeg > 0 && o.Slowest > 0 && o.MostBeams > 0) {
		return fmt.Errorf("electron: d_min %g, excitation %g, step %g, slowest %g and beams %d must be positive", o.DMin, o.Excitation, o.StepDeg, o.Slowest, o.MostBeams)
	}
	return nil
}

// rotation is what all angles share.
type rotation struct {
	sweep *Sweep
	set   *BeamSettings
	field *field
	k     float64
	hkl   []crystal.HKL
	still [][3]float64 // at rotation angle 0, parallel hkl
	along []float64    // g.n
}

// shot is what one angle gave: the beams by place in rotation.hkl, and by thickness their
// currents and those of a single scatterer of unit U.
type shot struct {
	phi             float64
	id              []int32
	current, single []float64
	s               []float64
	off             float64
}

func (r *rotation) list(cell crystal.Cell) {
	limit := 1 / r.set.DMin
	reach := [3]int{int(cell.A * limit), int(cell.B * limit), int(cell.C * limit)}
	metric := cell.ReciprocalMetric()
	sin, cos := math.Sincos(r.sweep.TiltZeroDeg * math.Pi / 180)
	for h := -reach[0]; h <= reach[0]; h++ {
		for k := -reach[1]; k <= reach[1]; k++ {
			for l := -reach[2]; l <= reach[2]; l++ {
				i := crystal.HKL{H: h, K: k, L: l}
				if i == (crystal.HKL{}) || crystal.InvD2(metric, i) > limit*limit {
					continue
				}
				g := turn(r.sweep.Orientation, turn(r.sweep.Reciprocal, [3]float64{float64(h), float64(k), float64(l)}))
				r.hkl, r.still = append(r.hkl, i), append(r.still, g)
				r.along = append(r.along, g[1]*sin+g[2]*cos)
			}
		}
	}
}

func turn(m [3][3]float64, v [3]float64) [3]float64 {
	var out [3]float64
	for i := range out {
		out[i] = m[i][0]*v[0] + m[i][1]*v[1] + m[i][2]*v[2]
	}
	return out
}

// chosen lists the beams at an angle, the incident one first, and their places.
func (r *rotation) chosen(phi float64) ([]beam, []int32) {
	sin, cos := math.Sincos(phi * math.Pi / 180)
	beams, id := []beam{{}}, []int32{-1}
	for i, g := range r.still {
		z := g[1]*sin + g[2]*cos
		off := -(2*r.k*z + g[0]*g[0] + g[1]*g[1] + g[2]*g[2])
		h := r.hkl[i]
		if math.Abs(off) > 2*r.k*r.set.Excitation {
			if r.set.Coupling < 0 {
				continue
			}
			u := r.field.at(h.H, h.K, h.L)
			if math.Abs(off) > r.set.Coupling*math.Hypot(real(u), imag(u)) {
				continue
			}
		}
		beams, id = append(beams, beam{hkl: h, offSphere: off, along: r.along[i]}), append(id, int32(i))
	}
	return beams, id
}

func (r *rotation) shoot(out *shot, phi float64) error {
	beams, id := r.chosen(phi)
	n := len(beams)
	if n > r.set.MostBeams {
		return fmt.Errorf("electron: %d beams at %g degrees, more than %d; lower the excitation limit or raise d_min", n, phi, r.set.MostBeams)
	}
	normal := r.k * r.sweep.cosine(phi)
	p, err := excite(r.field, beams, normal)
	if err != nil {
		return err
	}
	out.phi, out.id = phi, id
	wave := make([]complex128, n)
	for i := range beams {
		out.s = append(out.s, beams[i].offSphere/(2*r.k))
	}
	for _, t := range r.sweep.ThicknessNM {
		p.wave(wave, math.Pi*10*t/normal)
		sum := 0.0
		for i, w := range wave {
			c := real(w)*real(w) + imag(w)*imag(w)
			sum += c
			out.current = append(out.current, c)
			out.single = append(out.single, beams[i].single(normal, 10*t))
		}
		out.off = math.Max(out.off, math.Abs(sum-1))
	}
	return nil
}

// integrate adds the shots in order of angle, weighted with the speed |ds/dphi|.
func (r *rotation) integrate(shots []shot, width, unit float64) *Rotated {
	nt, n := len(r.sweep.ThicknessNM), len(r.hkl)
	out := &Rotated{Angles: len(shots)}
	dynamic, single := make([][]float64, nt), make([][]float64, nt)
	for t := range dynamic {
		dynamic[t], single[t] = make([]float64, n), make([]float64, n)
	}
	lo, hi := make([]float64, n), make([]float64, n)
	for i := range shots {
		s := &shots[i]
		out.MeanBeams += float64(len(s.id)) / float64(len(shots))
		out.MostBeams = max(out.MostBeams, len(s.id))
		out.Unitarity = math.Max(out.Unitarity, s.off)
		sin, cos := math.Sincos(s.phi * math.Pi / 180)
		for b := 1; b < len(s.id); b++ {
			u := s.id[b]
			speed := math.Abs(r.still[u][1]*cos - r.still[u][2]*sin)
			for t := range dynamic {
				dynamic[t][u] += speed * s.current[t*len(s.id)+b]
				single[t][u] += speed * s.single[t*len(s.id)+b]
			}
			lo[u], hi[u] = math.Min(lo[u], s.s[b]), math.Max(hi[u], s.s[b])
		}
	}
	radians := width * math.Pi / 180
	out.Dynamical = make([][]float64, nt)
	for u, h := range r.hkl {
		g := r.still[u]
		far, length := math.Hypot(g[1], g[2]), math.Sqrt(g[0]*g[0]+g[1]*g[1]+g[2]*g[2])
		edge := math.Max(r.set.Excitation-1.01*far*radians, r.set.Excitation/2)
		if far < r.set.Slowest*length || lo[u] > -edge || hi[u] < edge {
			continue
		}
		f := r.field.at(h.H, h.K, h.L)
		out.HKL = append(out.HKL, h)
		out.Kinematic = append(out.Kinematic, unit*(real(f)*real(f)+imag(f)*imag(f)))
		for t := range dynamic {
			out.Dynamical[t] = append(out.Dynamical[t], unit*dynamic[t][u]/single[t][u])
		}
	}
	return out
}
