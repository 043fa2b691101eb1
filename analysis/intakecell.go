package analysis

import (
	"errors"
	"fmt"
	"math"

	"thinward/analysis/crystal"
)

// defaultCellTolerance is the largest relative difference of cell lengths, and of
// angles in radians, that files of one series may show; chosen, no source.
const defaultCellTolerance = 0.02

func (s *Series) cellTolerances() (percent, deg float64) {
	t := s.CellTolerance
	if t == 0 {
		t = defaultCellTolerance
	}
	return 100 * t, t * 180 / math.Pi
}

// checkCells refuses a position whose cell is not that of the series.
func (s *Series) checkCells() error {
	if s.CellTolerance < 0 || math.IsNaN(s.CellTolerance) {
		return fmt.Errorf("cell_tolerance is %g: it must be 0 or more", s.CellTolerance)
	}
	if text := s.GroupOff(); text != "" {
		return errors.New(text + ": correct the cell or the space group, or raise cell_tolerance")
	}
	for i := range s.Crystals {
		for j := range s.Crystals[i].Positions {
			p := &s.Crystals[i].Positions[j]
			for _, c := range p.cells() {
				if text := s.CellOff(c); text != "" {
					return fmt.Errorf("%s/%s: %s: check that it belongs to the series and is indexed in the same setting, or raise cell_tolerance", s.Crystals[i].Name, p.Name, text)
				}
			}
		}
	}
	return nil
}

// cells are those that the files of a position give.
func (p *Position) cells() []crystal.Cell {
	var out []crystal.Cell
	if p.Cell != (crystal.Cell{}) {
		out = append(out, p.Cell)
	}
	for _, f := range p.Sources {
		if f.Cell != (crystal.Cell{}) {
			out = append(out, f.Cell)
		}
	}
	return out
}

// CellOff says by how much a cell differs from that of the series when that is more
// than the tolerance; empty when they agree.
func (s *Series) CellOff(c crystal.Cell) string {
	percent, deg := s.cellTolerances()
	d := crystal.CompareCells(s.Cell, c)
	switch {
	case !(100*d.Length <= percent):
		return fmt.Sprintf("its cell differs from that of the series by %.1f %% in %s, more than %.3g %%", 100*d.Length, d.LengthName, percent)
	case !(d.Angle <= deg):
		return fmt.Sprintf("its cell differs from that of the series by %.2f degrees in %s, more than %.3g", d.Angle, d.AngleName, deg)
	}
	return ""
}

// GroupOff says what the space group asks of the cell and is not so to within the cell
// tolerance, with the rotation that does not leave the cell as it is; empty when they
// agree. A rotation turns an angle that is off by some degrees to the other side, so that
// twice the tolerance lies between the two.
func (s *Series) GroupOff() string {
	percent, deg := s.cellTolerances()
	if err := s.Group.FitsCell(s.Cell, percent/100, 2*deg); err != nil {
		return err.Error()
	}
	return ""
}

// cellAgreement compares the cells of a position with that of the series.
func (s *Series) cellAgreement(p *Position) CellAgreement {
	out := CellAgreement{LengthPercent: math.NaN(), AngleDeg: math.NaN()}
	out.TolerancePercent, out.ToleranceDeg = s.cellTolerances()
	for _, c := range p.cells() {
		d := crystal.CompareCells(s.Cell, c)
		if 100*d.Length > out.LengthPercent || !out.Given {
			out.LengthPercent, out.Length = 100*d.Length, d.LengthName
		}
		if d.Angle > out.AngleDeg || !out.Given {
			out.AngleDeg, out.Angle = d.Angle, d.AngleName
		}
		out.Given = true
	}
	if !out.Given {
		out.Why = "the files of this position give no cell: that of the series is taken"
	}
	return out
}
