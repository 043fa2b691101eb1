package intensity

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func oneRow() *Columns {
	return &Columns{H: []int16{1}, K: []int16{2}, L: []int16{3}, I: []float64{5}, Sigma: []float64{1},
		Phi: []float64{0}, Frame: []int32{1}, Partiality: []float64{1}}
}

func TestColumnsCheck(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	for _, c := range []struct {
		name   string
		spoil  func(*Columns)
		column string // empty: accepted
	}{
		{"good", func(*Columns) {}, ""},
		{"no extras", func(c *Columns) { c.Phi, c.Frame, c.Partiality = nil, nil, nil }, ""},
		{"direct beam", func(c *Columns) { c.H[0], c.K[0], c.L[0] = 0, 0, 0 }, "index"},
		{"index that cannot be negated", func(c *Columns) { c.K[0] = -32768 }, "index"},
		{"NaN intensity", func(c *Columns) { c.I[0] = nan }, "intensity"},
		{"infinite intensity", func(c *Columns) { c.I[0] = -inf }, "intensity"},
		{"NaN sigma", func(c *Columns) { c.Sigma[0] = nan }, "sigma"},
		{"zero sigma", func(c *Columns) { c.Sigma[0] = 0 }, "sigma"},
		{"negative sigma", func(c *Columns) { c.Sigma[0] = -1 }, "sigma"},
		{"infinite sigma", func(c *Columns) { c.Sigma[0] = inf }, "sigma"},
		{"NaN angle", func(c *Columns) { c.Phi[0] = nan }, "phi"},
		{"negative share", func(c *Columns) { c.Partiality[0] = -0.1 }, "partiality"},
		{"NaN share", func(c *Columns) { c.Partiality[0] = nan }, "partiality"},
	} {
		rows := oneRow()
		c.spoil(rows)
		err := rows.Check()
		if c.column == "" {
			if err != nil {
				t.Errorf("%s: %v", c.name, err)
			}
			continue
		}
		var row *RowError
		if !errors.As(err, &row) || row.Column != c.column || row.Row != 0 || !strings.Contains(err.Error(), "row 0: "+c.column) {
			t.Errorf("%s: got %v", c.name, err)
		}
	}
}

func TestColumnsCheckNamesTheRow(t *testing.T) {
	c := &Columns{H: []int16{1, 2, 3}, K: make([]int16, 3), L: make([]int16, 3), I: make([]float64, 3), Sigma: []float64{1, 1, -2}}
	if err := c.Check(); err == nil || err.Error() != "row 2: sigma: -2 is not above zero" {
		t.Errorf("got %v", err)
	}
}

func TestColumnsCheckLengths(t *testing.T) {
	for name, spoil := range map[string]func(*Columns){
		"h":          func(c *Columns) { c.H = nil },
		"sigma":      func(c *Columns) { c.Sigma = append(c.Sigma, 1) },
		"phi":        func(c *Columns) { c.Phi = []float64{} },
		"frame":      func(c *Columns) { c.Frame = []int32{1, 2} },
		"partiality": func(c *Columns) { c.Partiality = []float64{1, 2} },
	} {
		c := oneRow()
		spoil(c)
		if err := c.Check(); err == nil || !strings.Contains(err.Error(), "of "+name) {
			t.Errorf("%s: got %v", name, err)
		}
	}
	if err := (&Columns{}).Check(); err != nil {
		t.Errorf("no rows: %v", err)
	}
}

func TestNewColumns(t *testing.T) {
	c, err := NewColumns([]int{1, -7}, []int{0, 32767}, []int{2, -32767}, []float64{1, 2}, []float64{1, 1})
	if err != nil || c.H[1] != -7 || c.K[1] != 32767 || c.L[1] != -32767 {
		t.Errorf("got %v, %v", c, err)
	}
	_, err = NewColumns([]int{1, 2}, []int{0, 40000}, []int{2, 1}, []float64{1, 2}, []float64{1, 1})
	if err == nil || err.Error() != "row 1: k: index 40000 lies outside -32767 to 32767" {
		t.Errorf("got %v", err)
	}
}

func TestFrameWidth(t *testing.T) {
	c := &Columns{}
	for f := range int32(40) {
		if f%7 == 3 {
			continue
		}
		for k := range 3 {
			c.I = append(c.I, 1)
			c.Frame = append(c.Frame, 100-f)
			c.Phi = append(c.Phi, -20+0.5*float64(f)+0.01*float64(k-1))
		}
	}
	floatcmp.Check(t, "frame width", c.FrameWidth(), 0.5, 1e-9, 0)
	c.Phi = nil
	floatcmp.Check(t, "without angles", c.FrameWidth(), 0, 0, 0)
}

func TestSelect(t *testing.T) {
	c := list([7]float64{1, 1, 0, 30, 3, 10.1, 10}, [7]float64{1, 2, 0, 60, 4, 11.2, 11}, [7]float64{3, 0, 2, 7, 1, 20.3, 20})
	c.Partiality = []float64{0.1, 0.2, 0.3}
	got := c.Select([]bool{true, false, true})
	want := list([7]float64{1, 1, 0, 30, 3, 10.1, 10}, [7]float64{3, 0, 2, 7, 1, 20.3, 20})
	want.Partiality = []float64{0.1, 0.3}
	if fmt.Sprint(*got) != fmt.Sprint(*want) || c.Len() != 3 {
		t.Errorf("got %v", *got)
	}
	if none := c.Select(make([]bool, 3)); none.Len() != 0 || none.Check() != nil {
		t.Errorf("nothing kept: %v", *none)
	}
	defer func() {
		if got := recover(); got != "intensity: Columns.Select: keep is not parallel to the rows" {
			t.Errorf("panic %v", got)
		}
	}()
	c.Select(nil)
}
