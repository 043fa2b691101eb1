package main

import (
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"
	"text/tabwriter"

	"github.com/spf13/cobra"

	"thinward/analysis"
	"thinward/analysis/pool"
	"thinward/io/result"
)

// gathered is what gather --json prints.
type gathered struct {
	Reports   []gatheredReport  `json:"reports"`
	Crystals  []gatheredCrystal `json:"crystals"`
	M         *gatheredMean     `json:"m"`
	Slopes    []gatheredSlope   `json:"slopes"`
	Slope     *gatheredMean     `json:"slope_per_100nm"`
	SameSign  int               `json:"same_sign"`
	SignP     float64           `json:"sign_p"`
	SmallestP float64           `json:"smallest_sign_p"`
	Cautions  []string          `json:"cautions"`
}

type gatheredReport struct {
	Folder string   `json:"folder"`
	Series string   `json:"series"`
	Fails  []string `json:"ledger_fails,omitempty"` // checks that the ledger of the report says fail
}

type gatheredCrystal struct {
	Report      string     `json:"report"`
	Crystal     string     `json:"crystal"`
	Contrast    string     `json:"contrast"`
	ThicknessNM [2]float64 `json:"thickness_nm"`
	Axis        string     `json:"strength_axis"`
	Model       string     `json:"model"`
	M           float64    `json:"m"`
	SE          float64    `json:"se"`
	Lo          float64    `json:"lo"`
	Hi          float64    `json:"hi"`
	F           float64    `json:"f"`
	Weight      float64    `json:"weight"`
	Why         string     `json:"why,omitempty"`
}

type gatheredSlope struct {
	Report  string  `json:"report"`
	Crystal string  `json:"crystal"`
	Slope   float64 `json:"slope_per_100nm"`
	SE      float64 `json:"se"`
}

type gatheredMean struct {
	N         int               `json:"n"`
	InThese   analysis.Interval `json:"in_these_crystals"`
	LikeThese analysis.Interval `json:"in_crystals_like_these"`
	Q         float64           `json:"q"`
	QP        float64           `json:"q_p"`
	Tau2      float64           `json:"tau2"`
	TauLo     float64           `json:"tau_lo"` // the spread that the crystals allow, by the Q-profile
	TauHi     float64           `json:"tau_hi"`
	I2        float64           `json:"i2"`
	Why       string            `json:"why,omitempty"`
}

func (a *app) gather() *cobra.Command {
	c := &cobra.Command{
		Use:   "gather DIR...",
		Short: "Pool several reports, of several series or laboratories; their raw data are not needed",
		Long: `Reads result.json of each report (a folder, or the file itself), takes the exchange m
of the primary contrast of every crystal, and answers twice: in these crystals
(fixed effect) and in crystals like these (Hartung and Knapp). Two reports that
share an input file are refused: no crystal may count twice.`,
		Example: `  thinward gather monday friday
  thinward gather lab1/result.json lab2/result.json --json`,
		Args: cobra.MinimumNArgs(1),
		RunE: func(_ *cobra.Command, args []string) error {
			g, err := gatherReports(args)
			if err != nil {
				return err
			}
			if a.json {
				return result.EncodeAny(a.out, *g)
			}
			return g.print(a.out)
		},
	}
	c.Flags().BoolVar(&a.json, "json", false, "print JSON")
	return c
}

func gatherReports(paths []string) (*gathered, error) {
	g := &gathered{}
	owner := map[string]int{}
	for n, path := range paths {
		r, err := openReport(path)
		if err != nil {
			return nil, err
		}
		for _, in := range r.result.Inputs {
			if in.SHA256 == "" {
				continue
			}
			if other, ok := owner[in.SHA256]; ok && other != n {
				return nil, fmt.Errorf("%s and %s are made from the same file (%s/%s, %s): a crystal may count only once; leave one of the reports out", paths[other], path, in.Crystal, in.Position, in.Path)
			}
			owner[in.SHA256] = n
		}
		g.add(path, r.result)
	}
	return g, g.pool()
}

