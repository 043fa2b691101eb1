package manifest_test

import (
	"fmt"
	"strings"

	"thinward/io/manifest"
)

const example = `title = "Tarn peptide"
energy_keV = 300.0
space_group = "P 21 21 21"
[[crystal]]
name = "L1"
  [[crystal.position]]
  name = "thin"
  thickness_nm = 140.0
  files = ["L1-thin.cif"]
  [[crystal.position]]
  name = "thick"
  thickness_nm = 310.0
  files = ["L1-thick.cif"]
`

// A key that nobody knows and a value that cannot be are errors with their line.
func ExampleParse() {
	file, err := manifest.Parse("series.toml", []byte(example))
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, p := range file.Crystal[0].Position {
		fmt.Println(file.Crystal[0].Name, p.Name, p.ThicknessNM, p.Files)
	}
	_, err = manifest.Parse("series.toml", []byte(strings.Replace(example, "energy_keV", "voltage", 1)))
	fmt.Println(err)
	_, err = manifest.Parse("series.toml", []byte(strings.Replace(example, "310.0", "-3.0", 1)))
	fmt.Println(err)
	// Output:
	// L1 thin 140 [L1-thin.cif]
	// L1 thick 310 [L1-thick.cif]
	// series.toml:2: voltage: unknown key; known here: between, cell, cell_tolerance, columns, crystal, energy_keV, friedel_apart, mean_free_path, operators, primary, seed, space_group, thickness_scale_su, title
	// series.toml:12: crystal.position.thickness_nm: L1/thick has thickness -3 nm; give a positive thickness in nanometres
}
