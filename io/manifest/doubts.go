package manifest

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"thinward/analysis/electron"
	"thinward/analysis/intensity"
)

const (
	// leastUnscattered is the share of electrons without a loss of energy below which a
	// thickness is doubted: exp(-t/inelastic path) = 1 % at 4.6 paths. Diffraction from
	// so little is not measured in practice; common practice, no source.
	leastUnscattered = 0.01
	// mostRatio is how many times the thinnest position of a crystal the thickest may be
	// before a slip of the decimal point is asked for; chosen, no source.
	mostRatio = 10
	// longestA is beyond the wavelength of electrons of 40 keV, 0.0602 angstrom, the
	// slowest that diffraction through a crystal is done with.
	longestA = 0.061
	// usualKeV stands for an energy that nothing gives: the highest in wide use, which
	// doubts least.
	usualKeV = 300.0
)

// ThinnestFirst lists the positions of a crystal by thickness, as in "thin 140 nm, thick
// 310 nm". Equal ones keep their order in the manifest.
func (k *Crystal) ThinnestFirst() string {
	var parts []string
	for _, p := range k.byThickness() {
		parts = append(parts, fmt.Sprintf("%s %g nm", p.Name, p.ThicknessNM))
	}
	return strings.Join(parts, ", ")
}

func (k *Crystal) byThickness() []*Position {
	var out []*Position
	for j := range k.Position {
		out = append(out, &k.Position[j])
	}
	slices.SortStableFunc(out, func(a, b *Position) int { return cmp.Compare(a.ThicknessNM, b.ThicknessNM) })
	return out
}

// doubts lists what is possible but looks like a slip in the thicknesses. energyKeV is 0
// where nothing gives it.
func (f *File) doubts(energyKeV float64) []intensity.Warning {
	var out []intensity.Warning
	most, from := f.mostNM(energyKeV)
	for i := range f.Crystal {
		k := &f.Crystal[i]
		add := func(code, text string) {
			out = append(out, intensity.Warning{Code: code, Where: k.Name, Text: text})
		}
		order := k.byThickness()
		if text := againstNames(order); text != "" {
			add("thickness-names", fmt.Sprintf("thinnest first the positions are %s, but %s: correct thickness_nm or the names; every difference is thin minus thick by thickness_nm", k.ThinnestFirst(), text))
		}
		thinnest, thickest := order[0], order[len(order)-1]
		if ratio := thickest.ThicknessNM / thinnest.ThicknessNM; ratio > mostRatio {
			add("thickness-ratio", fmt.Sprintf("%s (%g nm) is given %.3g times as thick as %s (%g nm): check the decimal point of thickness_nm", thickest.Name, thickest.ThicknessNM, ratio, thinnest.Name, thinnest.ThicknessNM))
		}
		for _, p := range order {
			if p.ThicknessNM > most {
				add("thickness-large", fmt.Sprintf("%s is given %g nm thick: beyond %.0f nm (%s) fewer than 1 electron in 100 keeps its energy; check that thickness_nm is in nanometres", p.Name, p.ThicknessNM, most, from))
			}
		}
		for n := 1; n < len(order); n++ {
			if a, b := order[n-1], order[n]; a.ThicknessNM == b.ThicknessNM && a.ReplicateOf != b.Name && b.ReplicateOf != a.Name && (a.ReplicateOf == "" || a.ReplicateOf != b.ReplicateOf) {
				add("thickness-equal", fmt.Sprintf("%s and %s are given one thickness, %g nm: a difference between them is none of thickness; write replicate_of for a second place of equal thickness", a.Name, b.Name, a.ThicknessNM))
			}
		}
	}
	return out
}

// mostNM is the thickness behind which the share of electrons without a loss of energy
// is leastUnscattered: by the inelastic mean free path that the manifest gives, or else
// by the longer of the estimates for macromolecular and for organic crystals. It is +Inf
// where there is none.
func (f *File) mostNM(energyKeV float64) (nm float64, from string) {
	if f.MeanFreePath != nil {
		return -math.Log(leastUnscattered) * f.MeanFreePath.InelasticNM, "by the inelastic mean free path given"
	}
	at := fmt.Sprintf("%.4g keV", energyKeV)
	if energyKeV == 0 {
		energyKeV, at = usualKeV, fmt.Sprintf("%g keV, as no energy is given", usualKeV)
	}
	longest := 0.0
	for _, atoms := range [][]electron.Density{electron.Macromolecular(), electron.Organic()} {
		free, err := electron.EstimateFreePaths(energyKeV, atoms)
		if err != nil {
			return math.Inf(1), ""
		}
		longest = max(longest, free.InelasticNM)
	}
	return -math.Log(leastUnscattered) * longest, "4.6 inelastic mean free paths at " + at
}

// againstNames says which two of the positions, thinnest first, have names that tell
// the opposite; "" where none have.
func againstNames(order []*Position) string {
	for a := range order {
		_, x := hinted(order[a].Name)
		for b := a + 1; b < len(order); b++ {
			if _, y := hinted(order[b].Name); x > 0 && y > 0 && x > y {
				return fmt.Sprintf("by their names %q is thinner than %q", order[b].Name, order[a].Name)
			}
		}
	}
	return ""
}

// notElectrons doubts that a file holds electron data, or data of electrons of the energy
// of the series; "" where there is nothing to doubt. An energy that the file gives itself
// is compared elsewhere.
func notElectrons(probe string, wavelengthA, energyKeV float64, given bool) string {
	switch {
	case probe != "" && probe != "electron":
		text := fmt.Sprintf("the file gives its radiation as %s", probe)
		if wavelengthA > 0 {
			text += fmt.Sprintf(" of wavelength %g Å", wavelengthA)
		}
		return text + ": these are not electron data"
	case !(wavelengthA > 0):
	case wavelengthA > longestA:
		return fmt.Sprintf("wavelength %g Å is not that of electrons of 40 keV or more; are these X-ray data?", wavelengthA)
	case energyKeV > 0 && !given:
		if l := electron.Wavelength(energyKeV); math.Abs(wavelengthA/l-1) > energyTolerance {
			return fmt.Sprintf("wavelength %g Å is not that of electrons of %.4g keV, %.4f Å: correct energy_keV or the file", wavelengthA, energyKeV, l)
		}
	}
	return ""
}
