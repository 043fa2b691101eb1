package analysis_test

// axisMutations are faults in strength axes, ghosts and halves.
var axisMutations = []mutation{
	{
		name: "the axis crystals takes the third position", file: "analysis/compare.go", pkg: "analysis",
		old:      `strengths, err := x.Pairs.Crystals(others)`,
		new:      `strengths, err := x.Pairs.Third(intensity.Merge(s.intake.Catalogue.Len(), s.scaled[x.Contrast.Crystal].Positions[max(0, s.thirdOf(x.Contrast))]))`,
		killedBy: []string{"TestNullSeriesWithRisingDeviations"},
	},
	{
		name: "the axis crystals takes the crystal itself", file: "analysis/compare.go", pkg: "analysis",
		old:      `if i == c.Crystal || i == c.ThickCrystal {`,
		new:      `if i != c.Crystal {`,
		killedBy: []string{"TestNullSeriesWithRisingDeviations"},
	},
	{
		name: "the axis crystals without own shell means", file: "analysis/difference/crystals.go", pkg: "analysis/difference",
		old:      `local := mean[shell] * p.Epsilon[i]`,
		new:      `local := mean[0] * p.Epsilon[i]`,
		killedBy: []string{"TestStrengthsHaveMeanOneInEveryShell"},
	},
	{
		name: "ghost with the sign of the sum", file: "analysis/difference/ghost.go", pkg: "analysis/difference",
		old:      `g.slope[i] = c1*v1 - c2*v2`,
		new:      `g.slope[i] = c1*v1 + c2*v2`,
		killedBy: []string{"TestGhostHeteroscedastic"},
	},
	{
		name: "ghost of the opposite sign", file: "analysis/difference/ghost.go", pkg: "analysis/difference",
		old:      `out[at] = flow[k] / density[k]`,
		new:      `out[at] = -flow[k] / density[k]`,
		killedBy: []string{"TestGhostHeteroscedastic", "TestGhostTweedie"},
	},
	{
		name: "ghost of windows of the opposite sign", file: "analysis/difference/ghost.go", pkg: "analysis/difference",
		old:      `(flow[2*i] - flow[2*i+1])`,
		new:      `(flow[2*i+1] - flow[2*i])`,
		killedBy: []string{"TestGhostWindows"},
	},
	{
		name: "matched pairs across crystals", file: "analysis/difference/pair.go", pkg: "analysis/difference",
		old:      `case !s.settings.SameCrystal:`,
		new:      `case !s.settings.SameCrystal && s.thin.Phi == nil:`,
		killedBy: []string{"TestPairFallsBackToMerged"},
	},
	{
		name: "halves by row and not by raw index", file: "analysis/intensity/halves.go", pkg: "analysis/intensity",
		old:      `half[o] = side[r]`,
		new:      `half[o] = side[r] ^ uint8(o&1)`,
		killedBy: []string{"TestHalves"},
	},
	{
		name: "the axis crystals takes the third position, on many beams", file: "analysis/compare.go", pkg: "io/manifest",
		old:      `strengths, err := x.Pairs.Crystals(others)`,
		new:      `strengths, err := x.Pairs.Third(intensity.Merge(s.intake.Catalogue.Len(), s.scaled[x.Contrast.Crystal].Positions[max(0, s.thirdOf(x.Contrast))]))`,
		killedBy: []string{"TestManyBeamAxes"},
	},
	{
		name: "the tipping ratio is the farther one", file: "analysis/difference/tipping.go", pkg: "analysis/difference",
		old:      `math.Exp(math.Min(math.Abs(up), math.Abs(down)))`,
		new:      `math.Exp(math.Max(math.Abs(up), math.Abs(down)))`,
		killedBy: []string{"TestTippingNearest"},
	},
	{
		name: "halves of the two positions dealt apart", file: "analysis/compare.go", pkg: "analysis",
		old:      `ka, kb := intensity.MergeHalves(n, x.thick, key)`,
		new:      `kb, ka := intensity.MergeHalves(n, x.thick, key)`,
		killedBy: []string{"TestHalvesOfEqualRowsAreEqual"},
	},
	{
		name: "the result shows the ghost of the mean on every axis", file: "analysis/curves.go", pkg: "analysis",
		old:      `ghost, err := x.Pairs.Ghost(axis)`,
		new:      `ghost, err := x.Pairs.Ghost(difference.AxisMean)`,
		killedBy: []string{"TestGhostInTheResultFollowsTheCurve"},
	},
}

