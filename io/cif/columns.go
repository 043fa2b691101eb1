package cif

import "strings"

// role is what a column of a reflection list is used for.
type role uint8

const (
	roleSkip role = iota
	roleH
	roleK
	roleL
	roleHKL // all three as a CIF 2.0 list
	roleIntensity
	roleIntensitySU // intensity with its s.u. in parentheses, no column of its own
	roleSigma
	roleMate // intensity of the Friedel mate
	roleMateSigma
	rolePhi
	rolePartiality
	roleFrame
	roleScaleGroup // 12, 12%3 or a word
	roleScaleSet   // the same when another column gives the frame
	roleDataSet
	roleStatus
)

// measure is one quantity that can serve as intensity, with the names of its
// uncertainty; all without the category. mate is the same of the Friedel mate where
// the two stand in one row.
type measure struct {
	name      string
	sigmas    []string
	amplitude bool
	mate      string
	mateSigma string
}

// category is one kind of reflection list. Its columns are found by table in both
// spellings, category_item and category.item; a first underscore is never turned
// into a point blindly, since names of categories hold underscores themselves.
type category struct {
	name       string
	merged     bool
	measures   []measure // best first
	angle      []string
	frame      []string
	scaleGroup string
	dataSet    []string
	status     []string
	partiality string
}

// The names are those of the core dictionary (old and current spelling) and of the
// macromolecular dictionary, deprecated ones included.
var categories = []category{
	{
		name: "_diffrn_refln",
		measures: []measure{
			{name: "intensity_net", sigmas: []string{"intensity_u", "intensity_net_su", "intensity_sigma", "intensity_net_u"}},
			{name: "counts_net", sigmas: []string{"counts_net_su", "counts_net_u"}},
		},
		angle:      []string{"pdbx_scan_angle", "pdbx_rotation_angle"},
		frame:      []string{"pdbx_image_id"},
		scaleGroup: "scale_group_code",
		dataSet:    []string{"diffrn_id", "crystal_id"},
	},
	{
		name: "_pdbx_diffrn_unmerged_refln",
		measures: []measure{
			{name: "intensity_meas", sigmas: []string{"intensity_sigma"}},
			{name: "intensity_profile", sigmas: []string{"intensity_profile_sigma"}},
			{name: "intensity_sum", sigmas: []string{"intensity_sum_sigma"}},
		},
		angle:      []string{"scan_angle_reflection"},
		frame:      []string{"image_id_begin"},
		dataSet:    []string{"scan_id"},
		partiality: "partiality",
	},
	{
		name:   "_refln",
		merged: true,
		measures: []measure{
			{name: "intensity_meas", sigmas: []string{"intensity_sigma", "intensity_meas_su", "intensity_meas_sigma", "intensity_u"}},
			{name: "F_squared_meas", sigmas: []string{"F_squared_sigma", "F_squared_meas_su", "F_squared_meas_sigma"}},
			{name: "pdbx_I_plus", sigmas: []string{"pdbx_I_plus_sigma"}, mate: "pdbx_I_minus", mateSigma: "pdbx_I_minus_sigma"},
			{name: "F_meas", sigmas: []string{"F_sigma", "F_meas_su", "F_meas_sigma"}, amplitude: true},
			{name: "F_meas_au", sigmas: []string{"F_meas_sigma_au"}, amplitude: true},
			{name: "pdbx_F_plus", sigmas: []string{"pdbx_F_plus_sigma"}, amplitude: true, mate: "pdbx_F_minus", mateSigma: "pdbx_F_minus_sigma"},
		},
		scaleGroup: "scale_group_code",
		dataSet:    []string{"pdbx_diffrn_id", "crystal_id"},
		status:     []string{"include_status", "observed_status", "status"},
	},
}

// plan says what to do with every column of a loop of reflections.
type plan struct {
	category  *category
	roles     []role
	item      [roleStatus + 1]string // data name by role, as spelled in the file
	amplitude bool
	friedel   friedel
	angles    []string // setting angles that are there and not used
}

// planFor returns nil when the names are not those of a reflection list: h, k and l
// of one category are needed, or hkl, a usable intensity is not.
func planFor(names []string) *plan {
	for i := range categories {
		c := &categories[i]
		find := finder(c.name, names)
		h, k, l, hkl := find("index_h"), find("index_k"), find("index_l"), find("hkl")
		if (h < 0 || k < 0 || l < 0) && hkl < 0 {
			continue
		}
		p := &plan{category: c, roles: make([]role, len(names))}
		use := func(j int, r role) {
			if j >= 0 && p.roles[j] == roleSkip {
				p.roles[j], p.item[r] = r, names[j]
			}
		}
		if h >= 0 && k >= 0 && l >= 0 {
			use(h, roleH)
			use(k, roleK)
			use(l, roleL)
		} else {
			use(hkl, roleHKL)
		}
		p.measured(c, find, use)
		use(first(find, c.angle), rolePhi)
		use(first(find, c.frame), roleFrame)
		use(first(find, c.dataSet), roleDataSet)
		use(first(find, c.status), roleStatus)
		if c.partiality != "" {
			use(find(c.partiality), rolePartiality)
		}
		if c.scaleGroup != "" && p.item[roleFrame] == "" {
			use(find(c.scaleGroup), roleScaleGroup)
		} else if c.scaleGroup != "" {
			use(find(c.scaleGroup), roleScaleSet)
		}
		for _, angle := range []string{"angle_omega", "angle_phi", "angle_chi", "angle_kappa"} {
			if j := find(angle); j >= 0 && p.item[rolePhi] == "" {
				p.angles = append(p.angles, names[j])
			}
		}
		return p
	}
	return nil
}

// measured picks the best intensity that has an uncertainty, else the best.
func (p *plan) measured(c *category, find func(string) int, use func(int, role)) {
	best, sigma := -1, -1
	var chosen *measure
	for i := range c.measures {
		m := &c.measures[i]
		j, s := find(m.name), first(find, m.sigmas)
		if mate, su := find(m.mate), find(m.mateSigma); (j < 0 || s < 0) && mate >= 0 && (j < 0 || su >= 0) {
			j, s = mate, su
		}
		if j < 0 || best >= 0 && s < 0 {
			continue
		}
		best, sigma, chosen = j, s, m
		if s >= 0 {
			break
		}
	}
	if best < 0 {
		return
	}
	p.amplitude = chosen.amplitude
	if sigma < 0 {
		use(best, roleIntensitySU)
		return
	}
	use(best, roleIntensity)
	use(sigma, roleSigma)
	p.mates(c, chosen, best, find, use)
}

func finder(category string, names []string) func(item string) int {
	at := make(map[string]int, len(names))
	for j, name := range names {
		low := strings.ToLower(name)
		if rest, ok := strings.CutPrefix(low, category); ok && len(rest) > 1 && (rest[0] == '_' || rest[0] == '.') {
			if _, taken := at[rest[1:]]; !taken {
				at[rest[1:]] = j
			}
		}
	}
	return func(item string) int {
		if j, ok := at[strings.ToLower(item)]; ok {
			return j
		}
		return -1
	}
}

func first(find func(string) int, items []string) int {
	for _, item := range items {
		if j := find(item); j >= 0 {
			return j
		}
	}
	return -1
}
