package main

import (
	"github.com/spf13/cobra"

	"thinward/io/manifest"
)

func (a *app) draft() *cobra.Command {
	c := &cobra.Command{
		Use:   "draft FILE...",
		Short: "Write a first manifest from the files given",
		Long: `Looks into the files and prints a manifest with all that they say. What they do
not say (the thickness of each position, which files are one crystal) stands in
it as a question to be answered before it can be used.`,
		Example: "  thinward draft L1-thin.cif L1-thick.cif > series.toml",
		Args:    cobra.MinimumNArgs(1),
		RunE: func(_ *cobra.Command, args []string) error {
			text, err := manifest.Draft(args)
			if err != nil {
				return err
			}
			_, err = a.out.Write(text)
			return err
		},
	}
	return c
}
