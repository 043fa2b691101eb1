package analysis

import (
	"errors"
	"fmt"
	"math"
	"sort"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// Series is everything one manifest describes: crystals, their positions and
// what was measured there.
type Series struct {
	Title     string
	EnergyKeV float64 // 0 when not given
	Seed      uint64
	Cell      crystal.Cell
	Group     *crystal.Group
	// ThicknessScaleSU is the relative uncertainty that all thicknesses share
	// (their scale, such as a mean free path).
	ThicknessScaleSU float64
	// ElasticMFPNM and InelasticMFPNM are mean free paths of the electrons in nm; 0
	// when not given.
	ElasticMFPNM, InelasticMFPNM float64
	// CellTolerance is the largest relative difference of a cell length, and of an
	// angle in radians, between a file and Cell; 0 = 0.02.
	CellTolerance float64
	// FriedelApart keeps Friedel mates as reflections of their own.
	FriedelApart bool
	Primary      Primary
	Crystals     []Specimen
	// Between lists contrasts between positions of two crystals; they are made
	// only when asked for, since they cannot tell thickness from crystal.
	Between []Between
	// Warnings found while reading.
	Warnings []intensity.Warning
}

// Specimen is one crystal with its positions.
type Specimen struct {
	Name      string
	Positions []Position
}

// Position is one measured place on a crystal.
type Position struct {
	Name        string
	ThicknessNM float64
	// ThicknessSU is the independent uncertainty of ThicknessNM in nm; 0 when not given.
	ThicknessSU float64
	// Order counts the measurements of one crystal in time from 1; 0 when not given.
	Order int
	// DosePerA2 is the accumulated dose in electrons per square angstrom; 0 when not given.
	DosePerA2 float64
	// TiltZeroDeg is the rotation angle at which the slab faces the beam; it
	// counts only when HasTiltZero is true.
	TiltZeroDeg float64
	HasTiltZero bool
	// ReplicateOf names a position of the same crystal and thickness; empty for none.
	ReplicateOf string
	Policy      intensity.RowPolicy
	Exclude     Exclusion
	// Rows as read; Cell as the file gives it, zero when it gives none.
	Rows    *intensity.Columns
	Cell    crystal.Cell
	Merged  bool // the file holds a merged list
	Sources []Source
}

// Exclusion sets observations aside on purpose. Frames are single frame
// numbers, ShellsA pairs of d limits in angstrom, Ice the usual ice rings.
type Exclusion struct {
	Frames  []int32
	ShellsA [][2]float64
	Ice     bool
}

// Source is one file behind a position.
type Source struct {
	Path, SHA256 string
	Rows         int
	// Cell as this file gives it, in the indexing of the series; zero when it gives none.
	Cell crystal.Cell
	// SetAside counts rows that could not be used, by reason.
	SetAside []SetAside
}

// SetAside is a number of rows left out and why.
type SetAside struct {
	Reason    string
	N         int
	FirstLine int
}

// Primary fixes the question before anyone looks: which positions, on which
// axis. Empty names mean the thinnest and the thickest position of each crystal.
type Primary struct{ Thin, Thick string }

// Between is a contrast across two crystals.
type Between struct{ ThinCrystal, ThinPosition, ThickCrystal, ThickPosition string }

// Contrast is one pair of positions; differences are always thin minus thick.
// Crystal indexes Series.Crystals; ThickCrystal differs from Crystal only for a
// contrast between crystals.
type Contrast struct {
	Crystal, ThickCrystal int
	Thin, Thick           int
	Primary               bool
}

// Across reports whether the contrast joins two crystals.
func (c Contrast) Across() bool { return c.Crystal != c.ThickCrystal }

// check validates a series in documented order: crystals, names, thicknesses,
// columns, references between positions, cell and group.
func (s *Series) check() error {
	if len(s.Crystals) == 0 {
		return errors.New("series has no crystal: add a [[crystal]] with at least two positions")
	}
	names := map[string]bool{}
	for i := range s.Crystals {
		c := &s.Crystals[i]
		if c.Name == "" {
			return fmt.Errorf("crystal %d has no name", i+1)
		}
		if names[c.Name] {
			return fmt.Errorf("two crystals are called %q: give each its own name", c.Name)
		}
		names[c.Name] = true
		if err := c.check(); err != nil {
			return err
		}
	}
	if err := s.Cell.Check(); err != nil {
		return fmt.Errorf("cell: %w", err)
	}
	if s.Group == nil {
		return errors.New("no space group: give space_group or operators in the manifest, or files that carry one")
	}
	if s.ThicknessScaleSU < 0 || math.IsNaN(s.ThicknessScaleSU) {
		return fmt.Errorf("thickness_scale_su is %g: it must be 0 or more", s.ThicknessScaleSU)
	}
	if err := s.checkCells(); err != nil {
		return err
	}
	_, err := s.contrasts()
	return err
}

func (c *Specimen) check() error {
	if len(c.Positions) == 0 {
		return fmt.Errorf("crystal %s has no position", c.Name)
	}
	seen := map[string]*Position{}
	for j := range c.Positions {
		p := &c.Positions[j]
		where := c.Name + "/" + p.Name
		switch {
		case p.Name == "":
			return fmt.Errorf("crystal %s: position %d has no name", c.Name, j+1)
		case seen[p.Name] != nil:
			return fmt.Errorf("crystal %s has two positions called %q: give each its own name", c.Name, p.Name)
		case !(p.ThicknessNM > 0) || math.IsInf(p.ThicknessNM, 0):
			return fmt.Errorf("%s: thickness_nm is %g: it must be a positive number of nanometres", where, p.ThicknessNM)
		case p.ThicknessSU < 0 || math.IsNaN(p.ThicknessSU):
			return fmt.Errorf("%s: thickness_su_nm is %g: it must be 0 or more", where, p.ThicknessSU)
		case p.Rows == nil || p.Rows.Len() == 0:
			return fmt.Errorf("%s: no reflections", where)
		}
		seen[p.Name] = p
	}
	for j := range c.Positions {
		p := &c.Positions[j]
		if p.ReplicateOf == "" {
			continue
		}
		if seen[p.ReplicateOf] == nil || p.ReplicateOf == p.Name {
			return fmt.Errorf("%s/%s: replicate_of names %q, which is not another position of this crystal", c.Name, p.Name, p.ReplicateOf)
		}
	}
	return nil
}

// byThickness returns the positions of a crystal from thin to thick, replicates
// left out; equal thicknesses keep their order in the manifest.
func (c *Specimen) byThickness() []int {
	var order []int
	for j := range c.Positions {
		if c.Positions[j].ReplicateOf == "" {
			order = append(order, j)
		}
	}
	sort.SliceStable(order, func(a, b int) bool {
		return c.Positions[order[a]].ThicknessNM < c.Positions[order[b]].ThicknessNM
	})
	return order
}

func (c *Specimen) find(name string) int {
	for j := range c.Positions {
		if c.Positions[j].Name == name {
			return j
		}
	}
	return -1
}

func (s *Series) findCrystal(name string) int {
	for i := range s.Crystals {
		if s.Crystals[i].Name == name {
			return i
		}
	}
	return -1
}

// contrasts lists every pair of positions of each crystal, the primary one
// first, then thin against each thicker neighbour, and last those between
// crystals that were asked for.
func (s *Series) contrasts() ([]Contrast, error) {
	var out []Contrast
	for i := range s.Crystals {
		c := &s.Crystals[i]
		order := c.byThickness()
		if len(order) < 2 {
			continue
		}
		first, last := order[0], order[len(order)-1]
		if n := s.Primary.Thin; n != "" {
			if first = c.find(n); first < 0 {
				return nil, fmt.Errorf("[primary] thin = %q: crystal %s has no such position", n, c.Name)
			}
		}
		if n := s.Primary.Thick; n != "" {
			if last = c.find(n); last < 0 {
				return nil, fmt.Errorf("[primary] thick = %q: crystal %s has no such position", n, c.Name)
			}
		}
		if first == last || c.Positions[first].ThicknessNM >= c.Positions[last].ThicknessNM {
			return nil, fmt.Errorf("crystal %s: the primary thin position %q (%g nm) must be thinner than %q (%g nm); mark a second place of equal thickness with replicate_of, or leave the crystal's positions out",
				c.Name, c.Positions[first].Name, c.Positions[first].ThicknessNM, c.Positions[last].Name, c.Positions[last].ThicknessNM)
		}
		out = append(out, Contrast{Crystal: i, ThickCrystal: i, Thin: first, Thick: last, Primary: true})
		for a := range order {
			for b := a + 1; b < len(order); b++ {
				if order[a] == first && order[b] == last {
					continue
				}
				out = append(out, Contrast{Crystal: i, ThickCrystal: i, Thin: order[a], Thick: order[b]})
			}
		}
	}
	for _, b := range s.Between {
		c, err := s.between(b)
		if err != nil {
			return nil, err
		}
		// Where no crystal has two thicknesses, the first contrast asked for is the
		// question.
		c.Primary = len(out) == 0
		out = append(out, c)
	}
	if len(out) == 0 {
		return nil, errors.New("no contrast: no crystal has two positions of different thickness: put the positions of one crystal under one [[crystal]]; a contrast between two crystals must be asked for with [[between]]")
	}
	return out, nil
}

func (s *Series) between(b Between) (Contrast, error) {
	i, j := s.findCrystal(b.ThinCrystal), s.findCrystal(b.ThickCrystal)
	if i < 0 || j < 0 {
		return Contrast{}, fmt.Errorf("[[between]]: no crystal %q or %q", b.ThinCrystal, b.ThickCrystal)
	}
	if i == j {
		return Contrast{}, fmt.Errorf("[[between]]: %q is one crystal; its positions are compared anyway", b.ThinCrystal)
	}
	p, q := s.Crystals[i].find(b.ThinPosition), s.Crystals[j].find(b.ThickPosition)
	if p < 0 || q < 0 {
		return Contrast{}, fmt.Errorf("[[between]]: no position %s/%s or %s/%s", b.ThinCrystal, b.ThinPosition, b.ThickCrystal, b.ThickPosition)
	}
	return Contrast{Crystal: i, ThickCrystal: j, Thin: p, Thick: q}, nil
}
