package main

import (
	"context"
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"

	"github.com/spf13/cobra"

	"thinward/analysis"
	"thinward/io/manifest"
	"thinward/io/result"
)

func (a *app) plan() *cobra.Command {
	var m, power, spread float64
	c := &cobra.Command{
		Use:   "plan SERIES.toml",
		Short: "How many crystals, pairs and observations an exchange of a given size needs, by this series' own noise",
		Example: `  thinward plan fixtures/tarn/series.toml --m 0.03
  thinward plan series.toml --m 0.02 --json`,
		Args: cobra.ExactArgs(1),
		RunE: func(c *cobra.Command, args []string) error {
			if !(m > 0 && m < 1) {
				return usageError{fmt.Errorf("--m %g: give a fraction between 0 and 1, such as 0.03", m)}
			}
			if !(power > 0.5 && power < 1) {
				return usageError{fmt.Errorf("--power %g: give a share between 0.5 and 1, such as 0.8", power)}
			}
			if c.Flags().Changed("spread") && !(spread > 0 && spread < 1) {
				return usageError{fmt.Errorf("--spread %g: give a standard deviation of m between 0 and 1, such as 0.02", spread)}
			}
			return a.printPlanning(c.Context(), args[0], &analysis.PlanSettings{M: m, Power: power, Spread: spread})
		},
	}
	c.Flags().Float64Var(&m, "m", 0.03, "the exchange to be seen")
	c.Flags().Float64Var(&power, "power", 0.8, "share of experiments that are to see it")
	c.Flags().Float64Var(&spread, "spread", 0, "spread (standard deviation) of m between crystals to plan with; without it what the crystals give, from five on, and below that none and the most that they allow side by side")
	c.Flags().BoolVar(&a.json, "json", false, "print JSON, the curve included")
	return c
}

func (a *app) printPlanning(ctx context.Context, series string, set *analysis.PlanSettings) error {
	study, err := manifest.Load(series)
	if err != nil {
		return err
	}
	p, err := study.Plan(ctx, set)
	if err != nil {
		return err
	}
	if a.json {
		return result.EncodeAny(a.out, *p)
	}
	return writePlanning(a.out, p)
}

func writePlanning(w io.Writer, p *analysis.Planning) error {
	var b strings.Builder
	t := tabwriter.NewWriter(&b, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(t, "measured\tSE of m\tpairs\tof possible\tmultiplicity\tshare of counting noise\tm seen alone\t")
	for _, k := range append(append([]analysis.PlanCrystal(nil), p.Measured...), p.Typical) {
		fmt.Fprintf(t, "%s\t%s\t%.0f\t%d\t%.1f\t%s\t%s\t\n", k.Crystal, dash(k.SE, 4), k.Pairs, k.Possible, k.Multiplicity, dash(100*k.NoiseShare, 0)+" %", visible(k.Seen, 3))
	}
	if err := t.Flush(); err != nil {
		return err
	}
	plans := []*analysis.PlanWide{{Tau: p.Tau, Seen: p.Seen, Needs: p.Needs, Table: p.Table, Curve: p.Curve}}
	if p.Wide != nil {
		plans = append(plans, p.Wide)
	}
	for _, w := range plans {
		if err := writeReach(&b, p, w); err != nil {
			return err
		}
	}
	b.WriteByte('\n')
	for _, c := range p.Cautions {
		b.WriteString(c + "\n")
	}
	needs, crystals := needText(p.M, p.Needs), plural(len(p.Measured), "crystal")
	switch {
	case math.IsInf(p.Seen, 1) && p.Wide == nil:
		fmt.Fprintf(&b, "With one crystal m is known as a bracket only; for m = %g %s.\n", p.M, needs)
	case math.IsInf(p.Seen, 1):
		fmt.Fprintf(&b, "With one crystal m is known as a bracket only; for m = %g %s (with more spread %s).\n", p.M, needs, needText(p.M, p.Wide.Needs))
	case p.Wide == nil:
		fmt.Fprintf(&b, "With %s as measured here an exchange of %.3f would be seen; for m = %g %s.\n", crystals, p.Seen, p.M, needs)
	default:
		fmt.Fprintf(&b, "With %s as measured here an exchange of %.3f would be seen (%.3f with more spread); for m = %g %s (with more spread %s).\n",
			crystals, p.Seen, p.Wide.Seen, p.M, needs, needText(p.M, p.Wide.Needs))
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// writeReach writes the tables for one spread between crystals.
func writeReach(b *strings.Builder, p *analysis.Planning, w *analysis.PlanWide) error {
	t := tabwriter.NewWriter(b, 0, 0, 2, ' ', tabwriter.AlignRight)
	spread := "no spread between crystals"
	if w.Tau > 0 {
		spread = fmt.Sprintf("a spread of %.3f between crystals", w.Tau)
	}
	fmt.Fprintf(b, "\nWith %s\nWhat each crystal must bring, by the number of crystals: pairs at multiplicity %.1f, or multiplicity at %.0f pairs (-: more than there are, or no number)\n", spread, p.Typical.Multiplicity, p.Typical.Pairs)
	head := "m"
	for _, c := range w.Table {
		if c.M == w.Table[0].M {
			head += fmt.Sprintf("\t%d", c.Crystals)
		}
	}
	fmt.Fprintln(t, head+"\tcrystals needed as measured\t")
	for i := range w.Needs {
		n := &w.Needs[i]
		line := fmt.Sprintf("%g", n.M)
		for _, c := range w.Table {
			if c.M == n.M {
				line += "\t" + reach(c.Pairs, float64(p.Typical.Possible), 0) + " or " + reach(c.Multiplicity, math.MaxFloat64, 1)
			}
		}
		need := fmt.Sprint(n.Crystals)
		if n.Why != "" {
			need = "-"
		}
		fmt.Fprintln(t, line+"\t"+need+"\t")
	}
	if err := t.Flush(); err != nil {
		return err
	}
	fmt.Fprintf(b, "\nSmallest m seen with a power of %g, by the number of crystals\n", p.Power)
	fmt.Fprintln(t, "crystals\tas measured\ttwice the multiplicity\ttwice the pairs\t")
	for _, c := range w.Curve {
		if k := c.Crystals; k <= 6 || k%5 == 0 {
			fmt.Fprintf(t, "%d\t%s\t%s\t%s\t\n", k, visible(c.Seen, 4), visible(c.TwiceMultiplicity, 4), visible(c.TwicePairs, 4))
		}
	}
	return t.Flush()
}

// visible writes the smallest m seen, a dash where none is.
func visible(v float64, decimals int) string {
	if math.IsInf(v, 1) {
		return "-"
	}
	return dash(v, decimals)
}

func needText(m float64, needs []analysis.PlanNeed) string {
	for i := range needs {
		if n := &needs[i]; n.M == m && n.Why == "" {
			if n.Crystals == 1 {
				return "one such crystal is enough"
			}
			return fmt.Sprintf("%d such crystals are needed", n.Crystals)
		}
	}
	return "no number of such crystals is enough"
}

// reach writes a number that is needed, a dash when there cannot be so many.
func reach(v, most float64, decimals int) string {
	if v > most {
		return "-"
	}
	return fmt.Sprintf("%.*f", decimals, v)
}
