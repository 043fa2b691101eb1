package analysis

import (
	"slices"
)

// The checks of the ledger by name.
const (
	checkRows       = "rows against observations"
	checkNegatives  = "negatives removed"
	checkCut        = "cut or clipped list"
	checkIndexing   = "indexing margin"
	checkSigmas     = "sigma calibration"
	checkScaleCurve = "scale curve"
	checkScaleRatio = "scale ratio against thickness ratio"
	checkScatter    = "scatter of equivalents"
	checkAxis       = "strength axis"
	checkDeviations = "deviations"
	checkOffset     = "additive offset"
	checkHighCounts = "high counts"
	checkModel      = "model against curve"
	checkThird      = "axis third against leading"
	checkWeighted   = "axis inverse-variance against leading"
	checkGhost      = "ghost of noise"
	checkBlocks     = "angle blocks"
	checkGiants     = "giants"
	checkScale      = "scale variants"
	checkAnchors    = "anchors"
	checkExclusions = "exclusions"
	checkFriedel    = "Friedel mates"
	checkBleed      = "bleed from neighbours"
	checkDouble     = "double scattering"
	checkFrames     = "scatter of frames"
	checkTilt       = "tilt within a position"
	checkIce        = "ice rings"
	checkCommon     = "common reflections"
	checkLying      = "crystals that lie alike"
	checkTipping    = "tipping ratio"
	checkDoseOrder  = "dose order"
	checkDoseGrowth = "growth of B with dose"
	checkCrystals   = "number of crystals"
	checkForbidden  = "forbidden reflections"
	checkNull       = "null of the centring"
	checkGroup      = "space group"
	checkLaue       = "Laue class"
	checkReplicates = "replicate position"
)

// LedgerChecks lists the checks that the ledger can hold, in the order of its entries.
// An entry under another name is a panic.
func LedgerChecks() []string {
	return []string{
		checkRows, checkNegatives, checkCut, checkLaue, checkIndexing, checkSigmas, checkScaleCurve, checkScaleRatio, checkScatter,
		checkAxis, checkDeviations, checkOffset, checkHighCounts, checkModel, checkThird, checkWeighted, checkGhost, checkBlocks, checkGiants,
		checkBleed, checkDouble, checkFrames, checkTilt, checkIce, checkCommon, checkLying, checkTipping, checkGroup,
		checkScale, checkAnchors, checkExclusions, checkFriedel,
		checkDoseOrder, checkDoseGrowth, checkCrystals, checkForbidden, checkNull, checkReplicates,
	}
}

func mustBeCheck(name string) {
	if !slices.Contains(LedgerChecks(), name) {
		panic("analysis: ledger: no check is named " + name)
	}
}
