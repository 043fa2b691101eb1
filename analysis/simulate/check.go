package simulate

import (
	"errors"
	"fmt"
	"math"
	"regexp"
	"strings"

	"thinward/analysis/crystal"
)

var nameRule = regexp.MustCompile(`^[A-Za-z0-9][A-Za-z0-9._-]*$`)

// Check returns what is wrong with the plan, all faults joined, or nil. Each
// fault names the crystal, the position and the key. The plan is judged with its
// defaults filled in.
func (p *Plan) Check() error {
	f := p.filled()
	return f.check()
}

func (p *Plan) check() error {
	var faults faultList
	faults.want(p.EnergyKeV > 0 && p.EnergyKeV <= 10000, "energy_keV %g is not between 0 and 10000", p.EnergyKeV)
	faults.want(p.DMin > 0 && !math.IsInf(p.DMin, 0), "d_min %g is not positive", p.DMin)
	faults.want(p.Shells >= 0, "shells %d is negative", p.Shells)
	faults.want(!p.Population || p.Structure.Wilson, "population needs structure.wilson: of placed atoms no law gives the mean")
	faults.add(p.checkCell())
	faults.add(p.Structure.check())
	faults.want(len(p.Crystals) > 0, "the plan has no crystal; write at least one [[crystal]]")
	seen := map[string]bool{}
	for i := range p.Crystals {
		c := &p.Crystals[i]
		faults.want(!seen[c.Name], "two crystals are named %q", c.Name)
		seen[c.Name] = true
		faults.add(c.check())
	}
	return errors.Join(faults...)
}

// declaredTolerance is how far the cell may be from the symmetry of a declared group: what a
// series takes without a tolerance of its own.
const declaredTolerance = 0.02

func (p *Plan) checkCell() error {
	cell := crystal.Cell(p.Cell)
	if err := cell.Check(); err != nil {
		return fmt.Errorf("simulate: cell: %w", err)
	}
	group, err := crystal.Lookup(p.SpaceGroup)
	if err != nil {
		return fmt.Errorf("simulate: space_group: %w", err)
	}
	if p.Declared != "" {
		declared, err := crystal.Lookup(p.Declared)
		if err != nil {
			return fmt.Errorf("simulate: declared: %w", err)
		}
		if err := declared.FitsCell(cell, declaredTolerance, 180/math.Pi*declaredTolerance); err != nil {
			return fmt.Errorf("simulate: declared: %w", err)
		}
	}
	for _, h := range []crystal.HKL{{H: 1, K: 2, L: 3}, {H: 3, K: -1, L: 2}} {
		for _, e := range group.Equivalents(h) {
			if got, want := cell.InvD2(e), cell.InvD2(h); math.Abs(got-want) > 1e-6*want {
				return fmt.Errorf("simulate: cell: the axes or angles do not have the symmetry of %s: d of %d %d %d and %d %d %d differ", p.SpaceGroup, h.H, h.K, h.L, e.H, e.K, e.L)
			}
		}
	}
	return nil
}

func (o *Structure) check() error {
	var faults faultList
	faults.want(o.MinDistance >= 0 && o.MinDistance < 20, "structure: min_distance %g is not between 0 and 20", o.MinDistance)
	faults.want(o.B >= 0 && o.B < 1000, "structure: b %g is not between 0 and 1000", o.B)
	for _, k := range o.Atoms {
		faults.want(k.Number >= 0, "structure: number %d of %s is negative", k.Number, k.Element)
		faults.want(finite(k.B), "structure: b of %s is not finite", k.Element)
	}
	for i, a := range o.Given {
		faults.want(finite(a.X, a.Y, a.Z, a.B), "structure: site %d is not finite", i+1)
	}
	faults.add(knownElements(o))
	return errors.Join(faults...)
}

func (c *Crystal) check() error {
	faults := faultList{}
	at := "crystal " + c.Name + ": "
	faults.want(nameRule.MatchString(c.Name), at+"a name holds letters, digits, '.', '_' and '-' only")
	faults.want(len(c.Euler) == 0 || (len(c.Euler) == 3 && finite(c.Euler...)), at+"euler_deg needs three finite angles")
	faults.want(math.Abs(c.Neighbours) <= 1, at+"neighbour_correlation %g is not between -1 and 1", c.Neighbours)
	faults.want(len(c.Positions) > 0, at+"no position; write [[crystal.position]] or [crystal.wedge]")
	names := map[string]bool{}
	for i := range c.Positions {
		faults.want(!names[c.Positions[i].Name], at+"two positions are named %q", c.Positions[i].Name)
		names[c.Positions[i].Name] = true
	}
	for i := range c.Positions {
		q := &c.Positions[i]
		faults.want(q.ReplicateOf == "" || (names[q.ReplicateOf] && q.ReplicateOf != q.Name), at+"position %s: replicate_of %q is no other position of this crystal", q.Name, q.ReplicateOf)
		faults = append(faults, q.check(at+"position "+q.Name+": ")...)
	}
	return errors.Join(faults...)
}

