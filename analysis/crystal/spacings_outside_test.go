package crystal

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Spacings in angstrom of whole lists, by the metric tensor and by Cartesian cross
// products in another language, which agree to 1e-9; cells: silicon, CODATA 2018 and NIST SRM 640;
// corundum, SRM 676a; low albite; cells of no substance.
func TestSpacingLists(t *testing.T) {
	for _, c := range []struct {
		name string
		cell Cell
		d    map[HKL]float64
	}{
		{"silicon", Cell{5.431020511, 5.431020511, 5.431020511, 90, 90, 90}, map[HKL]float64{
			{2, 2, 0}: 1.920155716, {1, 1, 1}: 3.1356012, {3, 1, 1}: 1.6375143, {4, 0, 0}: 1.3577551, {3, 3, 1}: 1.2459616, {4, 2, 2}: 1.1086024, {5, 1, 1}: 1.0452004}},
		{"silicon powder", Cell{5.43119, 5.43119, 5.43119, 90, 90, 90}, map[HKL]float64{
			{1, 1, 1}: 3.1356990, {2, 2, 0}: 1.9202156, {3, 1, 1}: 1.6375654, {4, 0, 0}: 1.3577975, {3, 3, 1}: 1.2460004, {4, 2, 2}: 1.1086370, {5, 1, 1}: 1.0452330, {4, 4, 0}: 0.9601078, {5, 3, 1}: 0.9180387}},
		{"corundum", Cell{4.759091, 4.759091, 12.991779, 90, 90, 120}, map[HKL]float64{
			{0, 1, 2}: 3.4801160, {1, 0, 4}: 2.5510207, {1, 1, 0}: 2.3795455, {0, 0, 6}: 2.1652965, {1, 1, 3}: 2.0854592, {2, 0, 2}: 1.9642734, {0, 2, 4}: 1.7400580, {1, 1, 6}: 1.6014949, {2, 1, 4}: 1.4045813, {3, 0, 0}: 1.3738312}},
		{"albite", Cell{8.144, 12.787, 7.160, 94.26, 116.6, 87.67}, map[HKL]float64{
			{2, 0, -1}: 4.0304441, {0, 0, 2}: 3.1947599, {0, 4, 0}: 3.1878085, {1, 1, 1}: 3.7782268, {1, -1, 1}: 3.8539117, {1, 3, 0}: 3.6841418, {1, -3, 0}: 3.6576354, {2, -1, 3}: 1.5562642}},
		{"monoclinic", Cell{10, 8, 12, 90, 105, 90}, map[HKL]float64{
			{1, 0, 0}: 9.6592583, {0, 0, 1}: 11.5911099, {1, 1, 1}: 5.1024820, {1, 1, -1}: 5.8558043, {2, 0, -3}: 3.4896197}},
		{"triclinic", Cell{3, 4, 5, 80, 95, 110}, map[HKL]float64{{1, 1, 1}: 1.8540618, {1, -1, 1}: 2.2520036, {2, 1, -3}: 0.9536295}},
		{"tetragonal", Cell{68.3, 68.3, 108.3, 90, 90, 90}, map[HKL]float64{{1, 1, 2}: 36.0428142, {10, 5, 20}: 4.0522131}},
	} {
		for h, want := range c.d {
			floatcmp.Check(t, c.name, c.cell.D(h), want, 6e-8, 0)
		}
	}
	// CODATA gives the spacing 220 of silicon as a constant of its own.
	floatcmp.Check(t, "220 of silicon", Cell{5.431020511, 5.431020511, 5.431020511, 90, 90, 90}.D(HKL{2, 2, 0}), 5.431020511/math.Sqrt(8), 0, 1e-10)
}
