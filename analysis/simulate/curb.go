package simulate

import "fmt"

// CurbForm says with what the curb grows. An intensity J becomes J exp(-q u), which
// is J (1 - q u) for small q u, the two-beam loss 1 - A^2/3 with u in proportion to
// A^2 (Blackman 1939), and stays positive for the strongest.
type CurbForm int

const (
	// CurbIntensity has u = J over the mean of the lowest third in s^2.
	CurbIntensity CurbForm = iota
	// CurbStrength has u = J over its local shell mean.
	CurbStrength
	// CurbRate has u = the expected counts of the observation over Counts, after
	// exchange, deviation, scale and B.
	CurbRate
)

var curbNames = [...]string{"intensity", "strength", "rate"}

// String returns the name that a plan file uses.
func (f CurbForm) String() string {
	if f < 0 || int(f) >= len(curbNames) {
		return fmt.Sprintf("CurbForm(%d)", int(f))
	}
	return curbNames[f]
}

// MarshalText writes the name; an unknown form is an error.
func (f CurbForm) MarshalText() ([]byte, error) {
	if f < 0 || int(f) >= len(curbNames) {
		return nil, fmt.Errorf("simulate: no curb form %d", int(f))
	}
	return []byte(curbNames[f]), nil
}

// UnmarshalText reads a name as String writes it.
func (f *CurbForm) UnmarshalText(b []byte) error {
	for i, n := range curbNames {
		if n == string(b) {
			*f = CurbForm(i)
			return nil
		}
	}
	return fmt.Errorf("simulate: curb form %q is not one of intensity, strength, rate", b)
}
