package delimited

import (
	"fmt"
	"strings"
)

type role uint8

const (
	roleSkip role = iota
	roleH
	roleK
	roleL
	roleIntensity
	roleSigma
	rolePhi
	roleFrame
	rolePartiality
)

var roleNames = [...]string{"skip", "h", "k", "l", "intensity", "sigma", "phi", "frame", "partiality"}

const knownNames = "h, k, l, intensity, sigma, phi, frame, partiality, skip"

// roleOf reads a name in either case, and I, the symbol of an intensity; a small i is the
// third of four hexagonal indices.
func roleOf(name string) (role, bool) {
	if strings.TrimSpace(name) == "I" {
		return roleIntensity, true
	}
	low := strings.ToLower(strings.TrimSpace(name))
	for r, n := range roleNames {
		if n == low {
			return role(r), true
		}
	}
	return roleSkip, false
}

// rolesOf checks a declared order: known names, none twice, none of the first five
// missing.
func rolesOf(order []string) (roles []role, item, problem string) {
	var seen [len(roleNames)]bool
	for j, name := range order {
		r, ok := roleOf(name)
		if !ok {
			return nil, "order", fmt.Sprintf("column %d has the name %q", j+1, name)
		}
		if r != roleSkip && seen[r] {
			return nil, "order", "the column " + roleNames[r] + " stands twice"
		}
		seen[r] = true
		roles = append(roles, r)
	}
	for _, r := range []role{roleH, roleK, roleL, roleIntensity, roleSigma} {
		if !seen[r] {
			return nil, "order", "the column " + roleNames[r] + " is missing"
		}
	}
	return roles, "", ""
}

// check looks at the settings before any text is read.
func (o *Options) check() (roles []role, item, problem, remedy string) {
	if len(o.Order) > 0 {
		if roles, item, problem = rolesOf(o.Order); problem != "" {
			return nil, item, problem, "name the columns by " + knownNames
		}
	}
	if len(o.Widths) > 0 {
		if len(o.Widths) != len(o.Order) {
			return nil, "widths", fmt.Sprintf("there are %d widths for %d columns", len(o.Widths), len(o.Order)), "give one width for each column of the order"
		}
		for j, w := range o.Widths {
			if w < 1 || w > 1000 {
				return nil, "widths", fmt.Sprintf("the width of column %d is %d", j+1, w), "give the number of characters, from 1 to 1000"
			}
		}
		return roles, "", "", ""
	}
	switch o.Delimiter {
	case 0, ',', '\t', ';', ' ':
	default:
		return nil, "delimiter", fmt.Sprintf("%q cannot separate fields", o.Delimiter), "use a comma, a tab, a semicolon or a blank"
	}
	return roles, "", "", ""
}
