package session

import (
	"strings"
	"testing"

	"thinward/analysis"
	"thinward/analysis/evidence"
)

func TestDoubleFigure(t *testing.T) {
	bins := []evidence.GainBin{{N: 40, Predictor: -1, Gain: -0.2, SE: 0.1}, {N: 40, Predictor: 0.9, Gain: 0.25, SE: 0.125}}
	v := doubleFigure([]analysis.Predicted{{Crystal: "L1", Position: "thin", Bins: bins, Z: 2.5}, {Crystal: "L1", Position: "thick", Why: "no frame numbers"}})
	for _, want := range []string{"L1/thin", "80", "2.5", "0.250", "0.125", "L1/thick", "no frame numbers"} {
		if !strings.Contains(v.Plain, want) {
			t.Errorf("%q is not in\n%s", want, v.Plain)
		}
	}
	if !strings.Contains(v.HTML, "<svg") || !strings.Contains(v.HTML, "without a verdict") {
		t.Error("no figure, or no word on what it may be")
	}
	for _, word := range []string{"fine", "caution", "fails"} {
		if strings.Contains(v.Plain, word) {
			t.Errorf("a verdict %q in\n%s", word, v.Plain)
		}
	}
	if none := doubleFigure(nil); !strings.Contains(none.HTML, "No position has frame numbers") {
		t.Errorf("nothing to draw: %s", none.HTML)
	}
}
