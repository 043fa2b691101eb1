package manifest

import (
	"bytes"
	"errors"
	"fmt"
	"os"
	"sort"
	"strings"

	"github.com/pelletier/go-toml/v2"
)

// File is a manifest as written, before its files are read.
type File struct {
	Title            string    `toml:"title"`
	EnergyKeV        float64   `toml:"energy_keV,omitempty"`
	SpaceGroup       string    `toml:"space_group,omitempty"`
	Operators        []string  `toml:"operators,omitempty"`
	Seed             uint64    `toml:"seed"`
	ThicknessScaleSU float64   `toml:"thickness_scale_su,omitempty"`
	CellTolerance    float64   `toml:"cell_tolerance,omitempty"`
	FriedelApart     bool      `toml:"friedel_apart,omitempty"`
	Primary          Primary   `toml:"primary,omitempty"`
	MeanFreePath     *FreePath `toml:"mean_free_path,omitempty"`
	Cell             *Cell     `toml:"cell,omitempty"`
	Columns          *Columns  `toml:"columns,omitempty"`
	Crystal          []Crystal `toml:"crystal"`
	Between          []Between `toml:"between,omitempty"`
}

// Primary is the question fixed before looking.
type Primary struct {
	Thin  string `toml:"thin,omitempty"`
	Thick string `toml:"thick,omitempty"`
}

// FreePath gives mean free paths of the electrons in nanometres where they were
// measured; without it they are estimated from the composition.
type FreePath struct {
	ElasticNM   float64 `toml:"elastic_nm"`
	InelasticNM float64 `toml:"inelastic_nm"`
}

// Cell is the unit cell in angstrom and degrees; angles left out are 90.
type Cell struct {
	A     float64  `toml:"a"`
	B     *float64 `toml:"b,omitempty"`
	C     *float64 `toml:"c,omitempty"`
	Alpha *float64 `toml:"alpha,omitempty"`
	Beta  *float64 `toml:"beta,omitempty"`
	Gamma *float64 `toml:"gamma,omitempty"`
}

// Columns declares the columns of column text.
type Columns struct {
	Order     []string `toml:"order,omitempty"`
	Widths    []int    `toml:"widths,omitempty"`
	Delimiter string   `toml:"delimiter,omitempty"`
}

// Crystal is one [[crystal]].
type Crystal struct {
	Name     string     `toml:"name"`
	Position []Position `toml:"position"`
}

// Position is one [[crystal.position]].
type Position struct {
	Name          string   `toml:"name"`
	ThicknessNM   float64  `toml:"thickness_nm"`
	ThicknessSUNM float64  `toml:"thickness_su_nm,omitempty"`
	Order         int      `toml:"order,omitempty"`
	Dose          float64  `toml:"dose_e_per_A2,omitempty"`
	TiltZeroDeg   *float64 `toml:"tilt_zero_deg,omitempty"`
	ReplicateOf   string   `toml:"replicate_of,omitempty"`
	Rows          string   `toml:"rows,omitempty"`
	Files         []string `toml:"files"`
	Block         string   `toml:"block,omitempty"`
	Reindex       string   `toml:"reindex,omitempty"`
	AngleFactor   float64  `toml:"angle_factor,omitempty"`    // 0 stands for 1
	AngleShiftDeg float64  `toml:"angle_shift_deg,omitempty"` // added after the factor
	Exclude       Exclude  `toml:"exclude,omitempty"`
}

// Exclude sets observations aside on purpose.
type Exclude struct {
	Frames  []int32      `toml:"frames,omitempty"`
	ShellsA [][2]float64 `toml:"shells_A,omitempty"`
	Ice     bool         `toml:"ice,omitempty"`
}

// Between is one [[between]]: a contrast of two crystals, named CRYSTAL/POSITION.
type Between struct {
	Thin  string `toml:"thin"`
	Thick string `toml:"thick"`
}

// Read reads and checks the manifest itself, not its files.
func Read(path string) (*File, error) {
	data, err := os.ReadFile(path)
	if err != nil {
		return nil, &Error{File: path, Problem: "cannot be read: " + cause(err), Remedy: "check the path", Err: err}
	}
	return Parse(path, data)
}

func cause(err error) string {
	var p *os.PathError
	if errors.As(err, &p) {
		return p.Err.Error()
	}
	return err.Error()
}

// Parse reads a manifest from data; name is used in errors.
func Parse(name string, data []byte) (*File, error) {
	f := new(File)
	d := toml.NewDecoder(bytes.NewReader(data))
	d.DisallowUnknownFields()
	err := d.Decode(f)
	if left := unanswered(name, data); left != nil && !looksLikeCIF(data) {
		return nil, left
	}
	if err != nil {
		return nil, decodeError(name, data, err)
	}
	if err := f.check(name, data); err != nil {
		return nil, err
	}
	return f, nil
}

var known = map[string][]string{
	"":                         {"title", "energy_keV", "space_group", "operators", "seed", "thickness_scale_su", "cell_tolerance", "friedel_apart", "primary", "mean_free_path", "cell", "columns", "crystal", "between"},
	"mean_free_path":           {"elastic_nm", "inelastic_nm"},
	"primary":                  {"thin", "thick"},
	"cell":                     {"a", "b", "c", "alpha", "beta", "gamma"},
	"columns":                  {"order", "widths", "delimiter"},
	"crystal":                  {"name", "position"},
	"crystal.position":         {"name", "thickness_nm", "thickness_su_nm", "order", "dose_e_per_A2", "tilt_zero_deg", "replicate_of", "rows", "files", "block", "reindex", "angle_factor", "angle_shift_deg", "exclude"},
	"crystal.position.exclude": {"frames", "shells_A", "ice"},
	"between":                  {"thin", "thick"},
}

// suggestion names the closest known key of the same table, or all of them.
func suggestion(key []string) string {
	table, last := strings.Join(key[:len(key)-1], "."), key[len(key)-1]
	names, ok := known[table]
	if !ok {
		return "no such table here; known tables: primary, mean_free_path, cell, columns, crystal, crystal.position, between"
	}
	best, at := "", 3
	for _, n := range names {
		if d := distance(strings.ToLower(n), strings.ToLower(last)); d < at {
			best, at = n, d
		}
	}
	if best != "" {
		return fmt.Sprintf("did you mean %s?", best)
	}
	sorted := append([]string(nil), names...)
	sort.Strings(sorted)
	return "known here: " + strings.Join(sorted, ", ")
}

// distance is the edit distance of Levenshtein (1966).
func distance(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := range len(a) {
		diagonal := row[0]
		row[0] = i + 1
		for j := range len(b) {
			cost := diagonal
			if a[i] != b[j] {
				cost++
			}
			diagonal = row[j+1]
			row[j+1] = min(cost, row[j]+1, row[j+1]+1)
		}
	}
	return row[len(b)]
}
