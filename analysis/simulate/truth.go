package simulate

import (
	"context"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/resample"
)

// intensities fills J, Shell, Local and Atoms of the truth.
func (t *Truth) intensities(ctx context.Context, p *Plan, group *crystal.Group, seed resample.Seed) error {
	cell := crystal.Cell(p.Cell)
	rnd := seed.At("structure").Stream(0)
	switch {
	case p.Structure.Wilson:
		t.J = t.wilson(rnd)
	default:
		t.Atoms = p.Structure.Given
		if len(t.Atoms) == 0 {
			var err error
			if t.Atoms, err = placeAtoms(ctx, &p.Structure, cell, group, rnd); err != nil {
				return err
			}
		}
		var err error
		if t.J, err = KinematicIntensities(ctx, cell, group, t.Atoms, t.HKL); err != nil {
			return err
		}
	}
	for i := range t.J {
		t.J[i] *= math.Exp(-2 * p.Structure.B * t.S2[i])
		if t.Absent[i] {
			t.J[i] = 0
		}
	}
	unit := t.normalise()
	t.shells(p.Shells)
	if !p.Population {
		t.Local = t.shellMean(t.J)
		return nil
	}
	t.expect(p.Structure.B, unit)
	t.Local = t.shellMean(t.expected)
	return nil
}

// wilson draws |F|^2 of mean epsilon: exponential for acentric, chi-squared with one
// degree of freedom for centric reflections (Wilson 1949).
func (t *Truth) wilson(rnd *resample.Stream) []float64 {
	j := make([]float64, len(t.HKL))
	for i := range j {
		if t.Centric[i] {
			x := rnd.Normal()
			j[i] = x * x
		} else {
			j[i] = rnd.Exponential()
		}
		j[i] *= float64(t.Epsilon[i])
	}
	return j
}

// normalise makes the mean over the allowed third of lowest s^2 equal 1 and returns
// what it was.
func (t *Truth) normalise() float64 {
	allowed := 0
	for _, a := range t.Absent {
		if !a {
			allowed++
		}
	}
	third, n, sum := max(1, allowed/3), 0, 0.0
	for i := 0; i < len(t.J) && n < third; i++ {
		if !t.Absent[i] {
			sum += t.J[i]
			n++
		}
	}
	if sum <= 0 {
		return 1
	}
	for i := range t.J {
		t.J[i] /= sum / float64(n)
	}
	return sum / float64(n)
}

func (t *Truth) shells(n int) {
	allowed := 0
	for _, a := range t.Absent {
		if !a {
			allowed++
		}
	}
	if n == 0 {
		n = min(40, allowed/50)
	}
	n = max(1, min(n, allowed))
	t.Shell = make([]int32, len(t.J))
	rank := 0
	for i := range t.Shell {
		if allowed > 0 {
			t.Shell[i] = int32(min(rank, allowed-1) * n / allowed)
		}
		if !t.Absent[i] {
			rank++
		}
	}
}

// shellMean returns, for each reflection, the mean of v over the allowed ones of its shell.
func (t *Truth) shellMean(v []float64) []float64 {
	var sum, count []float64
	for i, s := range t.Shell {
		for int(s) >= len(sum) {
			sum, count = append(sum, 0), append(count, 0)
		}
		if !t.Absent[i] {
			sum[s] += v[i]
			count[s]++
		}
	}
	out := make([]float64, len(v))
	for i, s := range t.Shell {
		if count[s] > 0 {
			out[i] = sum[s] / count[s]
		}
	}
	return out
}

// law is the noise-free intensity law of one position, per unique reflection.
type law struct {
	curbed []float64 // after the curb (forms intensity and strength)
	local  []float64 // shell mean of curbed
	m      float64
}

// lawOf applies the curb of the forms that belong to the reflection; that of the rate
// form belongs to the observation.
func (t *Truth) lawOf(p *Position) law {
	l := law{curbed: make([]float64, len(t.J)), m: p.Exchange}
	for i, j := range t.J {
		u := 0.0
		switch {
		case p.CurbForm == CurbIntensity:
			u = j
		case p.CurbForm == CurbStrength && t.Local[i] > 0:
			u = j / t.Local[i]
		}
		l.curbed[i] = j * math.Exp(-p.Curb*u)
	}
	if t.expected != nil {
		l.local = t.shellMean(t.curbedMeans(p))
		return l
	}
	l.local = t.shellMean(l.curbed)
	return l
}

func (l *law) at(unique int32, m float64) float64 {
	return float64((1-m)*l.curbed[unique]) + float64(m*l.local[unique])
}
