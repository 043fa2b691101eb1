package delimited_test

import (
	"fmt"

	"thinward/io/delimited"
)

func Example() {
	text := `# invented rows
1 2 3  510.2 12.5  -31.2
2 0 0  -3.1   4.0  -30.9
3 0 1  80.0   0    -12.0
0 0 0
`
	r, err := delimited.Parse("thin.txt", []byte(text), &delimited.Options{
		Order: []string{"h", "k", "l", "intensity", "sigma", "phi"},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println("used:", r.Columns.Len(), "of", r.Rows, "apart by", r.Layout)
	for _, a := range r.SetAside {
		fmt.Printf("set aside: %d, %s, first on line %d\n", a.Count, a.Reason, a.FirstLine)
	}

	_, err = delimited.Parse("thin.csv", []byte("h;k;l;intensity;sigma\n1;2;3;510,2;12,5\n"), nil)
	fmt.Println(err)
	// Output:
	// used: 2 of 3 apart by blanks
	// set aside: 1, sigma is zero or negative, first on line 4
	// thin.csv:2: column 4 (intensity): "510,2" has a decimal comma; write decimal points; with commas one cannot tell a number from two fields
}
