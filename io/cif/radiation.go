package cif

import (
	"fmt"
	"math"
	"strings"
)

const (
	electronRestKeV  = 510.99895069       // m c^2, CODATA 2022
	planckLightKeVA  = 12.398419843320026 // h c in keV angstrom, exact in the SI
	electronLimitA   = 0.1                // no other probe in use is this short
	energyAgreeShare = 0.02
)

// electronEnergy inverts lambda = h c / sqrt(T^2 + 2 T m c^2), the relativistic
// relation of wavelength (angstrom) and kinetic energy T (keV).
func electronEnergy(wavelengthA float64) float64 {
	pc := planckLightKeVA / wavelengthA
	return pc * pc / (math.Hypot(pc, electronRestKeV) + electronRestKeV)
}

func (g *gatherer) radiation() error {
	if err := g.wavelength(); err != nil {
		return err
	}
	g.probe()
	b, item, v, ok := g.single("voltage", voltageNames)
	if ok {
		kv, _, err := g.number(b, item, v)
		if err != nil {
			return err
		}
		if kv <= 0 {
			return g.fault(b, v, item, "the voltage is not positive", "give it in kilovolt")
		}
		if kv > 5000 {
			g.warn("voltage", fmt.Sprintf("%s %g would be %g kilovolt; its unit is kilovolt, so it was not used", item, kv, kv))
			kv = 0
		}
		g.out.EnergyKeV = kv
	}
	if g.out.Probe != "electron" || g.out.WavelengthA == 0 {
		return nil
	}
	inferred := electronEnergy(g.out.WavelengthA)
	switch {
	case g.out.EnergyKeV == 0:
		g.out.EnergyKeV = inferred
	case math.Abs(inferred/g.out.EnergyKeV-1) > energyAgreeShare:
		g.warn("energy", fmt.Sprintf("the voltage %g kV and the wavelength %g A (%.1f keV) do not belong together; the voltage was used", g.out.EnergyKeV, g.out.WavelengthA, inferred))
	}
	return nil
}

// wavelength takes the value; of several in a loop the one of the greatest weight.
func (g *gatherer) wavelength() error {
	b, item, values := g.lookup("wavelength", wavelengthNames)
	if b == nil {
		return nil
	}
	_, weights := known(b, weightNames)
	best, top, differ := -1, math.Inf(-1), false
	var x float64
	for i, v := range values {
		if v.Null() {
			continue
		}
		w, _, err := g.number(b, item, v)
		if err != nil {
			return err
		}
		if w <= 0 {
			return g.fault(b, v, item, "the wavelength is not positive", "give it in angstrom")
		}
		weight := 0.0
		if len(weights) == len(values) {
			if wt, _, ok := weights[i].Number(); ok {
				weight = wt
			}
		}
		differ = differ || best >= 0 && w != x
		if weight > top {
			best, top, x = i, weight, w
		}
	}
	if differ && top == 0 {
		g.warn("several-values", item+" has several different values without weights; the wavelength was left open")
		return nil
	}
	g.out.WavelengthA = x
	return nil
}

// probe reads what files write for it; electrons are inferred from a wavelength
// below 0.1 angstrom.
func (g *gatherer) probe() {
	for _, name := range probeNames {
		_, item, v, ok := g.single("probe", []string{name})
		if !ok {
			continue
		}
		low := strings.ToLower(v.Text)
		for _, p := range []string{"electron", "x-ray", "neutron", "gamma"} {
			if strings.Contains(low, p) {
				if low != p && !strings.HasPrefix(item, "_exptl") {
					g.warn("probe", fmt.Sprintf("%s %q was taken as %s", item, v.Text, p))
				}
				g.out.Probe = p
				break
			}
		}
		if g.out.Probe != "" {
			break
		}
	}
	if g.out.WavelengthA == 0 || g.out.WavelengthA >= electronLimitA {
		return
	}
	switch g.out.Probe {
	case "":
		g.out.Probe = "electron"
		g.warn("probe", fmt.Sprintf("the probe was taken as electron, as the wavelength is %g A", g.out.WavelengthA))
	case "electron":
	default:
		g.warn("probe", fmt.Sprintf("the probe is given as %s but a wavelength of %g A belongs to electrons", g.out.Probe, g.out.WavelengthA))
	}
}
