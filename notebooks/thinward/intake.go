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
		Use:   "intake SERIES.toml",
		Short: "What came in, without a report: rows against observations, truncation, indexing, overlap",
		Long: `Reads a series and says what it holds, before any scaling: the positions of
each crystal from thin to thick; for each position rows and observations, completeness
to its own and to the common limit, angles, negatives and sigmas against what noise
would give, the agreement of its cell with that of the series; what positions have in
common; lattice centring, angles, indexing; and what was set aside.

With --json one object with the keys
  positions   one entry a position: counts, limits, cell, sigmas
  common      one entry for every two positions: common reflections, share of each,
              strength of the common ones over that of all (1 when alike), median d
  remarks     {crystal, position, kind, count, why, file, first_line}; kind is unusable,
              copies, slices, excluded or merged
  centring    for each kind of centring what it would forbid: measured, expected, ratio
  turns       whether angles go with indices and cell, and alike within a crystal
  indexing    how each position was brought to one indexing, with the margin z
  warnings    {code, where, text}
Not-a-number is null with a why beside it.`,
		Example: "  thinward intake fixtures/tarn/series.toml",
		Args:    cobra.ExactArgs(1),
		RunE: func(c *cobra.Command, args []string) error {
			file, err := manifest.Read(args[0])
			if err != nil {
				return err
			}
			study, err := manifest.Load(args[0])
			if err != nil {
				return err
			}
			d, err := study.IntakeDetails(c.Context())
			if err != nil {
				return err
			}
			if a.json {
				return result.EncodeAny(a.out, d)
			}
			if _, err := fmt.Fprintln(a.out, thinnestFirst(file)); err != nil {
				return err
			}
			return printIntake(a.out, d)
		},
	}
	c.Flags().BoolVar(&a.json, "json", false, "print JSON")
	return c
}

func printIntake(w io.Writer, d *analysis.IntakeDetails) error {
	for _, part := range []func(io.Writer, *analysis.IntakeDetails){printRows, printCover, printIntensities, printCommon} {
		t := tabwriter.NewWriter(w, 0, 0, 2, ' ', tabwriter.AlignRight)
		part(t, d)
		if err := t.Flush(); err != nil {
			return err
		}
		if _, err := io.WriteString(w, "\n"); err != nil {
			return err
		}
	}
	_, err := io.WriteString(w, intakeText(d))
	return err
}

func printRows(w io.Writer, d *analysis.IntakeDetails) {
	fmt.Fprintln(w, "position\trows\tobservations\ttaken as\tunique\tmult.\texcluded\tR_meas\tCC1/2\t")
	for _, r := range d.Positions {
		fmt.Fprintf(w, "%s/%s\t%d\t%d\t%s\t%d\t%.1f\t%d\t%s\t%s\t\n", r.Crystal, r.Position, r.Rows, r.Observations, r.RowsAs, r.Unique, r.Multiplicity, r.Excluded, dash(r.RMeas, 3), dash(r.CCHalf, 3))
	}
}

func printCover(w io.Writer, d *analysis.IntakeDetails) {
	fmt.Fprintf(w, "position\td (A)\tcomplete\tto %s A\tangles (deg)\tgap\tcell off (%%)\t(deg)\t\n", dash(d.Positions[0].CommonDMin, 2))
	for _, r := range d.Positions {
		angles := "none"
		if !math.IsNaN(r.AngleLo) {
			angles = fmt.Sprintf("%.0f..%.0f", r.AngleLo, r.AngleHi)
		}
		fmt.Fprintf(w, "%s/%s\t%.1f-%.2f\t%.0f %%\t%.0f %%\t%s\t%s\t%s\t%s\t\n", r.Crystal, r.Position, r.DMax, r.DMin, 100*r.Completeness, 100*r.CompletenessCommon,
			angles, dash(r.AngleGap, 1), dash(r.Cell.LengthPercent, 2), dash(r.Cell.AngleDeg, 2))
	}
}

func printIntensities(w io.Writer, d *analysis.IntakeDetails) {
	fmt.Fprintln(w, "position\tI/sigma\t<0 seen\texpected\t<-1 sigma\texpected\t<-2 sigma\texpected\t<-3 sigma\texpected\tchi2 near\tpairs\t")
	for _, r := range d.Positions {
		fmt.Fprintf(w, "%s/%s\t%.1f\t", r.Crystal, r.Position, r.MeanISigma)
		for k := range r.Negative {
			fmt.Fprintf(w, "%d\t%.0f\t", r.Negative[k], r.NegativeExp[k])
		}
		fmt.Fprintf(w, "%s\t%d\t\n", dash(r.Sigmas.Chi2, 2), r.Sigmas.Pairs)
	}
}