func (p *Position) check(at string) faultList {
	var f faultList
	f.want(nameRule.MatchString(p.Name), at+"a name holds letters, digits, '.', '_' and '-' only")
	f.want(p.ThicknessNM > 0 && finite(p.ThicknessNM), at+"thickness_nm %g is not positive", p.ThicknessNM)
	for _, c := range []struct {
		key   string
		value float64
		least float64
		most  float64
	}{
		{"thickness_su_nm", p.ThicknessSUNM, 0, math.MaxFloat64}, {"misoriented_deg", p.MisorientedDeg, 0, 10},
		{"counts", p.Counts, 0, 1e12}, {"gain", p.Gain, 0, 1e12}, {"ln_scale", p.LnScale, -50, 50},
		{"b", p.B, -100, 1000}, {"b_per_dose", p.DoseB, -100, 1000}, {"dose_e_per_A2", p.Dose, 0, 1e6},
		{"background", p.Background, 0, 1e9}, {"background_area", p.BackgroundArea, 1e-6, 1e6}, {"readout", p.Readout, 0, 1e9},
		{"sigma_factor", p.SigmaFactor, 1e-6, 1e6}, {"scatter", p.Scatter, 0, 3}, {"frame_jitter", p.FrameJitter, 0, 3},
		{"outlier_share", p.OutlierShare, 0, 1}, {"outlier_factor", p.OutlierFactor, 0, 1e6},
		{"deviation", p.Deviation, 0, 3}, {"geometry_share", p.GeometryShare, 0, 1}, {"polarity", p.Polarity, 0, 1}, {"exchange", p.Exchange, 0, 1},
		{"curb", p.Curb, 0, 10}, {"dead_counts", p.DeadCounts, 0, 1}, {"offset", p.Offset, -1e6, 1e6}, {"ice", p.Ice, 0, 1e6},
		{"bleed", p.Bleed, 0, 1}, {"tilt_zero_deg", p.TiltZeroDeg, -90, 90},
	} {
		f.want(c.value >= c.least && c.value <= c.most, at+"%s %g is not between %g and %g", c.key, c.value, c.least, c.most)
	}
	f.want(p.Counts > 0 && p.Gain > 0, at+"counts and gain must be positive")
	f.want(p.CurbForm >= 0 && int(p.CurbForm) < len(curbNames), at+"curb_form %d is unknown", int(p.CurbForm))
	f.want(finite(p.Cos...) && finite(p.Sin...), at+"ln_scale_cos and ln_scale_sin must be finite")
	f.want(p.CutBelow == nil || finite(*p.CutBelow), at+"cut_below_sigma must be finite")
	return append(f, p.checkAngles(at)...)
}

func (p *Position) checkAngles(at string) faultList {
	var f faultList
	if len(p.TiltDeg) != 2 || !(p.TiltDeg[0] >= -90 && p.TiltDeg[0] < p.TiltDeg[1] && p.TiltDeg[1] <= 90) {
		f.want(false, at+"tilt_deg %v needs two rising angles between -90 and 90", p.TiltDeg)
		return f
	}
	f.want(len(p.GapDeg) == 0 || (len(p.GapDeg) == 2 && p.GapDeg[0] < p.GapDeg[1] && finite(p.GapDeg...)), at+"gap_deg %v needs two rising angles", p.GapDeg)
	span := p.TiltDeg[1] - p.TiltDeg[0]
	f.want(p.FrameDeg > 0 && p.FrameDeg <= span && span/p.FrameDeg < 1e7, at+"frame_deg %g does not fit the tilt range", p.FrameDeg)
	f.want(p.Copies >= 1 && p.FrameDeg*float64(p.Copies) <= span, at+"copies %d is not between 1 and the number of frames", p.Copies)
	if p.TiltThickens {
		far := math.Max(math.Abs(p.TiltDeg[0]-p.TiltZeroDeg), math.Abs(p.TiltDeg[1]-p.TiltZeroDeg))
		f.want(far < 85, at+"tilt_thickens needs every angle within 85 degrees of tilt_zero_deg")
	}
	if p.Reindex != "" {
		if _, err := parseReindex(p.Reindex); err != nil {
			f.want(false, at+"%v", err)
		}
	}
	return f
}

// parseReindex reads "k,h,-l": each new index as a sum of the true ones.
func parseReindex(text string) ([3][3]int8, error) {
	if strings.ContainsAny(text, "xyzXYZ0123456789./") {
		return [3][3]int8{}, fmt.Errorf("reindex %q is not of the form \"k,h,-l\"", text)
	}
	op, err := crystal.ParseOp(strings.NewReplacer("h", "x", "k", "y", "l", "z").Replace(text))
	if err != nil {
		return [3][3]int8{}, fmt.Errorf("reindex %q is not of the form \"k,h,-l\": %w", text, err)
	}
	return op.R, nil
}

type faultList []error

func (f *faultList) want(ok bool, format string, args ...any) {
	if !ok {
		*f = append(*f, fmt.Errorf("simulate: "+format, args...))
	}
}

func (f *faultList) add(err error) {
	if err != nil {
		*f = append(*f, err)
	}
}

func finite(x ...float64) bool {
	for _, v := range x {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return false
		}
	}
	return true
}