func (g *gathered) add(path string, r *analysis.Result) {
	report := gatheredReport{Folder: path, Series: r.Series}
	for _, e := range r.Ledger {
		if e.Verdict == analysis.VerdictFails && !slices.Contains(report.Fails, e.Check) {
			report.Fails = append(report.Fails, e.Check)
		}
	}
	g.Reports = append(g.Reports, report)
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		if !c.Primary || c.ThickCrystal != "" {
			continue
		}
		k := gatheredCrystal{
			Report: path, Crystal: c.Crystal, Contrast: c.Thin + " - " + c.Thick, ThicknessNM: c.ThicknessNM, Axis: c.StrengthAxis, Model: c.Exchange.Model,
			M: c.Exchange.M, SE: c.Exchange.SE, Lo: c.Exchange.Lo, Hi: c.Exchange.Hi, F: c.Exchange.F, Why: c.Exchange.Why,
		}
		if math.IsNaN(k.M) || !(k.SE > 0) || math.IsInf(k.SE, 0) {
			if k.Why == "" {
				k.Why = "m has no standard error"
			}
			k.SE = math.NaN()
		}
		g.Crystals = append(g.Crystals, k)
	}
	if r.Thickness == nil {
		return
	}
	for _, l := range r.Thickness.Lines {
		// The interval of a line is that of a normal at 95 %.
		se := (l.Slope.Hi - l.Slope.Lo) / (2 * 1.959963984540054)
		if l.Why == "" && se > 0 && !math.IsInf(se, 0) && !math.IsNaN(l.Slope.Value) {
			g.Slopes = append(g.Slopes, gatheredSlope{Report: path, Crystal: l.Crystal, Slope: l.Slope.Value, SE: se})
		}
	}
}

func (g *gathered) pool() error {
	var m, se []float64
	total := 0.0
	for _, k := range g.Crystals {
		if !math.IsNaN(k.SE) {
			m, se = append(m, k.M), append(se, k.SE)
			total += 1 / (k.SE * k.SE)
		}
	}
	if len(m) == 0 {
		return errors.New("m is estimable in no crystal of these reports: there is nothing to pool")
	}
	for i := range g.Crystals {
		k := &g.Crystals[i]
		if k.Weight = 0; !math.IsNaN(k.SE) {
			k.Weight = 1 / (k.SE * k.SE) / total
		}
	}
	var err error
	if g.M, err = meanOf(m, se); err != nil {
		return err
	}
	g.SameSign, g.SignP, g.SmallestP = pool.Signs(m)
	if len(g.Slopes) > 0 {
		var slope, slopeSE []float64
		for _, s := range g.Slopes {
			slope, slopeSE = append(slope, s.Slope), append(slopeSE, s.SE)
		}
		if g.Slope, err = meanOf(slope, slopeSE); err != nil {
			return err
		}
	}
	g.caution()
	return nil
}

func meanOf(y, se []float64) (*gatheredMean, error) {
	e, err := pool.Join(y, se, 0)
	if err != nil {
		return nil, err
	}
	r := &gatheredMean{
		N: e.K, Q: e.Q, QP: e.QP, Tau2: math.NaN(), I2: math.NaN(),
		InThese:   analysis.Interval{Value: e.Fixed, Lo: e.FixedLo, Hi: e.FixedHi},
		LikeThese: analysis.Interval{Value: e.Random, Lo: e.LikeLo, Hi: e.LikeHi},
	}
	if r.TauLo, r.TauHi, err = pool.TauInterval(y, se, 0); err != nil {
		return nil, err
	}
	if e.Estimable {
		r.Tau2, r.I2 = e.Tau2, e.I2
	} else {
		r.Why = fmt.Sprintf("tau^2 and I^2 are not estimable from %s (five are needed)", plural(e.K, "crystal"))
	}
	if e.K == 1 {
		r.LikeThese.Why = "one crystal says nothing of others"
	}
	return r, nil
}

// weakF is the first-stage F below which the standard error of m is too short (the report
// then prints an Anderson-Rubin interval).
const weakF = 50

func (g *gathered) caution() {
	for _, r := range g.Reports {
		if len(r.Fails) > 0 {
			g.Cautions = append(g.Cautions, fmt.Sprintf("%s: its ledger says that %s fails: read there before you count on its m.", r.Folder, strings.Join(r.Fails, ", ")))
		}
	}
	axes, models := map[string]bool{}, map[string]bool{}
	owner := map[string]string{}
	lo, hi := math.Inf(1), 0.0
	for _, k := range g.Crystals {
		if math.IsNaN(k.SE) {
			g.Cautions = append(g.Cautions, fmt.Sprintf("%s, %s: left out: %s.", k.Report, k.Crystal, k.Why))
			continue
		}
		if other, ok := owner[k.Crystal]; ok && other != k.Report {
			g.Cautions = append(g.Cautions, fmt.Sprintf("%s and %s both hold a crystal %s, from different files: one and the same crystal must not count twice.", other, k.Report, k.Crystal))
		}
		owner[k.Crystal] = k.Report
		if k.F > 0 && k.F < weakF {
			g.Cautions = append(g.Cautions, fmt.Sprintf("%s, %s: its strength axis is weak (F = %.0f), so that its error is too short and its weight too large.", k.Report, k.Crystal, k.F))
		}
		axes[k.Axis], models[k.Model] = true, true
		lo, hi = math.Min(lo, k.ThicknessNM[1]-k.ThicknessNM[0]), math.Max(hi, k.ThicknessNM[1]-k.ThicknessNM[0])
	}
	if hi > 1.5*lo {
		g.Cautions = append(g.Cautions, fmt.Sprintf("The contrasts span from %.0f to %.0f nm of thickness: their m are not the same quantity; compare the growth per 100 nm.", lo, hi))
	}
	if len(axes) > 1 {
		g.Cautions = append(g.Cautions, "The reports use different strength axes.")
	}
	if len(models) > 1 {
		g.Cautions = append(g.Cautions, "The reports lead with different models of the sizes.")
	}
	if g.M.Why != "" {
		g.Cautions = append(g.Cautions, g.M.Why+".")
	}
}

