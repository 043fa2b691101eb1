package main

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"math"
	"path/filepath"
	"text/tabwriter"

	"github.com/spf13/cobra"

	"thinward/analysis"
	"thinward/io/manifest"
	"thinward/io/result"
)

func (a *app) tables() *cobra.Command {
	var out, prefix string
	var most int
	c := &cobra.Command{
		Use:   "tables SERIES.toml",
		Short: "Scaled and merged intensities and pairs as CSV and CIF, and the most changed reflections",
		Long: `Writes scaled.csv and scaled.cif (every observation with its scale), merged.csv and
merged.cif (one intensity a reflection and position), pairs.csv and pairs.cif
(every pair of every contrast), and changed.csv (the reflections of largest |z|
beside what noise alone would give). CIF items that no public dictionary has are
written under the reserved prefix [local], or under one that you registered.`,
		Example: `  thinward tables fixtures/tarn/series.toml --out tables
  thinward tables series.toml --most 200 --prefix mylab`,
		Args: cobra.ExactArgs(1),
		RunE: func(c *cobra.Command, args []string) error {
			if most < 1 {
				return usageError{fmt.Errorf("--most %d: give a number of reflections", most)}
			}
			return a.writeTables(c.Context(), args[0], out, most, &result.CIFSettings{Prefix: prefix})
		},
	}
	c.Flags().StringVarP(&out, "out", "o", "tables", "folder for the tables; it is made if need be")
	c.Flags().IntVar(&most, "most", 50, "how many of the most changed reflections, for each contrast")
	c.Flags().StringVar(&prefix, "prefix", result.LocalPrefix, "first word of CIF items that no public dictionary has")
	return c
}

func (a *app) writeTables(ctx context.Context, series, out string, most int, set *result.CIFSettings) error {
	study, err := manifest.Load(series)
	if err != nil {
		return err
	}
	folder, err := openFolder(out)
	if err != nil {
		return err
	}
	defer folder.close()
	scaled, err := study.ScaledTables(ctx)
	if err != nil {
		return err
	}
	merged, err := study.MergedTables(ctx)
	if err != nil {
		return err
	}
	for _, contrast := range study.Contrasts() {
		if _, err := study.Compare(ctx, contrast); err != nil {
			return fmt.Errorf("%s: %w", study.Name(contrast), err)
		}
	}
	changed, err := study.MostChanged(ctx, most)
	if err != nil {
		return err
	}
	pairs := study.PairRows()
	for _, f := range []struct {
		name  string
		write func(io.Writer) error
	}{
		{"scaled.csv", func(w io.Writer) error { return result.WriteScaled(w, scaled) }},
		{"scaled.cif", func(w io.Writer) error { return result.WriteScaledCIF(w, &study.Series, scaled, set) }},
		{"merged.csv", func(w io.Writer) error { return result.WriteMerged(w, merged) }},
		{"merged.cif", func(w io.Writer) error { return result.WriteMergedCIF(w, &study.Series, merged, set) }},
		{"pairs.csv", func(w io.Writer) error { return result.WritePairs(w, pairs) }},
		{"pairs.cif", func(w io.Writer) error { return result.WritePairsCIF(w, &study.Series, pairs, set) }},
		{"changed.csv", func(w io.Writer) error { return result.WriteChanged(w, changed) }},
	} {
		var b bytes.Buffer
		if err := f.write(&b); err != nil {
			return fmt.Errorf("%s: %w", f.name, err)
		}
		if err := folder.write(f.name, b.Bytes()); err != nil {
			return err
		}
	}
	if err := folder.commit(false); err != nil {
		return err
	}
	if err := printChanged(a.out, changed); err != nil {
		return err
	}
	n := 0
	for i := range scaled {
		n += len(scaled[i].Rows)
	}
	fmt.Fprintf(a.out, "Wrote %s and %s of %s to %s\n", plural(n, "scaled observation"), plural(len(pairs), "pair"), plural(len(scaled), "position"), filepath.Join(out, "*.csv and *.cif"))
	return nil
}

// printChanged shows the first few of each contrast.
func printChanged(w io.Writer, list []analysis.ChangedRow) error {
	const shown = 3
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(t, "most changed\th k l\td (A)\tstrength\tthin - thick, local means\tz\t|z| by noise\tof pairs\t")
	for i := range list {
		r := &list[i]
		if r.Rank > shown {
			continue
		}
		fmt.Fprintf(t, "%s: %s - %s\t%d %d %d\t%.2f\t%s\t%s\t%s\t%.1f\t%d\t\n", r.Crystal, r.Thin, r.Thick, r.HKL.H, r.HKL.K, r.HKL.L, r.D,
			dash(r.Strength, 2), dash(r.Eps, 3), dash(r.Z, 1), math.Abs(r.ByNoise), r.Of)
	}
	return t.Flush()
}
