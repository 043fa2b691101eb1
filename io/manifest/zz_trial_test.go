package manifest

import (
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"
	"time"

	"thinward/analysis"
	"thinward/analysis/electron"
	"thinward/analysis/simulate"
	"thinward/analysis/size"
)

func TestZZManyBeam(t *testing.T) {
	dir := os.Getenv("ZZDIR")
	if dir == "" {
		t.Skip()
	}
	ctx := context.Background()
	if _, err := os.Stat(dir); err != nil {
		plan := simulate.Slate()
		if v := os.Getenv("ZSEED"); v != "" {
			n, _ := strconv.Atoi(v)
			plan.Seed = uint64(n)
		}
		law := plan
		if os.Getenv("ZTWIN") == "" {
			law, err = simulate.ManyBeam(ctx, plan, &electron.BeamSettings{})
			if err != nil {
				t.Fatal(err)
			}
		}
		s, err := simulate.Invent(ctx, law)
		if err != nil {
			t.Fatal(err)
		}
		if err := WriteInvented(s, law, dir); err != nil {
			t.Fatal(err)
		}
	}
	plan, err := ReadPlan(filepath.Join(dir, "plan.toml"))
	if err != nil {
		t.Fatal(err)
	}
	twin, err := simulate.Invent(ctx, plan)
	if err != nil {
		t.Fatal(err)
	}
	truth := map[[3]int]float64{}
	for u, h := range twin.Truth.HKL {
		truth[[3]int{h.H, h.K, h.L}] = twin.Truth.J[u]
	}
	study, err := LoadWith(filepath.Join(dir, "series.toml"), &analysis.Settings{Replicates: 200, Flips: 200})
	if err != nil {
		t.Fatal(err)
	}
	t0 := time.Now()
	for _, c := range study.Contrasts() {
		x, err := study.Compare(ctx, c)
		if err != nil {
			t.Fatal(err)
		}
		in, _ := study.Intake(ctx)
		z := make([]float64, x.Pairs.Len())
		tin := *x.Input
		for i, u := range x.Pairs.Unique {
			h := in.Catalogue.HKL[u]
			z[i] = truth[[3]int{h.H, h.K, h.L}]
			if in.Catalogue.Absent[u] {
				z[i] = math.NaN()
			}
		}
		_ = z
		// shell-normalise
		sh := x.Pairs.Shell
		sum, n := make([]float64, x.Pairs.Shells), make([]float64, x.Pairs.Shells)
		for i := range z {
			if z[i] == z[i] {
				sum[sh[i]] += z[i]
				n[sh[i]]++
			}
		}
		for i := range z {
			z[i] /= sum[sh[i]] / n[sh[i]]
		}
		tin.Z = z
		same := append([]float64(nil), z...)
		for i := range same {
			if math.IsNaN(x.Input.Z[i]) {
				same[i] = math.NaN()
			}
		}
		tin.Z = same
		m, err := size.Exchange(&tin, nil)
		if err != nil {
			fmt.Println("exchange", err)
			continue
		}
		fmt.Printf("%s pairs %d shells %d lead %s r %.2f  truth m %.4f +- %.4f | ", study.Name(c), x.Pairs.Len(), x.Pairs.Shells, x.Result.StrengthAxis, x.Result.AxisAgreement, m.M, m.SE)
		for _, mo := range x.Result.Models {
			fmt.Printf("%s m %.3f[%.3f,%.3f] q %.3f ", mo.Model, mo.M.Value, mo.M.Lo, mo.M.Hi, mo.Q.Value)
		}
		fmt.Printf("exch %.3f P %.3g corr %.3f\n   axes: ", x.Result.Exchange.M, x.Result.Strength.P, x.Result.Correlation.R)
		for _, a := range x.Result.Axes {
			fmt.Printf("%s %.3f [%.3f,%.3f]; ", a.Axis, a.M.Value, a.M.Lo, a.M.Hi)
		}
		fmt.Println()
	}
	f, _ := study.Forbidden(ctx)
	for _, v := range f {
		if v.Element == "all" {
			fmt.Printf("%+v\n", v)
		}
	}
	j, err := study.Join(ctx)
	fmt.Printf("%+v %v\n", j, err)
	e, err := study.Expectation(ctx)
	fmt.Printf("%+v %v\n", e, err)
	r, err := study.Run(ctx, nil)
	if err != nil {
		t.Fatal(err)
	}
	for _, a := range r.Answers {
		fmt.Println(a.Question, "|", a.Verdict, "|", a.Text)
	}
	fmt.Println(time.Since(t0))
}
