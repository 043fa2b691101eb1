package crystal_test

import (
	"fmt"

	"thinward/analysis/crystal"
)

func ExampleLookup() {
	g, err := crystal.Lookup("P21/n")
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(g.Number(), g.HM(), "|", g.Hall(), "|", g.LaueSetting())
	for _, o := range g.Operators() {
		fmt.Println(o)
	}
	for _, text := range g.Conditions() {
		fmt.Println(text)
	}
	h := crystal.HKL{H: 1, K: 0, L: 2}
	for _, i := range g.ForbiddenBy(h) {
		fmt.Println(h, "is forbidden by the", g.Elements()[i].Name)
	}
	_, err = crystal.Lookup("P 21/q")
	fmt.Println(err)
	// Output:
	// 14 P 1 21/n 1 | -P 2yn | 1 2/m 1
	// x,y,z
	// -x,-y,-z
	// -x+1/2,y+1/2,-z+1/2
	// x+1/2,-y+1/2,z+1/2
	// 0k0: k = 2n
	// h0l: h+l = 2n
	// {1 0 2} is forbidden by the n glide perpendicular to b
	// space group "P 21/q" is not known; near it are P 21/m, P 21/c, P 21/n
}

func ExampleAlternativeIndexings() {
	g, err := crystal.Lookup("P 31")
	if err != nil {
		fmt.Println(err)
		return
	}
	cell := crystal.Cell{A: 40, B: 40, C: 57, Alpha: 90, Beta: 90, Gamma: 120}
	for _, r := range crystal.AlternativeIndexings(g, cell, 0.5) {
		fmt.Println(r, r.Apply(crystal.HKL{H: 3, K: 1, L: 2}))
	}
	// Output:
	// h,k,l {3 1 2}
	// k,h,-l {1 3 -2}
	// -h,-k,l {-3 -1 2}
	// -k,-h,-l {-1 -3 -2}
}
