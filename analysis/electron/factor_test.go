package electron

import (
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func TestHydrogenScatteringIsExact(t *testing.T) {
	// Closed form for the 1s density of hydrogen: f_x = (1 + (2 pi a0 s)^2)^-2.
	for _, s := range []float64{0.05, 0.2, 0.7, 1.5} {
		fx := math.Pow(1+math.Pow(2*math.Pi*bohr*s, 2), -2)
		got, err := ScatteringFactor("H", s)
		if err != nil {
			t.Fatal(err)
		}
		floatcmp.Check(t, "hydrogen", got, mottBethe*(1-fx)/(s*s), 0, 1e-10)
	}
	// s = 0: 0.02393366 (16 pi^2/6) <r^2>, <r^2> = 3 a0^2.
	got, _ := ScatteringFactor("H", 0)
	floatcmp.Check(t, "hydrogen at 0", got, mottBethe*8*math.Pi*math.Pi*bohr*bohr, 0, 1e-12)
	near, _ := ScatteringFactor("H", 1.0000001e-4)
	floatcmp.Check(t, "hydrogen across the limit", near, got, 0, 1e-5)
}

func TestCarbonScatteringNearTables(t *testing.T) {
	// Doyle & Turner 1968 carbon, a and b typed from memory; two other
	// tables agree with it within 1.6 %.
	for _, c := range []struct{ s, want, rel float64 }{
		{0, 2.5068, 0.20}, {0.05, 2.40566, 0.18}, {0.1, 2.14009, 0.16}, {0.2, 1.45769, 0.08},
		{0.3, 0.93363, 0.08}, {0.5, 0.41119, 0.05}, {0.8, 0.17618, 0.03}, {1, 0.11564, 0.03},
	} {
		got, err := ScatteringFactor("C", c.s)
		if err != nil {
			t.Fatal(err)
		}
		floatcmp.Check(t, "carbon", got, c.want, 0, c.rel)
	}
}

func TestScatteringTendsToRutherford(t *testing.T) {
	for i, e := range elements {
		got, err := ScatteringFactor(e, 60)
		if err != nil {
			t.Fatal(err)
		}
		floatcmp.Check(t, e, got*3600/mottBethe, float64(i+1), 0, 1e-3)
	}
	if _, err := ScatteringFactor("Xx", 0.1); err == nil || !strings.Contains(err.Error(), `"Xx"`) {
		t.Fatalf("got %v", err)
	}
}
