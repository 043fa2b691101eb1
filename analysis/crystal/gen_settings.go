//go:build ignore

// gen_settings writes settings.tsv, the table that is embedded, and
// testdata/settings_facts.tsv, what the tests hold each setting to, from a list
// of the tabulated settings given as the first argument: tab-separated columns
// hall_number, number, choice, hm_short, hm_full, hall_symbol, n_ops, centring,
// point_group, laue_class below one line of headings.
package main

import (
	"fmt"
	"os"
	"strings"
)

func main() {
	if err := run(os.Args[1:]); err != nil {
		fmt.Fprintln(os.Stderr, "gen_settings:", err)
		os.Exit(1)
	}
}

func run(args []string) error {
	if len(args) != 1 {
		return fmt.Errorf("want the list of settings as the one argument")
	}
	data, err := os.ReadFile(args[0])
	if err != nil {
		return err
	}
	var table, facts strings.Builder
	lines := strings.Split(strings.TrimRight(string(data), "\n"), "\n")
	for i, line := range lines[1:] {
		f := strings.Split(line, "\t")
		if len(f) != 10 {
			return fmt.Errorf("line %d: %d columns, want 10", i+2, len(f))
		}
		choice := strings.TrimPrefix(f[2], "-")
		if len(f[2]) > 1 {
			choice = f[2]
		}
		fmt.Fprintf(&table, "%s\t%s\t%s\t%s\n", f[1], choice, strings.ReplaceAll(f[4], "_", ""), f[5])
		centring, _, _ := strings.Cut(f[7], "(")
		fmt.Fprintf(&facts, "%s\t%s\t%s\t%s\t%s\t%s\t%s\n", f[1], choice, f[5], f[6], centring, f[8], f[9])
	}
	if err := os.WriteFile("settings.tsv", []byte(table.String()), 0o644); err != nil {
		return err
	}
	return os.WriteFile("testdata/settings_facts.tsv", []byte(facts.String()), 0o644)
}
