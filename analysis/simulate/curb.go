package simulate

import "fmt"

// CurbForm says with what the curb grows.
type CurbForm int

const (
	// CurbIntensity grows with J over the mean of the lowest third in s^2.
	CurbIntensity CurbForm = iota
	// CurbStrength grows with J over its local shell mean.
	CurbStrength
	// CurbRate grows with the counts of the observation over Counts.
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
