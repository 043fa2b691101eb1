package analysis

import (
	"strings"
	"testing"
)

func TestCheckAxis(t *testing.T) {
	var none *Settings
	if err := none.CheckAxis(); err != nil {
		t.Error(err)
	}
	for _, word := range append([]string{""}, leadAxes...) {
		if err := (&Settings{Axis: word}).CheckAxis(); err != nil {
			t.Errorf("%q: %v", word, err)
		}
	}
	for _, word := range []string{"foo", "Crystals", "inverse variance", "half-thin"} {
		err := (&Settings{Axis: word}).CheckAxis()
		if want := "is not known: use crystals, bracket, third, inverse-variance, thin, thick or mean"; err == nil || !strings.HasSuffix(err.Error(), want) {
			t.Errorf("%q: %v", word, err)
		}
	}
	one := &Series{Crystals: make([]Specimen, 1)}
	if err := one.checkAxis(&Settings{Axis: leadCrystals}); err == nil || !strings.Contains(err.Error(), "needs a second crystal") {
		t.Errorf("the axis of other crystals with one crystal: %v", err)
	}
	if err := one.checkAxis(&Settings{Axis: leadBracket}); err != nil {
		t.Error(err)
	}
}

// TestNewRefusesAnAxis: before any step.
func TestNewRefusesAnAxis(t *testing.T) {
	series := Series{}
	if _, err := New(series, &Settings{Axis: "foo"}); err == nil || !strings.Contains(err.Error(), `axis "foo" is not known`) {
		t.Errorf("%v", err)
	}
}