// scalingMutations are faults in scale, variances and the order of sums.
var scalingMutations = []mutation{
	{
		name: "observed variance in the scale weights", file: "analysis/scaling/worker.go", pkg: "analysis/scaling",
		old:      `law := t.laws[o.p].at(x)`,
		new:      `law := t.laws[o.p].at(t.y[i])`,
		killedBy: []string{"TestVarianceIsThatOfTheExpectation"},
	},
	{
		name: "observed variance in merging", file: "analysis/scaling/noise.go", pkg: "analysis/scaling",
		old:      `out[i] = m.A*m.A*fit.VarExpected[i] + x*x`,
		new:      `out[i] = m.A*m.A*in.Var[i] + x*x`,
		killedBy: []string{"TestVarianceIsThatOfTheExpectation"},
	},
	{
		name: "observed variance in merging, seen by the Study", file: "analysis/scaling/noise.go", pkg: "analysis",
		old:      `out[i] = m.A*m.A*fit.VarExpected[i] + x*x`,
		new:      `out[i] = m.A*m.A*in.Var[i] + x*x`,
		killedBy: []string{"TestHalvedSigmas"},
	},
	{
		name: "noise model without its multiplicative part", file: "analysis/scaling/noise.go", pkg: "analysis/scaling",
		old:      `out[i] = m.A*m.A*fit.VarExpected[i] + x*x`,
		new:      `out[i] = m.A*m.A*fit.VarExpected[i] + 0*x`,
		killedBy: []string{"TestVarianceFormula"},
	},
	{
		name: "gauge of K dropped", file: "analysis/scaling/reduce.go", pkg: "analysis/scaling",
		old:      "\tif p == base {\n\t\treturn\n\t}\n\tif a.flat {",
		new:      "\tif a.flat {",
		killedBy: []string{"TestGauge"},
	},
	{
		name: "gauge of K over coefficients and not observations", file: "analysis/scaling/reduce.go", pkg: "analysis/scaling",
		old:      `v := append([]float64(nil), mean...)`,
		new:      "v := make([]float64, len(mean))\n\tfor i := range v {\n\t\tv[i] = 1\n\t}",
		killedBy: []string{"TestGauge"},
	},
	{
		name: "gauge of B dropped", file: "analysis/scaling/reduce.go", pkg: "analysis/scaling",
		old:      `if withB && p != base {`,
		new:      `if withB {`,
		killedBy: []string{"TestGauge"},
	},
	{
		name: "a scale curve that nothing fixes is kept", file: "analysis/scaling/soft.go", pkg: "analysis/scaling",
		old:      `if b.kind != commonCurve || !(se[i] > f.set.MaxLnKSE) || !f.free.common {`,
		new:      `if b.kind != commonCurve || !(se[i] > 1e300*f.set.MaxLnKSE) || !f.free.common {`,
		killedBy: []string{"TestNoEquivalents"},
	},
	{
		name: "a scale curve that nothing fixes is kept, seen by the Study", file: "analysis/scaling/soft.go", pkg: "analysis",
		old:      `if b.kind != commonCurve || !(se[i] > f.set.MaxLnKSE) || !f.free.common {`,
		new:      `if b.kind != commonCurve || !(se[i] > 1e300*f.set.MaxLnKSE) || !f.free.common {`,
		killedBy: []string{"TestScaleWithoutEquivalents"},
	},
	{
		name: "reported sigmas taken as they are", file: "analysis/scaling/noise.go", pkg: "analysis",
		old:      `out[i] = m.A*m.A*fit.VarExpected[i] + x*x`,
		new:      `out[i] = fit.VarExpected[i] + x*x`,
		killedBy: []string{"TestSizesIgnoreAFactorOnSigmas"},
	},
	{
		name: "sums of chunks in another order with two workers", file: "analysis/scaling/pass.go", pkg: "analysis/scaling",
		old:      `total := parts[0]`,
		new:      "if workers == 2 {\n\t\tparts[0], parts[len(parts)-1] = parts[len(parts)-1], parts[0]\n\t}\n\ttotal := parts[0]",
		killedBy: []string{"TestSameBitsAndUntouchedInput"},
	},
}

