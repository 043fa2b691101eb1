package simulate

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
	"thinward/analysis/resample"
)

// mostElectrons keeps counts where they are exact in a float64.
const mostElectrons = 1e15

// iceRings are the d values in angstrom of broad rings of hexagonal ice; the
// width of 1.5 % and the equal heights are ours.
var iceRings = [...]float64{3.9, 3.67, 3.44, 2.67, 2.25, 2.07, 1.95, 1.92}

// record counts the crossings and writes the rows.
func (o *observer) record(ctx context.Context, cross []crossing, out *Measured) error {
	p := o.position
	reindex := [3][3]int8{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}
	if p.Reindex != "" {
		var err error
		if reindex, err = parseReindex(p.Reindex); err != nil {
			return fmt.Errorf("simulate: position %s: %w", p.Name, err)
		}
	}
	frames := int32(math.Ceil((p.TiltDeg[1]-p.TiltDeg[0])/p.FrameDeg - 1e-9))
	r := o.seed.At("counts").Stream(0)
	out.Rows = &intensity.Columns{}
	kept := int32(0)
	for i := range cross {
		if i&4095 == 0 && ctx.Err() != nil {
			return ctx.Err()
		}
		c := &cross[i]
		constant := p.Counts * (p.Offset + p.Ice*iceAt(o.truth.S2[o.list.unique[c.raw]]))
		got, sigma, want, err := p.count(r, c.signal*c.lorentz, constant)
		if err != nil {
			return err
		}
		unit := p.Gain / c.lorentz
		got, want = got*unit, want*unit
		if p.CutBelow != nil && got < *p.CutBelow*sigma*unit*p.SigmaFactor {
			out.Removed++
			continue
		}
		h := o.list.raw[c.raw]
		written, err := rewrite(reindex, h)
		if err != nil {
			return err
		}
		start := max(1, min(c.frame-int32(p.Copies-1)/2, frames-int32(p.Copies)+1))
		for k := range int32(p.Copies) {
			rows := out.Rows
			rows.H, rows.K, rows.L = append(rows.H, written[0]), append(rows.K, written[1]), append(rows.L, written[2])
			rows.I, rows.Sigma = append(rows.I, got), append(rows.Sigma, sigma*unit*p.SigmaFactor)
			rows.Phi = append(rows.Phi, c.phi+float64(start+k-c.frame)*p.FrameDeg)
			rows.Frame = append(rows.Frame, start+k)
			out.Unique = append(out.Unique, o.list.unique[c.raw])
			out.Observation = append(out.Observation, kept)
			out.Expected = append(out.Expected, want)
		}
		kept++
	}
	return nil
}

// count measures a signal of the given mean in electrons: N ~ Poisson(signal +
// background) less a background estimated from BackgroundArea times the area, plus
// readout noise and a constant that no estimate sees. The variance is what an
// experimenter would say from the same counts, N + B/A^2 + readout^2, not under 1.
func (p *Position) count(r *resample.Stream, signal, constant float64) (got, sigma, want float64, err error) {
	if p.DeadCounts > 0 {
		signal /= 1 + signal*p.DeadCounts
	}
	want = signal + constant
	total, around := signal+p.Background, p.Background*p.BackgroundArea
	if !(total < mostElectrons && around < mostElectrons) {
		return 0, 0, 0, fmt.Errorf("simulate: position %s: %.3g electrons in one reflection; lower counts, ln_scale or background", p.Name, total)
	}
	got = want
	if !p.Noiseless {
		total = float64(r.Poisson(total))
		around = float64(r.Poisson(around))
		got = total - around/p.BackgroundArea + constant
		if p.Readout > 0 {
			got += p.Readout * r.Normal()
		}
	}
	v := total + around/(p.BackgroundArea*p.BackgroundArea) + p.Readout*p.Readout
	return got, math.Sqrt(math.Max(v, 1)), want, nil
}

func iceAt(s2 float64) float64 {
	const width = 0.015
	d, sum := 1/(2*math.Sqrt(s2)), 0.0
	for _, ring := range iceRings {
		x := (d/ring - 1) / width
		sum += math.Exp(-x * x / 2)
	}
	return sum
}

func rewrite(m [3][3]int8, h crystal.HKL) ([3]int16, error) {
	var out [3]int16
	for i := range out {
		v := int(m[i][0])*h.H + int(m[i][1])*h.K + int(m[i][2])*h.L
		if v < math.MinInt16 || v > math.MaxInt16 {
			return out, fmt.Errorf("simulate: index %d of %d %d %d does not fit 16 bits", v, h.H, h.K, h.L)
		}
		out[i] = int16(v)
	}
	return out, nil
}
