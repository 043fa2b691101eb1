package intensity

import (
	"bufio"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"slices"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// list makes rows from h, k, l, I, sigma, phi, frame.
func list(rows ...[7]float64) *Columns {
	c := &Columns{Phi: []float64{}, Frame: []int32{}}
	for _, r := range rows {
		c.H, c.K, c.L = append(c.H, int16(r[0])), append(c.K, int16(r[1])), append(c.L, int16(r[2]))
		c.I, c.Sigma = append(c.I, r[3]), append(c.Sigma, r[4])
		c.Phi, c.Frame = append(c.Phi, r[5]), append(c.Frame, int32(r[6]))
	}
	return c
}

func TestCollapseCopies(t *testing.T) {
	rows := list(
		[7]float64{2, 0, 1, 30, 3, 10.5, 11},
		[7]float64{1, 1, 0, 50, 5, 10.0, 10},
		[7]float64{1, 1, 0, 50, 5, 11.0, 12},
		[7]float64{1, 1, 0, 50, 5, 10.5, 11},
		[7]float64{1, 1, 0, 48, 5, 40.0, 70},
	)
	before := fmt.Sprint(*rows)
	out, a, err := Collapse(rows, RowsAuto)
	if err != nil {
		t.Fatal(err)
	}
	if a.Policy != RowsCopies || a.Rows != 5 || a.Observations != 3 || a.Distinct != 2 || a.Copies != 2 || a.Repeats != 1 || a.PhiMean != "plain" {
		t.Errorf("audit %+v", a)
	}
	want := list([7]float64{1, 1, 0, 50, 5, 10.5, 11}, [7]float64{1, 1, 0, 48, 5, 40, 70}, [7]float64{2, 0, 1, 30, 3, 10.5, 11})
	if fmt.Sprint(*out) != fmt.Sprint(*want) {
		t.Errorf("got %v, want %v", *out, *want)
	}
	floatcmp.Check(t, "copy share", a.CopyShare, 0.4, 1e-12, 0)
	if fmt.Sprint(*rows) != before {
		t.Error("the rows given were changed")
	}
}

func TestCollapseCopiesWithoutFrames(t *testing.T) {
	rows := list(
		[7]float64{1, 1, 0, 50, 5}, [7]float64{1, 1, 0, 50, 5}, [7]float64{2, 1, 0, 8, 2},
		[7]float64{2, 1, 0, 9, 2}, [7]float64{2, 1, 0, 9, 2}, [7]float64{2, 1, 0, 9, 2})
	rows.Frame, rows.Phi = nil, nil
	out, a, err := Collapse(rows, RowsAuto)
	if err != nil || a.Policy != RowsCopies || out.Len() != 3 || a.Copies != 3 || out.Frame != nil || out.Phi != nil || a.PhiMean != "" {
		t.Errorf("got %d observations, audit %+v, error %v", out.Len(), a, err)
	}
}

func TestCollapseSlices(t *testing.T) {
	rows := list(
		[7]float64{1, 1, 0, 30, 3, 10.0, 10}, [7]float64{1, 1, 0, 60, 4, 11.0, 11},
		[7]float64{3, 0, 2, 7, 1, 20.0, 20}, [7]float64{1, 1, 0, 80, 6, 50.0, 50})
	rows.Partiality = []float64{0.25, 0.75, 1, 0.9}
	out, a, err := Collapse(rows, RowsAuto)
	if err != nil {
		t.Fatal(err)
	}
	if a.Policy != RowsSlices || a.Observations != 3 || a.PhiMean != "partiality" || a.Incomplete != 1 || len(a.Warnings) != 1 {
		t.Errorf("audit %+v", a)
	}
	floatcmp.CheckSlice(t, "I", out.I, []float64{90, 80, 7}, 0, 1e-14)
	floatcmp.CheckSlice(t, "sigma", out.Sigma, []float64{5, 6, 1}, 0, 1e-14) // 3-4-5
	floatcmp.CheckSlice(t, "phi", out.Phi, []float64{10.75, 50, 20}, 1e-12, 0)
	floatcmp.CheckSlice(t, "share", out.Partiality, []float64{1, 0.9, 1}, 1e-12, 0)

	rows.Partiality = nil
	out, a, err = Collapse(rows, RowsSlices)
	if err != nil || out.Len() != 3 || a.PhiMean != "plain" || a.Policy != RowsSlices {
		t.Errorf("declared slices: %+v, %v", a, err)
	}
	floatcmp.CheckSlice(t, "plain phi", out.Phi, []float64{10.5, 50, 20}, 1e-12, 0)
	rows.Frame = nil
	if _, _, err = Collapse(rows, RowsSlices); err == nil || !strings.Contains(err.Error(), "frame") {
		t.Errorf("slices without frames: %v", err)
	}
}

func TestCollapseRefusesToGuess(t *testing.T) {
	rows := list([7]float64{1, 1, 0, 30, 3, 10, 10}, [7]float64{1, 1, 0, 60, 4, 11, 11}, [7]float64{3, 0, 2, 7, 1, 20, 20})
	_, a, err := Collapse(rows, RowsAuto)
	var unclear *RowsUnclearError
	if !errors.As(err, &unclear) || unclear.Neighbours != 1 || unclear.Example != [3]int{1, 1, 0} {
		t.Fatalf("got %v", err)
	}
	if a == nil || a.Neighbours != 1 {
		t.Errorf("the audit is missing beside the error: %+v", a)
	}
	for _, word := range []string{"rows =", `"slices"`, `"repeats"`, `"copies"`, "1 1 0"} {
		if !strings.Contains(err.Error(), word) {
			t.Errorf("%q is missing in %q", word, err)
		}
	}
	out, a, err := Collapse(rows, RowsRepeats)
	if err != nil || out != rows || a.Policy != RowsRepeats || a.Repeats != 1 || len(a.Warnings) != 1 || a.Warnings[0].Code != "neighbours-kept" {
		t.Errorf("declared repeats: %+v, %v", a, err)
	}
	rows.Partiality = []float64{1, 1, 1}
	if _, _, err = Collapse(rows, RowsAuto); !errors.As(err, &unclear) || !strings.Contains(unclear.Why, "more than one") {
		t.Errorf("whole reflections beside each other: %v", err)
	}
	rows.Frame, rows.Partiality = nil, []float64{0.4, 0.6, 1}
	if _, _, err = Collapse(rows, RowsAuto); !errors.As(err, &unclear) || !strings.Contains(unclear.Why, "without frame") {
		t.Errorf("parts without frames: %v", err)
	}
}

func TestCollapseTellsRepeatsFromCopies(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	rows := &Columns{Phi: []float64{}, Frame: []int32{}}
	for h := range 60 {
		for pass := range 3 {
			rows.H, rows.K, rows.L = append(rows.H, int16(h)), append(rows.K, 1), append(rows.L, 0)
			// Values of one digit coincide often, but far apart in angle.
			rows.I, rows.Sigma = append(rows.I, float64(r.IntN(4))), append(rows.Sigma, 1)
			frame := 10 + 40*pass + r.IntN(5)
			rows.Frame, rows.Phi = append(rows.Frame, int32(frame)), append(rows.Phi, float64(frame))
		}
	}
	out, a, err := Collapse(rows, RowsAuto)
	if err != nil || out != rows || a.Policy != RowsRepeats || a.Observations != 180 || a.Distinct != 60 || a.Copies != 0 {
		t.Errorf("genuine repeats: %+v, %v", a, err)
	}
}

func TestCollapseDoesNotDependOnOrder(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	var rows [][7]float64
	for h := range 50 {
		i, frame := math.Round(1000*r.Float64())/10, 5+3*h
		for k := range 1 + r.IntN(4) {
			rows = append(rows, [7]float64{float64(h), 2, -3, i, 2.5, float64(frame + k), float64(frame + k)})
		}
	}
	out, a, err := Collapse(list(rows...), RowsAuto)
	if err != nil || out.Len() != 50 {
		t.Fatalf("%d observations, %v", out.Len(), err)
	}
	r.Shuffle(len(rows), func(i, j int) { rows[i], rows[j] = rows[j], rows[i] })
	again, b, err := Collapse(list(rows...), RowsAuto)
	if err != nil {
		t.Fatal(err)
	}
	if fmt.Sprint(*out) != fmt.Sprint(*again) || fmt.Sprint(*a) != fmt.Sprint(*b) {
		t.Error("another order of rows gives another result")
	}
	twice, _, err := Collapse(out, RowsCopies)
	if err != nil || fmt.Sprint(*twice) != fmt.Sprint(*out) {
		t.Error("collapsing what is collapsed changes it")
	}
}

func TestCollapseEdges(t *testing.T) {
	out, a, err := Collapse(&Columns{}, RowsAuto)
	if err != nil || out.Len() != 0 || a.Observations != 0 || a.Policy != RowsRepeats {
		t.Errorf("no rows: %+v, %v", a, err)
	}
	if _, _, err = Collapse(&Columns{}, RowPolicy(9)); err == nil {
		t.Error("an unknown policy is accepted")
	}
	bad := oneRow()
	bad.Sigma[0] = 0
	if _, _, err = Collapse(bad, RowsAuto); err == nil {
		t.Error("a zero sigma is accepted")
	}
}

func TestRowPolicyWords(t *testing.T) {
	for _, p := range []RowPolicy{RowsAuto, RowsRepeats, RowsCopies, RowsSlices} {
		if q, err := ParseRowPolicy(p.String()); err != nil || q != p {
			t.Errorf("%v reads back as %v, %v", p, q, err)
		}
	}
	if p, err := ParseRowPolicy(""); err != nil || p != RowsAuto {
		t.Errorf("the empty word: %v, %v", p, err)
	}
	if _, err := ParseRowPolicy("doubles"); err == nil || !strings.Contains(err.Error(), "doubles") {
		t.Errorf("an unknown word: %v", err)
	}
}

// Counts of two published lists, in a folder that lies beside the clone where
// they have been put; each reflection's one value is copied on up to four frames.
func TestCollapsePublishedLists(t *testing.T) {
	for _, c := range []struct {
		file               string
		rows, observations int
	}{{"molecular-thin.cif", 3570, 2294}, {"molecular-thick.cif", 8013, 4391}} {
		rows := readSixColumns(t, "../../../shared/real/"+c.file)
		out, a, err := Collapse(rows, RowsAuto)
		if err != nil {
			t.Fatal(err)
		}
		if a.Policy != RowsCopies || a.Rows != c.rows || out.Len() != c.observations || a.Distinct != c.observations || a.Repeats != 0 {
			t.Errorf("%s: %+v", c.file, a)
		}
		rows.Frame = nil
		if out, a, err = Collapse(rows, RowsAuto); err != nil || a.Policy != RowsCopies || out.Len() != c.observations {
			t.Errorf("%s without frames: %+v, %v", c.file, a, err)
		}
	}
}

func readSixColumns(t *testing.T, path string) *Columns {
	f, err := os.Open(path)
	if err != nil {
		t.Skip("the published lists are not here")
	}
	defer f.Close()
	var h, k, l []int
	c := &Columns{Frame: []int32{}}
	for s := bufio.NewScanner(f); s.Scan(); {
		var a, b, d int
		var i, sigma float64
		var frame int32
		if n, _ := fmt.Sscan(s.Text(), &a, &b, &d, &i, &sigma, &frame); n == 6 {
			h, k, l = append(h, a), append(k, b), append(l, d)
			c.I, c.Sigma, c.Frame = append(c.I, i), append(c.Sigma, sigma), append(c.Frame, frame)
		}
	}
	out, err := NewColumns(h, k, l, c.I, c.Sigma)
	if err != nil {
		t.Fatal(err)
	}
	out.Frame = c.Frame
	return out
}

func TestByIndexSorts(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for _, wide := range []int{30, 1 << 30} {
		c := &Columns{}
		for range 500 {
			c.H, c.K, c.L = append(c.H, int16(r.IntN(5)-2)), append(c.K, int16(r.IntN(3))), append(c.L, int16(r.IntN(4)-4))
			c.I, c.Frame = append(c.I, 0), append(c.Frame, int32(r.IntN(wide)))
		}
		got := byIndex(c)
		ok := slices.IsSortedFunc(got, func(a, b int32) int {
			x := [5]int{int(c.H[a]), int(c.K[a]), int(c.L[a]), int(c.Frame[a]), int(a)}
			y := [5]int{int(c.H[b]), int(c.K[b]), int(c.L[b]), int(c.Frame[b]), int(b)}
			return slices.Compare(x[:], y[:])
		})
		seen := map[int32]bool{}
		for _, r := range got {
			seen[r] = true
		}
		if !ok || len(seen) != 500 {
			t.Errorf("frames up to %d: sorted %v, %d different rows", wide, ok, len(seen))
		}
	}
}
