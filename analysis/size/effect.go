package size

import "errors"

// EffectSettings of ExpectedEffect; nil and zero fields mean the defaults.
type EffectSettings struct {
	CentricShare float64 // of reflections; 0
	Agreement    float64 // factor on |F| without the exchange; 0
	Weak         float64 // upper strength of "weak"; 0.2
}

// Effect is what an exchange does to amplitudes.
type Effect struct {
	M         float64
	Agreement float64 // factor on |F| between data with and without the exchange, best scale
	Shift     float64 // of the agreement factor given in the settings
	Scale     float64 // that brings changed amplitudes to the unchanged ones
	WeakF     float64 // relative change of the mean |F| of the weak
	WeakShare float64 // of reflections that are weak
}

// ExpectedEffect says whether an exchange m matters, for strengths of Wilson's law.
func ExpectedEffect(m float64, set *EffectSettings) (*Effect, error) {
	return nil, errors.New("size: ExpectedEffect: to be filled in")
}

// MinimumVisible is the smallest |m| seen with the given power, (z_level + z_power) SE;
// level 0 means 0.95 and power 0 means 0.80.
func MinimumVisible(se, level, power float64) float64 { return 0 }
