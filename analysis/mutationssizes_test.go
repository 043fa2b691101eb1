package analysis_test

// sizeMutations are faults in exchange, curb, offset and what is pooled from them.
var sizeMutations = []mutation{
	{
		name: "offset left out of the leading model", file: "analysis/size/moments.go", pkg: "analysis/size",
		old:      `return MQO, span, nil`,
		new:      `return MQ, span, nil`,
		killedBy: []string{"TestOffset"},
	},
	{
		name: "offset left out, seen by the Study", file: "analysis/size/moments.go", pkg: "analysis",
		old:      `return MQO, span, nil`,
		new:      `return MQ, span, nil`,
		killedBy: []string{"TestOffsetIsNoExchange"},
	},
	{
		name: "offset alike in all shells", file: "analysis/size/system.go", pkg: "analysis/size",
		old:      `c.inverse[sh] = s.ref2 / mean`,
		new:      `c.inverse[sh] = 1 + 1e-3*s.ref2/mean`,
		killedBy: []string{"TestExactRecovery"},
	},
	{
		name: "shell means left out of the error of the instrument", file: "analysis/size/instrument.go", pkg: "analysis/size",
		old:      "p1[i] += (f.u[i]*g[i] - s1[s]/f.sum[s]) * (f.y1[i] - 1)\n\t\t\t\tp2[i] += (f.u[i]*g[i] - s2[s]/f.sum[s]) * (f.y2[i] - 1)",
		new:      "p1[i] += f.u[i] * g[i] * (f.y1[i] - 1)\n\t\t\t\tp2[i] += f.u[i] * g[i] * (f.y2[i] - 1)",
		killedBy: []string{"TestJackknife", "TestCoverage"},
	},
	{
		name: "shell means left out of the error of the moments", file: "analysis/size/system.go", pkg: "analysis/size",
		old:      `p := own[i]*r[i] + (g1[s]*(c.y1[i]-1)+g2[s]*(c.y2[i]-1))/c.sum[s]`,
		new:      `p := own[i] * r[i]`,
		killedBy: []string{"TestJackknife"},
	},
	{
		name: "giants not clipped", file: "analysis/size/instrument.go", pkg: "analysis/size",
		old:      `g[i] = math.Min(z, clip)`,
		new:      `g[i] = math.Min(z, 1e6*clip)`,
		killedBy: []string{"TestTwoInstruments"},
	},
	{
		name: "a weak axis gives a Student interval", file: "analysis/size/instrument.go", pkg: "analysis/size",
		old:      `if out.F < weakF {`,
		new:      `if out.F < 0 {`,
		killedBy: []string{"TestWeakAxis"},
	},
	{
		name: "a hopeless axis gives an estimate", file: "analysis/size/instrument.go", pkg: "analysis/size",
		old:      `if out.F < inestimableF || st.a1 < 0 {`,
		new:      `if out.F < 0 || st.a1 < 0 {`,
		killedBy: []string{"TestWeakAxis"},
	},
	{
		name: "curb with the noise of its square", file: "analysis/size/system.go", pkg: "analysis/size",
		old:      `square, cube = j*j-in.VarThin[i], j*(j*j-3*in.VarThin[i])`,
		new:      `square, cube = j*j, j*j*j`,
		killedBy: []string{"TestTwoInstruments"},
	},
	{
		name: "moment ratio without cross products", file: "analysis/size/correlation.go", pkg: "analysis/size",
		old:      "vThin, dThin := h.product(e[0], e[1], weight, out.N)\n\tvThick, dThick := h.product(e[2], e[3], weight, out.N)",
		new:      "vThin, dThin := h.product(e[0], e[0], weight, out.N)\n\tvThick, dThick := h.product(e[2], e[2], weight, out.N)",
		killedBy: []string{"TestTrueCorrelation"},
	},
	{
		name: "correlation from halves that share raw indices", file: "analysis/size/correlation.go", pkg: "analysis/size",
		old:      `[][2]int{{0, 3}, {1, 2}}`,
		new:      `[][2]int{{0, 2}, {1, 3}}`,
		killedBy: []string{"TestTrueCorrelationOfOrientations"},
	},
	{
		name: "the Study's bracket has its ends turned", file: "analysis/sizes.go", pkg: "analysis",
		old:      `{{difference.AxisHalfThin, &r.Bracket.Thin, &r.Bracket.ThinSlope}, {difference.AxisHalfThick,`,
		new:      `{{difference.AxisHalfThick, &r.Bracket.Thin, &r.Bracket.ThinSlope}, {difference.AxisHalfThin,`,
		killedBy: []string{"TestBracketEndsErrOnTheirSides"},
	},
	{
		name: "the bracket leaves one slope out", file: "analysis/sizes.go", pkg: "analysis",
		old:      `b.Hi = max(b.Thin.Hi, b.Thick.Hi, b.ThinSlope.Hi, b.ThickSlope.Hi)`,
		new:      `b.Hi = max(b.Thin.Hi, b.Thick.Hi)`,
		killedBy: []string{"TestBracketHoldsWhatTheModelMisses"},
	},
	{
		name: "a curb without an inverse is allowed for in the swapped pair", file: "analysis/controlsswap.go", pkg: "analysis",
		old:      `const turnsOver = 1. / 6`,
		new:      `const turnsOver = 10.`,
		killedBy: []string{"TestSwappedPairFailsUnderSaturation"},
	},
	{
		name: "minimum m is 0", file: "analysis/sizes.go", pkg: "analysis",
		old:      `r.MinimumM = size.MinimumVisible(f.M.SE, s.settings.Level, 0.8)`,
		new:      `r.MinimumM = 0 * f.M.SE`,
		killedBy: []string{"TestContrastSaysWhatWouldBeSeen"},
	},
	{
		name: "minimum m is 0 where nothing can be estimated", file: "analysis/sizes.go", pkg: "analysis",
		old:      `r.MinimumM = inf`,
		new:      `r.MinimumM = 0`,
		killedBy: []string{"TestContrastSaysWhatWouldBeSeen"},
	},
	{
		name: "minimum m without the power", file: "analysis/size/effect.go", pkg: "analysis/size",
		old:      `return (distuv.UnitNormal.Quantile(0.5+level/2) + distuv.UnitNormal.Quantile(power)) * se`,
		new:      `return distuv.UnitNormal.Quantile(0.5+level/2) * se`,
		killedBy: []string{"TestQuantiles"},
	},
	{
		name: "resolution after the fitted B", file: "analysis/curves.go", pkg: "analysis",
		old:      `thin[i] *= math.Exp(-2 * x.b[0] * s2)`,
		new:      `thin[i] *= math.Exp(-2 * x.b[1] * s2)`,
		killedBy: []string{"TestResolutionKeepsB"},
	},
	{
		name: "Hartung-Knapp with the normal quantile", file: "analysis/pool/effects.go", pkg: "analysis/pool",
		old:      `t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: df}.Quantile((1 + level) / 2)`,
		new:      `t := z`,
		killedBy: []string{"TestJoinBCGIntervals", "TestJoinOfThreeIsStudents"},
	},
	{
		name: "Hartung-Knapp with the plain error", file: "analysis/pool/effects.go", pkg: "analysis/pool",
		old:      `e.RandomSE = math.Sqrt(spread / (df * ws))`,
		new:      `e.RandomSE = e.NormalSE`,
		killedBy: []string{"TestJoinBCG", "TestJoinBCGIntervals"},
	},
	{
		name: "crystals that agree by chance say more of others than of themselves", file: "analysis/pool/effects.go", pkg: "analysis/pool",
		old:      `like := math.Max(e.RandomSE, e.NormalSE)`,
		new:      `like := e.RandomSE`,
		killedBy: []string{"TestJoinOfThreeThatAgree"},
	},
	{
		name: "in crystals like these is the fixed effect", file: "analysis/join.go", pkg: "analysis",
		old:      `r.LikeThese = interval(e.Random, e.LikeLo, e.LikeHi, "")`,
		new:      `r.LikeThese = interval(e.Fixed, e.FixedLo, e.FixedHi, "")`,
		killedBy: []string{"TestJoinedCrystals"},
	},
	{
		name: "the answer forgets the smallest m", file: "analysis/answersexchange.go", pkg: "analysis",
		old:      `worst = math.Max(worst, c.MinimumM)`,
		new:      `worst = 0 * math.Max(worst, c.MinimumM)`,
		killedBy: []string{"TestNothingFoundSaysWhatWouldBeSeen"},
	},
	{
		name: "growth of m and not of -ln(1-m)", file: "analysis/join.go", pkg: "analysis",
		old:      `mu := -math.Log(1 - v.Fit.M.Value)`,
		new:      `mu := 0.5 * v.Fit.M.Value`,
		killedBy: []string{"TestGrowthOfAKnownExchange"},
	},
}

