package analysis

import (
	"context"
	"testing"

	"thinward/analysis/simulate"
)

// Every position is drawn, and agrees with what the ledger says of it; without
// frames the reason stands in its place.
func TestDoubleScatteringIsDrawnForEveryPosition(t *testing.T) {
	p := simulate.Sound(5)
	p.DMin = 1.7
	series := seriesOf(t, p)
	series.Crystals[1].Positions[0].Rows.Frame = nil
	s, err := New(series, &Settings{Replicates: 50, Flips: 50})
	if err != nil {
		t.Fatal(err)
	}
	list, err := s.DoubleScattering(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	if len(list) != 9 {
		t.Fatalf("%d positions", len(list))
	}
	for k, v := range list {
		switch {
		case k == 3:
			if v.Why == "" || v.Bins != nil {
				t.Errorf("a position without frames: %+v", v)
			}
		case v.Why != "" || len(v.Bins) != doubleBins || !(v.Z > -4 && v.Z < 4):
			t.Errorf("%s/%s: z %.1f, %d bins, %s", v.Crystal, v.Position, v.Z, len(v.Bins), v.Why)
		}
	}
}