func (g *gathered) print(w io.Writer) error {
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(t, "report\tcrystal\tcontrast\tthickness (nm)\tm\tinterval\tweight\t")
	forest := g.scale()
	for i := range g.Crystals {
		k := &g.Crystals[i]
		fmt.Fprintf(t, "%s\t%s\t%s\t%.0f to %.0f\t%s\t%s to %s\t%.0f %%\t%s\n", k.Report, k.Crystal, k.Contrast, k.ThicknessNM[0], k.ThicknessNM[1],
			dash(k.M, 4), endText(k.Lo), endText(k.Hi), 100*k.Weight, forest(k.M, k.Lo, k.Hi))
	}
	for _, s := range []struct {
		name string
		v    analysis.Interval
	}{{"in these crystals", g.M.InThese}, {"in crystals like these", g.M.LikeThese}} {
		fmt.Fprintf(t, "%s\t\t\t\t%s\t%s to %s\t\t%s\n", s.name, dash(s.v.Value, 4), endText(s.v.Lo), endText(s.v.Hi), forest(s.v.Value, s.v.Lo, s.v.Hi))
	}
	if err := t.Flush(); err != nil {
		return err
	}
	var b strings.Builder
	fmt.Fprintf(&b, "\nHeterogeneity Q = %.1f on %d degrees of freedom, p = %s", g.M.Q, g.M.N-1, dash(g.M.QP, 3))
	if g.M.Why == "" {
		fmt.Fprintf(&b, "; tau = %.4f, I^2 = %.0f %%", math.Sqrt(g.M.Tau2), 100*g.M.I2)
	}
	if g.M.N > 1 {
		fmt.Fprintf(&b, ". The spread between crystals lies from %.4f to %.4f (Q-profile)", g.M.TauLo, g.M.TauHi)
	}
	fmt.Fprintf(&b, ".\n%d of %d crystals have the same sign (p = %.3g; the smallest that so many can reach is %.3g).\n", g.SameSign, g.M.N, g.SignP, g.SmallestP)
	if g.Slope != nil {
		fmt.Fprintf(&b, "Growth of mu = -ln(1-m) per 100 nm in %s: %s in these, %s to %s in crystals like these.\n", plural(g.Slope.N, "crystal"),
			intervalText(g.Slope.InThese), endText(g.Slope.LikeThese.Lo), endText(g.Slope.LikeThese.Hi))
	}
	for _, c := range g.Cautions {
		b.WriteString("Caution: " + c + "\n")
	}
	fmt.Fprintf(&b, "In these %s m = %s.\n", plural(g.M.N, "crystal"), intervalText(g.M.InThese))
	_, err := io.WriteString(w, b.String())
	return err
}

// scale gives the drawing of an interval on the axis that all share, zero marked.
func (g *gathered) scale() func(v, lo, hi float64) string {
	const width = 41
	left, right := 0.0, 0.0
	for _, k := range g.Crystals {
		if !math.IsNaN(k.SE) {
			left, right = math.Min(left, k.M-2*k.SE), math.Max(right, k.M+2*k.SE)
		}
	}
	at := func(v float64) int {
		f := (v - left) / (right - left) * (width - 1)
		return int(math.Round(math.Max(0, math.Min(width-1, f))))
	}
	return func(v, lo, hi float64) string {
		if math.IsNaN(v) {
			return ""
		}
		line := []byte(strings.Repeat(" ", width))
		for i := at(lo); i <= at(hi); i++ {
			line[i] = '-'
		}
		line[at(0)] = '|'
		line[at(v)] = 'o'
		return strings.TrimRight(string(line), " ")
	}
}
