package main

import (
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

func (a *app) intake() *cobra.Command {
	c := &cobra.Command{
		Use:     "intake SERIES.toml",
		Short:   "What came in, without a report: rows against observations, truncation, indexing, overlap",
		Example: "  thinward intake fixtures/tarn/series.toml",
		Args:    cobra.ExactArgs(1),
		RunE: func(c *cobra.Command, args []string) error {
			study, err := manifest.Load(args[0])
			if err != nil {
				return err
			}
			table, err := study.IntakeTable(c.Context())
			if err != nil {
				return err
			}
			indexing, err := study.Indexing(c.Context())
			if err != nil {
				return err
			}
			warnings := study.Warnings()
			if a.json {
				return result.EncodeAny(a.out, struct {
					Positions []analysis.IntakeResult   `json:"positions"`
					Indexing  []analysis.IndexingResult `json:"indexing"`
					Warnings  []analysis.WarningResult  `json:"warnings"`
				}{table, indexing, warnings})
			}
			return printIntake(a.out, table, indexing, append(setAside(&study.Series), warnings...))
		},
	}
	c.Flags().BoolVar(&a.json, "json", false, "print JSON")
	return c
}

// setAside says which rows could not be used.
func setAside(s *analysis.Series) []analysis.WarningResult {
	var out []analysis.WarningResult
	for _, c := range s.Crystals {
		for _, p := range c.Positions {
			for _, f := range p.Sources {
				for _, x := range f.SetAside {
					out = append(out, analysis.WarningResult{Where: c.Name + "/" + p.Name + ", " + f.Path, Text: fmt.Sprintf("%s set aside: %s (first on line %d)", plural(x.N, "row"), x.Reason, x.FirstLine)})
				}
			}
		}
	}
	return out
}

func printIntake(w io.Writer, table []analysis.IntakeResult, indexing []analysis.IndexingResult, warnings []analysis.WarningResult) error {
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(t, "position\trows\tobservations\ttaken as\tunique\tmult.\tcomplete\td (A)\tangles (deg)\tgap\tI/sigma\t<0 seen\t<0 expected\tR_meas\tCC1/2\tcommon\t")
	for _, r := range table {
		angles := "none"
		if !math.IsNaN(r.AngleLo) {
			angles = fmt.Sprintf("%.0f..%.0f", r.AngleLo, r.AngleHi)
		}
		fmt.Fprintf(t, "%s/%s\t%d\t%d\t%s\t%d\t%.1f\t%.0f %%\t%.1f-%.2f\t%s\t%s\t%.1f\t%d\t%.0f\t%s\t%s\t%.0f %%\t\n", r.Crystal, r.Position, r.Rows, r.Observations, r.RowsAs, r.Unique, r.Multiplicity,
			100*r.Completeness, r.DMax, r.DMin, angles, dash(r.AngleGap, 1), r.MeanISigma, r.Negative[0], r.NegativeExp[0], dash(r.RMeas, 3), dash(r.CCHalf, 3), 100*r.Overlap)
	}
	if err := t.Flush(); err != nil {
		return err
	}
	var b strings.Builder
	for _, x := range indexing {
		fmt.Fprintf(&b, "indexing of %s: %s\n", x.Where, x.Text)
		if x.Proposal != "" {
			fmt.Fprintf(&b, "  propose in the manifest: reindex = %q\n", x.Proposal)
		}
	}
	for _, r := range table {
		if r.Multiplicity < onceSeen {
			fmt.Fprintf(&b, "%s/%s: almost every reflection stands once, as in a merged list: sigmas cannot be checked and no halves be made; give the observations before merging\n", r.Crystal, r.Position)
		}
	}
	for _, x := range warnings {
		fmt.Fprintf(&b, "%s: %s\n", x.Where, x.Text)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// onceSeen is the multiplicity below which a list is called merged; chosen, no source.
const onceSeen = 1.1

func dash(v float64, decimals int) string {
	if math.IsNaN(v) {
		return "-"
	}
	return fmt.Sprintf("%.*f", decimals, v)
}
