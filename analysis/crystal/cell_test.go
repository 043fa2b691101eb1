package crystal

import (
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Spacings and volumes by a second program, in which the metric tensor and Cartesian
// cross products agree to 1e-9; they are written to 7 decimals, volumes to 6. Cells of
// the reference materials and of low albite are from memory.
func TestSpacings(t *testing.T) {
	silicon := Cell{5.43119, 5.43119, 5.43119, 90, 90, 90}
	corundum := Cell{4.759091, 4.759091, 12.991779, 90, 90, 120}
	triclinic := Cell{3, 4, 5, 80, 95, 110}
	albite := Cell{8.144, 12.787, 7.160, 94.26, 116.6, 87.67}
	monoclinic := Cell{10, 8, 12, 90, 105, 90}
	for _, c := range []struct {
		cell Cell
		h    HKL
		d    float64
		tol  float64
	}{
		{Cell{5.431020511, 5.431020511, 5.431020511, 90, 90, 90}, HKL{2, 2, 0}, 1.920155716, 1e-9},
		{silicon, HKL{1, 1, 1}, 3.1356990, 1e-7},
		{silicon, HKL{2, 2, 0}, 1.9202156, 1e-7},
		{silicon, HKL{3, 1, 1}, 1.6375654, 1e-7},
		{silicon, HKL{5, 3, 1}, 0.9180387, 1e-7},
		{corundum, HKL{0, 1, 2}, 3.4801160, 1e-7},
		{corundum, HKL{1, 0, 4}, 2.5510207, 1e-7},
		{corundum, HKL{1, 1, 0}, 2.3795455, 1e-7},
		{corundum, HKL{2, 1, 4}, 1.4045813, 1e-7},
		{corundum, HKL{3, 0, 0}, 1.3738312, 1e-7},
		{triclinic, HKL{1, 1, 1}, 1.8540618, 1e-7},
		{triclinic, HKL{1, -1, 1}, 2.2520036, 1e-7},
		{triclinic, HKL{2, 1, -3}, 0.9536295, 1e-7},
		{albite, HKL{2, 0, -1}, 4.0304441, 1e-7},
		{albite, HKL{0, 4, 0}, 3.1878085, 1e-7},
		{albite, HKL{1, -3, 0}, 3.6576354, 1e-7},
		{albite, HKL{2, -1, 3}, 1.5562642, 1e-7},
		{monoclinic, HKL{1, 0, 0}, 9.6592583, 1e-7},
		{monoclinic, HKL{1, 1, -1}, 5.8558043, 1e-7},
		{monoclinic, HKL{2, 0, -3}, 3.4896197, 1e-7},
		{Cell{68.3, 68.3, 108.3, 90, 90, 90}, HKL{10, 5, 20}, 4.0522131, 1e-7},
		{Cell{79.1, 79.1, 37.9, 90, 90, 90}, HKL{20, 15, 8}, 2.6311537, 1e-7},
	} {
		floatcmp.Check(t, "d of "+c.cell.String(), c.cell.D(c.h), c.d, c.tol, 0)
		floatcmp.Check(t, "1/d^2 of "+c.cell.String(), c.cell.InvD2(c.h), 1/(c.d*c.d), 0, 3*c.tol)
	}
	for _, c := range []struct {
		cell   Cell
		volume float64
		back   Cell
	}{
		{triclinic, 55.499999, Cell{.35488568, .26924181, .20317679, 98.838807, 88.280740, 70.537103}},
		{albite, 664.837403, Cell{.13732978, .07842378, .15650628, 86.401226, 63.490880, 90.475130}},
	} {
		floatcmp.Check(t, "volume", c.cell.Volume(), c.volume, 1e-6, 0)
		checkCell(t, "reciprocal", c.cell.Reciprocal(), c.back, 1e-8, 1e-6)
	}
	floatcmp.Check(t, "corundum volume", corundum.Volume(), 254.828075, 1e-6, 0)
	floatcmp.Check(t, "monoclinic volume", monoclinic.Volume(), 927.288793, 1e-6, 0)
	floatcmp.Check(t, "d of 000", triclinic.D(HKL{}), math.Inf(1), 0, 0)
}

func checkCell(t *testing.T, what string, got, want Cell, length, angle float64) {
	t.Helper()
	floatcmp.CheckSlice(t, what+" lengths", []float64{got.A, got.B, got.C}, []float64{want.A, want.B, want.C}, length, 0)
	floatcmp.CheckSlice(t, what+" angles", []float64{got.Alpha, got.Beta, got.Gamma}, []float64{want.Alpha, want.Beta, want.Gamma}, angle, 0)
}

// Identities: the reciprocal undoes itself, M^T M is the metric, and a spacing
// from M is the one from the reciprocal metric.
func TestCellIdentities(t *testing.T) {
	for _, c := range []Cell{{3, 4, 5, 80, 95, 110}, {8.144, 12.787, 7.160, 94.26, 116.6, 87.67}, {10, 8, 12, 90, 105, 90}, {40, 40, 57, 90, 90, 120}} {
		checkCell(t, "twice reciprocal", c.Reciprocal().Reciprocal(), c, 1e-10, 1e-10)
		m, g := c.Orthogonal(), c.Metric()
		for i := range 3 {
			for j := range 3 {
				floatcmp.Check(t, "M^T M", m[0][i]*m[0][j]+m[1][i]*m[1][j]+m[2][i]*m[2][j], g[i][j], 1e-10, 1e-12)
			}
		}
		floatcmp.Check(t, "det M", m[0][0]*m[1][1]*m[2][2], c.Volume(), 0, 1e-12)
		// Row vector (1, 2, 3) M^-1 by forward substitution has length 1/d.
		x := 1 / m[0][0]
		y := (2 - x*m[0][1]) / m[1][1]
		z := (3 - x*m[0][2] - y*m[1][2]) / m[2][2]
		floatcmp.Check(t, "1/d^2 from M", x*x+y*y+z*z, c.InvD2(HKL{1, 2, 3}), 0, 1e-12)
	}
}

func TestCellCheck(t *testing.T) {
	for _, c := range []struct {
		cell Cell
		want string // empty: a good cell
	}{
		{Cell{10, 11, 12, 90, 90, 90}, ""},
		{Cell{10, 11, 12, 119, 119, 119}, ""},
		{Cell{0, 11, 12, 90, 90, 90}, "length a = 0 is not positive"},
		{Cell{10, -11, 12, 90, 90, 90}, "length b = -11 is not positive"},
		{Cell{10, 11, math.NaN(), 90, 90, 90}, "length c is NaN"},
		{Cell{10, math.Inf(1), 12, 90, 90, 90}, "length b is +Inf"},
		{Cell{0.61, 1.1, 1.2, 90, 90, 90}, "nanometres"},
		{Cell{20000, 11, 12, 90, 90, 90}, "picometres"},
		{Cell{10, 11, 12, 0, 90, 90}, "alpha = 0 is not between"},
		{Cell{10, 11, 12, 90, 180, 90}, "beta = 180 is not between"},
		{Cell{10, 11, 12, 90, 90, math.NaN()}, "gamma is NaN"},
		{Cell{10, 11, 12, 1.5708, 1.5708, 1.5708}, "radians"},
		{Cell{10, 11, 12, 120, 120, 120}, "add to 360"},
		{Cell{10, 11, 12, 30, 40, 80}, "gamma = 80 is not less than the sum"},
	} {
		err := c.cell.Check()
		switch {
		case c.want == "" && err != nil:
			t.Errorf("%v: %v", c.cell, err)
		case c.want != "" && (err == nil || !strings.Contains(err.Error(), c.want)):
			t.Errorf("%v: error %v, want %q", c.cell, err, c.want)
		}
	}
}

func TestCompareCells(t *testing.T) {
	d := CompareCells(Cell{10, 20, 30, 90, 91, 90}, Cell{10.1, 20, 30.9, 90, 90.5, 90.2})
	floatcmp.Check(t, "length", d.Length, 0.9/30.45, 0, 1e-12)
	floatcmp.Check(t, "angle", d.Angle, 0.5, 1e-12, 0)
	if d.LengthName != "c" || d.AngleName != "beta" {
		t.Errorf("names %s %s", d.LengthName, d.AngleName)
	}
	floatcmp.Check(t, "NaN", CompareCells(Cell{A: math.NaN()}, Cell{}).Length, math.NaN(), 0, 0)
}

func TestFitsCell(t *testing.T) {
	for _, c := range []struct {
		symbol string
		cell   Cell
		want   string
	}{
		{"P 4", Cell{40, 40.1, 57, 90, 90, 90}, ""},
		{"P 4", Cell{40, 42, 57, 90, 90, 90}, "does not fit P 4"},
		{"P 1 21/c 1", Cell{10, 11, 12, 90, 102, 90}, ""},
		{"P 1 21/c 1", Cell{10, 11, 12, 94, 102, 90}, "alpha by 8.00 degrees"},
		{"R 3", Cell{20, 20, 20, 85, 85, 85}, "choice :R"},
		{"R 3 :R", Cell{20, 20, 41, 90, 90, 120}, "choice :H"},
		{"P 1", Cell{20, 20, 41, 200, 90, 120}, "not between 0 and 180"},
	} {
		err := mustLookup(t, c.symbol).FitsCell(c.cell, 0.01, 0.5)
		switch {
		case c.want == "" && err != nil:
			t.Errorf("%s: %v", c.symbol, err)
		case c.want != "" && (err == nil || !strings.Contains(err.Error(), c.want)):
			t.Errorf("%s: error %v, want %q", c.symbol, err, c.want)
		}
	}
}
