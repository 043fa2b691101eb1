package main

import (
	"fmt"

	"github.com/spf13/cobra"

	"thinward/notebooks/kernel"
)

func (a *app) kernel() *cobra.Command {
	var install, remove bool
	c := &cobra.Command{
		Use:   "kernel",
		Short: "Build the Go kernel; with --install register it with Jupyter",
		Example: `  thinward kernel --install
  jupyter notebook        # then choose the kernel "Go (Thinward)"`,
		Args: cobra.NoArgs,
		RunE: func(c *cobra.Command, _ []string) error {
			if remove {
				dir, err := kernel.Uninstall(nil)
				if err != nil {
					return err
				}
				if dir == "" {
					fmt.Fprintln(a.out, "No kernel was registered.")
					return nil
				}
				fmt.Fprintln(a.out, "Removed", dir)
				return nil
			}
			binary, err := a.ensure(c.Context(), a.meter())
			if err != nil {
				return err
			}
			if !install {
				fmt.Fprintln(a.out, binary)
				return nil
			}
			done, err := kernel.Install(c.Context(), binary, nil)
			if err != nil {
				return err
			}
			fmt.Fprintf(a.out, "Registered %q in %s\nRemove it with thinward kernel --remove\n", kernel.DisplayName, done.Dir)
			return nil
		},
	}
	c.Flags().BoolVar(&install, "install", false, "register the kernel with Jupyter for this user")
	c.Flags().BoolVar(&remove, "remove", false, "take the registration back")
	c.MarkFlagsMutuallyExclusive("install", "remove")
	return c
}
