package main

import (
	"encoding/json"
	"fmt"
	"io"
	"strconv"
	"strings"

	"github.com/spf13/cobra"

	"thinward/analysis/crystal"
)

// groupReport is what group --json prints.
type groupReport struct {
	Number     int      `json:"number"`
	HM         string   `json:"hm"`
	Hall       string   `json:"hall"`
	PointGroup string   `json:"point_group"`
	LaueClass  string   `json:"laue_class"`
	Centring   string   `json:"centring"`
	Operators  []string `json:"operators"`
	Conditions []string `json:"conditions"`
	Elements   []string `json:"elements"`
	*indexReport
}

type indexReport struct {
	Index       [3]int   `json:"index"`
	Absent      bool     `json:"absent"`
	Because     []string `json:"because"`
	Centric     bool     `json:"centric"`
	Epsilon     int      `json:"epsilon"`
	Equivalents [][3]int `json:"equivalents"`
}

func (a *app) group() *cobra.Command {
	var index string
	c := &cobra.Command{
		Use:   "group GROUP",
		Short: "Operators, Laue class and reflection conditions of a space group; with --index, what they mean for one reflection",
		Example: `  thinward group "P 21 21 21"
  thinward group 62 --index "0 0 3"
  thinward group "-P 2yn" --json`,
		Args: cobra.ExactArgs(1),
		RunE: func(_ *cobra.Command, args []string) error {
			g, err := crystal.Lookup(args[0])
			if err != nil {
				return err
			}
			r := describeGroup(g)
			if index != "" {
				h, err := parseIndex(index)
				if err != nil {
					return usageError{err}
				}
				r.indexReport = describeIndex(g, h)
			}
			if a.json {
				return writeJSON(a.out, r)
			}
			return r.print(a.out)
		},
	}
	c.Flags().StringVar(&index, "index", "", `a reflection, as "h k l"`)
	c.Flags().BoolVar(&a.json, "json", false, "print JSON")
	return c
}

func describeGroup(g *crystal.Group) *groupReport {
	r := &groupReport{
		Number: g.Number(), HM: g.HM(), Hall: g.Hall(), PointGroup: g.PointGroup(), LaueClass: g.LaueClass(), Centring: g.Centring(),
		Operators: []string{}, Conditions: append([]string{}, g.Conditions()...), Elements: []string{},
	}
	for _, o := range g.Operators() {
		r.Operators = append(r.Operators, o.String())
	}
	for _, e := range g.Elements() {
		r.Elements = append(r.Elements, e.Name)
	}
	return r
}

func describeIndex(g *crystal.Group, h crystal.HKL) *indexReport {
	r := &indexReport{Index: [3]int{h.H, h.K, h.L}, Absent: g.Absent(h), Centric: g.Centric(h), Epsilon: g.Epsilon(h), Because: []string{}, Equivalents: [][3]int{}}
	elements := g.Elements()
	for _, e := range g.ForbiddenBy(h) {
		r.Because = append(r.Because, elements[e].Name)
	}
	for _, q := range g.Equivalents(h) {
		r.Equivalents = append(r.Equivalents, [3]int{q.H, q.K, q.L})
	}
	return r
}

func parseIndex(s string) (crystal.HKL, error) {
	fields := strings.FieldsFunc(s, func(r rune) bool { return r == ' ' || r == ',' || r == '\t' })
	if len(fields) != 3 {
		return crystal.HKL{}, fmt.Errorf("--index %q: write three whole numbers, such as \"1 0 -2\"", s)
	}
	var n [3]int
	for i, f := range fields {
		v, err := strconv.Atoi(f)
		if err != nil || v < -10000 || v > 10000 {
			return crystal.HKL{}, fmt.Errorf("--index %q: %q is no index", s, f)
		}
		n[i] = v
	}
	return crystal.HKL{H: n[0], K: n[1], L: n[2]}, nil
}

func (r *groupReport) print(w io.Writer) error {
	var b strings.Builder
	name := r.HM
	if name == "" {
		name = "(no tabulated setting)"
	}
	fmt.Fprintf(&b, "%s   number %d   Hall symbol %s\n", name, r.Number, r.Hall)
	fmt.Fprintf(&b, "point group %s, Laue class %s, centring %s\n", r.PointGroup, r.LaueClass, r.Centring)
	fmt.Fprintf(&b, "%d operators:\n", len(r.Operators))
	for _, o := range r.Operators {
		fmt.Fprintln(&b, "  "+o)
	}
	list := func(title, none string, items []string) {
		if len(items) == 0 {
			items = []string{none}
		}
		fmt.Fprintln(&b, title)
		for _, s := range items {
			fmt.Fprintln(&b, "  "+s)
		}
	}
	list("elements that forbid reflections:", "none", r.Elements)
	list("reflection conditions:", "none", r.Conditions)
	if i := r.indexReport; i != nil {
		fmt.Fprintf(&b, "reflection %d %d %d: ", i.Index[0], i.Index[1], i.Index[2])
		if i.Absent {
			fmt.Fprintf(&b, "forbidden by %s", strings.Join(i.Because, ", "))
		} else {
			fmt.Fprint(&b, "allowed")
		}
		kind := "acentric"
		if i.Centric {
			kind = "centric"
		}
		fmt.Fprintf(&b, ", %s, epsilon %d, %d equivalents with Friedel mates:\n", kind, i.Epsilon, len(i.Equivalents))
		for _, q := range i.Equivalents {
			fmt.Fprintf(&b, "  %d %d %d\n", q[0], q[1], q[2])
		}
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func writeJSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	return e.Encode(v)
}