// rowMutations are faults in symmetry, local means, rows and files.
var rowMutations = []mutation{
	{
		name: "a Laue class that lacks an operator", file: "analysis/crystal/reflections.go", pkg: "analysis/crystal",
		old:      "for i := 1; i < len(g.half); i++ {\n\t\tv := g.half[i].of(h, k, l)\n\t\thi, lo",
		new:      "for i := 1; i < len(g.half)-1; i++ {\n\t\tv := g.half[i].of(h, k, l)\n\t\thi, lo",
		killedBy: []string{"TestReflectionDefinitions", "TestCanonicalIsPlain"},
	},
	{
		name: "Laue class of the transposed operators", file: "analysis/crystal/reflections.go", pkg: "analysis/crystal",
		old:      `w[i] += int64(o.R[i][j]) * base[j]`,
		new:      `w[i] += int64(o.R[j][i]) * base[j]`,
		killedBy: []string{"TestMultiplicity", "TestReflectionDefinitions"},
	},
	{
		name: "Friedel mates apart", file: "analysis/crystal/reflections.go", pkg: "analysis/crystal",
		old:      "\tif hi >= -lo {\n\t\treturn hi, true\n\t}\n\treturn -lo, g.point.inversion",
		new:      "\tif hi >= -lo || !g.point.inversion {\n\t\treturn hi, true\n\t}\n\treturn -lo, g.point.inversion",
		killedBy: []string{"TestReflectionDefinitions"},
	},
	{
		name: "epsilon is 1", file: "analysis/crystal/reflections.go", pkg: "analysis/crystal",
		old:      "\t\t\tn++\n\t\t}\n\t}\n\treturn n\n}",
		new:      "\t\t\tn = 1\n\t\t}\n\t}\n\treturn n\n}",
		killedBy: []string{"TestReflectionDefinitions"},
	},
	{
		name: "epsilon ignored in the means of the catalogue", file: "analysis/intensity/catalogue.go", pkg: "analysis/intensity",
		old:      `value[u] = m.J[u] / float64(c.Epsilon[u])`,
		new:      `value[u] = m.J[u]`,
		killedBy: []string{"TestCatalogueMeans", "TestForbiddenOverItsOwnShell"},
	},
	{
		name: "epsilon ignored in the means of the pairs", file: "analysis/difference/local.go", pkg: "analysis/difference",
		old:      `p.MeanThin[i], p.MeanThick[i] = thin[s]*p.Epsilon[i], thick[s]*p.Epsilon[i]`,
		new:      `p.MeanThin[i], p.MeanThick[i] = thin[s], thick[s]`,
		killedBy: []string{"TestPairMatched", "TestPairMergedEqualsMerge"},
	},
	{
		name: "epsilon ignored in the sizes", file: "analysis/compare.go", pkg: "analysis",
		old:      `in.Thin[i], in.Thick[i] = p.Thin[i]/e, p.Thick[i]/e`,
		new:      `in.Thin[i], in.Thick[i] = p.Thin[i], p.Thick[i]`,
		killedBy: []string{"TestEpsilonIsDividedOut"},
	},
	{
		name: "epsilon ignored in the halves", file: "analysis/compare.go", pkg: "analysis",
		old:      `return m.J[u] / x.Pairs.Epsilon[i]`,
		new:      `return m.J[u]`,
		killedBy: []string{"TestEpsilonIsDividedOut"},
	},
	{
		name: "epsilon ignored in the moments", file: "analysis/intensity/moments.go", pkg: "analysis/intensity",
		old:      `local := sum[s] / h.count[s] * float64(cat.Epsilon[u])`,
		new:      `local := sum[s] / h.count[s]`,
		killedBy: []string{"TestHalfMomentsOfKnownStrengths"},
	},
	{
		name: "second moment of merged values", file: "analysis/intensity/moments.go", pkg: "analysis/intensity",
		old:      `value[1][i] = a * b`,
		new:      `value[1][i] = 0.25 * (a + b) * (a + b)`,
		killedBy: []string{"TestHalfMoments", "TestHalfMomentsNeedNoSigma"},
	},
	{
		name: "forbidden over the mean of the first shell", file: "analysis/intensity/forbidden.go", pkg: "analysis/intensity",
		old:      `r, v := m.J[u]/mean[s], m.Var[u]/(mean[s]*mean[s])`,
		new:      `r, v := m.J[u]/mean[0], m.Var[u]/(mean[0]*mean[0])`,
		killedBy: []string{"TestForbiddenOverItsOwnShell"},
	},
	{
		name: "copies counted as repeats", file: "analysis/intensity/rows.go", pkg: "analysis/intensity",
		old:      `a.Policy = RowsCopies`,
		new:      `a.Policy = RowsRepeats`,
		killedBy: []string{"TestCollapseCopies"},
	},
	{
		name: "copies counted as repeats, seen by the Study", file: "analysis/intensity/rows.go", pkg: "analysis",
		old:      `a.Policy = RowsCopies`,
		new:      `a.Policy = RowsRepeats`,
		killedBy: []string{"TestCopiedRows"},
	},
	{
		name: "gzip that is cut off reads as whole", file: "io/internal/text/source.go", pkg: "io/internal/text",
		old:      `s.fault = err`,
		new:      `_ = err`,
		killedBy: []string{"TestSourceFailures"},
	},
	{
		name: "gzip that is cut off reads as whole, seen by the reader", file: "io/internal/text/source.go", pkg: "io/cif",
		old:      `s.fault = err`,
		new:      `_ = err`,
		killedBy: []string{"TestBadInput"},
	},
	{
		name: "removed negatives pass", file: "analysis/intensity/negatives.go", pkg: "analysis/intensity",
		old:      `float64(n.Observed[0]) < 0.3*n.Expected[0]`,
		new:      `float64(n.Observed[0]) < -0.3*n.Expected[0]`,
		killedBy: []string{"TestRemovedNegativesAreNoticed"},
	},
}
