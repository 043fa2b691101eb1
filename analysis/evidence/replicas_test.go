package evidence

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// mean is a pipeline whose answer is known: the mean of the intensities, with its
// textbook standard error.
func meanPipeline(bias, claim float64) Pipeline {
	return func(_ context.Context, v []float64) (Summary, error) {
		n, m, s := float64(len(v)), 0.0, 0.0
		for _, x := range v {
			m += x / n
		}
		for _, x := range v {
			s += (x - m) * (x - m)
		}
		se := claim * math.Sqrt(s/(n-1)/n)
		m += bias
		z := m / se
		return Summary{M: Estimate{m, se, m - 1.96*se, m + 1.96*se}, Q: Estimate{Value: math.NaN()}, P: math.Erfc(math.Abs(z) / math.Sqrt2)}, nil
	}
}

func normals(mean float64) func(k int, dst []float64) {
	return func(k int, dst []float64) {
		r := resample.NewSeed(7).At("replicas").Stream(k)
		for i := range dst {
			dst[i] = mean + r.Normal()
		}
	}
}

func replicate(t *testing.T, n int, expected float64, draw func(int, []float64), p Pipeline) *Replicated {
	t.Helper()
	r, err := Replicate(context.Background(), n, 2, 400, expected, draw, p)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func TestReplicateOfASoundPipeline(t *testing.T) {
	r := replicate(t, 1000, 0, normals(0), meanPipeline(0, 1))
	// 1/sqrt(400) = 0.05; binomial errors of 5 % in 1000 are 0.007.
	floatcmp.Check(t, "spread", r.M.SD, 0.05, 0.004, 0)
	floatcmp.Check(t, "mean", r.M.Mean, 0, 0.005, 0)
	floatcmp.Check(t, "missed", r.Missed, 0.05, 0.021, 0)
	floatcmp.Check(t, "rejected", r.CurveRejects, 0.05, 0.021, 0)
	floatcmp.Check(t, "upper quantile", r.M.Hi, 1.96*0.05, 0.017, 0) // four standard errors of an order statistic
	// 80 % power at level 5 %: (1.96 + 0.84) standard errors.
	floatcmp.Check(t, "detectable", r.Detectable(0.8), 2.80*0.05, 0.01, 0)
	if !r.Clean(0.001) || r.Failed != 0 || r.N != 1000 {
		t.Errorf("%+v", r)
	}
	limit := r.Detectable(0.8)
	with := replicate(t, 1000, limit, normals(limit), meanPipeline(0, 1))
	floatcmp.Check(t, "power at the limit", with.Power(), 0.8, 0.04, 0)
}

func TestReplicateSeesABiasAndTooNarrowAnInterval(t *testing.T) {
	if r := replicate(t, 300, 0, normals(0), meanPipeline(0.03, 1)); r.Clean(0.01) {
		t.Errorf("a bias of 0.6 standard deviations is called clean: %+v", r.M)
	}
	if r := replicate(t, 300, 0, normals(0), meanPipeline(0, 0.6)); r.Clean(0.01) {
		t.Errorf("intervals of 0.6 their width are called clean: %g missed", r.Missed)
	}
	if r := replicate(t, 300, 0, normals(0), meanPipeline(0.02, 1)); !r.Clean(0.01) {
		t.Errorf("a bias of 0.4 standard deviations, which leaves 93 %% of the intervals right, is not: %+v", r.M)
	}
	normal := distuv.UnitNormal
	floatcmp.Check(t, "coverage at the largest harmless bias", normal.CDF(1.96-harmless)-normal.CDF(-1.96-harmless), leastCover, 2e-4, 0)
	// P(X >= 12) and P(X >= 13) of 100 at 0.05 are 0.00427 and 0.00147 (binomial sums).
	for k, want := range map[float64]bool{0: true, 11: true, 12: true, 13: false} {
		if likely(k/100, 100, 0.002) != want {
			t.Errorf("%g of 100 at 0.05: likely is %t at a level of 0.002", k, !want)
		}
	}
	floatcmp.Check(t, "most that is chance", (&Replicated{N: 100}).Allowed(0.002), 0.12, 1e-15, 0)
	floatcmp.Check(t, "most that is chance, all", (&Replicated{N: 1}).Allowed(0.002), 1, 1e-15, 0)
}

func TestReplicateCountsFailures(t *testing.T) {
	odd := func(ctx context.Context, v []float64) (Summary, error) {
		if v[0] > 0 {
			return Summary{}, errors.New("no luck")
		}
		return meanPipeline(0, 1)(ctx, v)
	}
	r := replicate(t, 200, 0, normals(0), odd)
	if r.N+r.Failed != 200 || r.Failed < 70 || r.Failed > 130 {
		t.Errorf("%d gave an answer, %d failed", r.N, r.Failed)
	}
	_, err := Replicate(context.Background(), 5, 1, 3, 0, normals(0), func(context.Context, []float64) (Summary, error) { return Summary{}, errors.New("no luck") })
	if err == nil || !strings.Contains(err.Error(), "no luck") {
		t.Errorf("got %v", err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Replicate(ctx, 5, 1, 3, 0, normals(0), meanPipeline(0, 1)); !errors.Is(err, context.Canceled) {
		t.Errorf("got %v", err)
	}
	if _, err := Replicate(context.Background(), 0, 1, 3, 0, normals(0), meanPipeline(0, 1)); err == nil {
		t.Error("no replicas passed")
	}
}

func TestReplicateDoesNotDependOnWorkers(t *testing.T) {
	a, err := Replicate(context.Background(), 40, 1, 50, 0, normals(0), meanPipeline(0, 1))
	if err != nil {
		t.Fatal(err)
	}
	b, err := Replicate(context.Background(), 40, 7, 50, 0, normals(0), meanPipeline(0, 1))
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.CheckSlice(t, "spread", []float64{a.M.Mean, a.M.SD, a.M.Lo, a.M.Hi}, []float64{b.M.Mean, b.M.SD, b.M.Lo, b.M.Hi}, 0, 0)
}

// Type 7 of Hyndman & Fan: the quartiles of 1..5 are 2 and 4, the median of 1..4 2.5.
func TestQuantile(t *testing.T) {
	v := []float64{1, 2, 3, 4, 5}
	for _, c := range []struct{ q, want float64 }{{0, 1}, {0.25, 2}, {0.5, 3}, {0.75, 4}, {1, 5}, {0.1, 1.4}} {
		floatcmp.Check(t, "quantile", quantile(v, c.q), c.want, 1e-15, 0)
	}
	floatcmp.Check(t, "median of four", quantile(v[:4], 0.5), 2.5, 1e-15, 0)
}