// resampleMutations are faults in bands, flips and the handling of several tests.
var resampleMutations = []mutation{
	{
		name: "flips by rank and not by reflection", file: "analysis/resample/flippass.go", pkg: "analysis/resample",
		old:      `p.y[k], p.unit[k] = y[e], e`,
		new:      `p.y[k], p.unit[k] = y[e], int32(k)`,
		killedBy: []string{"TestFlipTestAgainstPlainLoop"},
	},
	{
		name: "flips of single elements where blocks are given", file: "analysis/resample/flip.go", pkg: "analysis/resample",
		old:      `u := unitsOf(len(y), s.Blocks)`,
		new:      `u := unitsOf(len(y), nil)`,
		killedBy: []string{"TestFlipTestMaximum"},
	},
	{
		name: "flips of half reflections", file: "analysis/curve/banded.go", pkg: "analysis/curve",
		old: "\tsets := []resample.FlipSet{{Windows: windows}}\n\tif p.s2 != nil {",
		new: `	half := make([]float64, 0, 2*len(z))
	for _, v := range z {
		half = append(half, v/2, v/2)
	}
	z, windows = half, slices.Clone(windows)
	for i := range windows {
		windows[i].Lo, windows[i].Hi = 2*windows[i].Lo, 2*windows[i].Hi
	}
	sets := []resample.FlipSet{{Windows: windows}}
	if p.s2 != nil && len(z) == 0 {`,
		killedBy: []string{"TestByStrengthParts"},
	},
	{
		name: "the test forgets the resolution", file: "analysis/curve/banded.go", pkg: "analysis/curve",
		old:      `if p.s2 != nil {`,
		new:      `if p.s2 != nil && len(p.s2) == 0 {`,
		killedBy: []string{"TestByStrengthParts"},
	},
	{
		name: "the Study's test forgets the resolution", file: "analysis/curves.go", pkg: "analysis",
		old:      `o.S2 = x.Pairs.S2`,
		new:      `o.S2 = nil`,
		killedBy: []string{"TestContrastSaysWhatWouldBeSeen"},
	},
	{
		name: "simultaneous band with the pointwise multiplier", file: "analysis/resample/bands.go", pkg: "analysis/resample",
		old:      `half := b.Multiplier * b.SE[g]`,
		new:      `half := 1.96 * b.SE[g]`,
		killedBy: []string{"TestBandsAgainstPlainLoop", "TestBandsCoverage"},
	},
	{
		name: "simultaneous band in the result is the pointwise one", file: "analysis/curves.go", pkg: "analysis",
		old:      `LoSim: b.LoSim, HiSim: b.HiSim, P: b.P`,
		new:      `LoSim: b.Lo, HiSim: b.Hi, P: b.P`,
		killedBy: []string{"TestContrastSaysWhatWouldBeSeen"},
	},
	{
		name: "BCa acceleration of the opposite sign", file: "analysis/resample/bca.go", pkg: "analysis/resample",
		old:      `influence[g] = mean + b.Estimate[j] - v[j]`,
		new:      `influence[g] = v[j] - mean - b.Estimate[j]`,
		killedBy: []string{"TestLawSchoolJackknife"},
	},
	{
		name: "BCa levels with the acceleration's sign turned", file: "analysis/resample/bca.go", pkg: "analysis/resample",
		old:      `d := 1 - a*(z0+z)`,
		new:      `d := 1 + a*(z0+z)`,
		killedBy: []string{"TestBCaLevels"},
	},
	{
		name: "BCa without the bias", file: "analysis/resample/bca.go", pkg: "analysis/resample",
		old:      `return normCDF(z0 + (z0+z)/d)`,
		new:      `return normCDF(z / d)`,
		killedBy: []string{"TestBCaLevels"},
	},
	{
		name: "weight table of variance 1.03", file: "analysis/resample/weights.go", pkg: "analysis/resample",
		old: `[...]int{94, 95, 46, 16, 4, 1}`,
		new: `[...]int{98, 87, 50, 16, 4, 1}`, sampled: true,
		killedBy: []string{"TestPoissonTable"},
	},
	{
		name: "Holm without the step", file: "analysis/resample/multiple.go", pkg: "analysis/resample",
		old:      `return float64(n - rank + 1) }, up)`,
		new:      `return float64(n) }, up)`,
		killedBy: []string{"TestMultiple"},
	},
	{
		name: "Holm without the running maximum", file: "analysis/resample/multiple.go", pkg: "analysis/resample",
		old:      `return float64(n - rank + 1) }, up)`,
		new:      `return float64(n - rank + 1) }, none)`,
		killedBy: []string{"TestMultiple"},
	},
	{
		name: "answers without Holm", file: "analysis/answers.go", pkg: "analysis",
		old:      `return resample.Holm(p)`,
		new:      "_, err := resample.Holm(p)\n\treturn append([]float64(nil), p...), err",
		killedBy: []string{"TestAnswersAllowForCrystals"},
	},
}
