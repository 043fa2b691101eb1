package main

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"

	"github.com/spf13/cobra"

	"thinward/io/manifest"
)

func (a *app) invent() *cobra.Command {
	var out string
	var replace bool
	c := &cobra.Command{
		Use:   "invent PLAN.toml",
		Short: "Write an invented series with a known truth",
		Long: `Writes reflection lists, manifest and truth.json of a series that a plan invents.
The folder must be empty or new. --replace writes over a series that was
invented there before; a folder with anything else in it is left alone.`,
		Example: `  thinward invent fixtures/tarn/plan.toml --out mine
  thinward examine mine/series.toml
  thinward invent mine/plan.toml --out mine --replace`,
		Args: cobra.ExactArgs(1),
		RunE: func(c *cobra.Command, args []string) error {
			if out == "" {
				return usageError{errors.New("invent needs --out DIR")}
			}
			plan, err := manifest.ReadPlan(args[0])
			if err != nil {
				return err
			}
			if entries, err := os.ReadDir(out); err == nil && len(entries) > 0 {
				if _, err := os.Stat(filepath.Join(out, "truth.json")); err != nil {
					return fmt.Errorf("--out %s holds other files: choose an empty folder", out)
				}
				if !replace {
					return fmt.Errorf("--out %s holds an invented series already: choose another folder, or give --replace to write over it", out)
				}
			}
			if err := manifest.Invent(c.Context(), plan, out); err != nil {
				return err
			}
			fmt.Fprintln(a.out, "Wrote", filepath.Join(out, "series.toml"))
			return nil
		},
	}
	c.Flags().StringVarP(&out, "out", "o", "", "folder for the series")
	c.Flags().BoolVar(&replace, "replace", false, "write over an invented series that is there")
	return c
}