// printCommon lists the pairs within crystals and those of which something is to be
// said, and sums up the others.
func printCommon(w io.Writer, d *analysis.IntakeDetails) {
	fmt.Fprintln(w, "positions\tcommon\tof first\tof second\tstrength\t\td common\tall (A)\t")
	across, least, most := 0, 1.0, 0.0
	for _, c := range d.Common {
		if c.Crystal != c.WithCrystal && c.Why == "" {
			across++
			least, most = math.Min(least, math.Min(c.Share, c.WithShare)), math.Max(most, math.Max(c.Share, c.WithShare))
			continue
		}
		fmt.Fprintf(w, "%s/%s, %s/%s\t%d\t%.0f %%\t%.0f %%\t%s\t%s\t%s\t%s\t\n", c.Crystal, c.Position, c.WithCrystal, c.WithPosition, c.Common, 100*c.Share, 100*c.WithShare,
			dash(c.Strength, 2), dash(c.With, 2), dash(c.DCommon, 2), dash(c.DAll, 2))
	}
	if across > 0 {
		fmt.Fprintf(w, "%s across crystals\t\t%.0f-%.0f %%\t\t\t\t\t\t\n", plural(across, "pair"), 100*least, 100*most)
	}
}

// intakeText says in words what the tables cannot.
func intakeText(d *analysis.IntakeDetails) string {
	var b strings.Builder
	for _, m := range d.Remarks {
		where := m.Crystal + "/" + m.Position
		if m.File != "" {
			where += ", " + m.File
		}
		switch m.Kind {
		case "unusable":
			fmt.Fprintf(&b, "%s: %s set aside: %s (first on line %d)\n", where, plural(m.Count, "row"), m.Why, m.FirstLine)
		case "excluded":
			fmt.Fprintf(&b, "%s: %s excluded: %s\n", where, plural(m.Count, "observation"), m.Why)
		case "merged":
			fmt.Fprintf(&b, "%s: %s\n", where, m.Why)
		default:
			fmt.Fprintf(&b, "%s: %s taken as %s: %s\n", where, plural(m.Count, "row"), m.Kind, m.Why)
		}
	}
	var said sayings
	if l := d.Laue; l != nil && l.Verdict != analysis.VerdictCaution && l.Verdict != analysis.VerdictFails { // the others are warnings
		said.add("Laue class ", l.Class, l.Why)
	}
	proposed := map[string]string{}
	for _, x := range d.Indexing {
		said.add("indexing of ", x.Where, x.Text)
		if x.Proposal != "" {
			proposed[x.Text] = x.Proposal
		}
	}
	for k := range said {
		if p := proposed[said[k].text]; p != "" {
			said[k].text += fmt.Sprintf("\n  propose in the manifest: reindex = %q", p)
		}
	}
	for _, c := range d.Common {
		if c.Crystal != c.WithCrystal && c.Why != "" { // those within a crystal are warnings
			said.add("", c.Crystal+"/"+c.Position+" and "+c.WithCrystal+"/"+c.WithPosition, c.Why)
		}
	}
	for _, x := range d.Warnings {
		if x.Code != "reindexed" && x.Code != "indexing-ambiguous" { // said of the indexing
			said.add("", x.Where, x.Text)
		}
	}
	for _, x := range said {
		fmt.Fprintln(&b, x.line())
	}
	return b.String()
}

func dash(v float64, decimals int) string {
	if math.IsNaN(v) {
		return "-"
	}
	return fmt.Sprintf("%.*f", decimals, v)
}

// saying is one sentence and the places it is said of.
type saying struct {
	what, text string
	where      []string
}

// sayings keep the order in which sentences were first said.
type sayings []saying

func (s *sayings) add(what, where, text string) {
	for k := range *s {
		if x := &(*s)[k]; x.what == what && x.text == text {
			x.where = append(x.where, where)
			return
		}
	}
	*s = append(*s, saying{what, text, []string{where}})
}

// mostPlaces is the number of places that a sentence names before it counts.
const mostPlaces = 4

func (s *saying) line() string {
	places := strings.Join(s.where, ", ")
	if n := len(s.where); n > mostPlaces {
		places = fmt.Sprintf("%s and %d more", strings.Join(s.where[:mostPlaces-1], ", "), n-mostPlaces+1)
	}
	if places == "" {
		return s.what + s.text
	}
	return s.what + places + ": " + s.text
}
