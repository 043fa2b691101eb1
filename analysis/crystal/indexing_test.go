package crystal

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// invented draws acentric Wilson intensities with a fall-off for the reflections
// of g in the box, equivalents alike, and returns two noisy lists of them, the
// second re-indexed by r.
func invented(g *Group, c Cell, n int, noise float64, r Reindexing, seed uint64) (reference, data Intensities) {
	random := rand.New(rand.NewPCG(seed, 7))
	truth := map[HKL]float64{}
	box(n, func(h HKL) {
		if h == (HKL{}) || g.Absent(h) || h.H < 0 {
			return
		}
		rep := g.Canonical(h)
		if _, known := truth[rep]; !known {
			truth[rep] = random.ExpFloat64() * math.Exp(-12*c.InvD2(h))
		}
		mean := math.Exp(-12 * c.InvD2(h))
		reference.HKL = append(reference.HKL, h)
		reference.I = append(reference.I, truth[rep]+noise*mean*random.NormFloat64())
		data.HKL = append(data.HKL, r.Apply(h))
		data.I = append(data.I, 3*truth[rep]+3*noise*mean*random.NormFloat64())
	})
	return reference, data
}

// Whatever the indexing was mixed up by, the choice undoes it.
func TestChooseIndexing(t *testing.T) {
	for _, c := range []struct {
		symbol string
		cell   Cell
	}{
		{"P 3", Cell{40, 40, 57, 90, 90, 120}},
		{"P 4", Cell{40, 40, 57, 90, 90, 90}},
		{"P 21 3", Cell{40, 40, 40, 90, 90, 90}},
		{"R 3 :H", Cell{40, 40, 57, 90, 90, 120}},
		{"C 2 2 21", Cell{10, 10 * math.Sqrt(3), 31, 90, 90, 90}},
		{"P 21 21 21", Cell{30, 30.1, 30.2, 90, 90, 90}},
	} {
		g := mustLookup(t, c.symbol)
		options := AlternativeIndexings(g, c.cell, 1)
		if len(options) < 2 {
			t.Fatalf("%s: %v", c.symbol, options)
		}
		for j, r := range options {
			reference, data := invented(g, c.cell, 7, 0.5, r, uint64(j))
			choice, err := ChooseIndexing(g, c.cell, options, reference, data, nil)
			if err != nil {
				t.Errorf("%s: %v", c.symbol, err)
				continue
			}
			if choice.Ambiguous || choice.Z < 4 {
				t.Errorf("%s mixed up by %s: %+v", c.symbol, r, choice)
			}
			best := options[choice.Best]
			if both := (rational{r.M, r.Den}).times(rational{best.M, best.Den}); !sameCoset(g, both, rational{matrix{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}, 1}) {
				t.Errorf("%s: %s does not undo %s (%+v)", c.symbol, best, r, choice)
			}
		}
	}
}

// What cannot be told is called ambiguous, with the reason.
func TestChooseIndexingAmbiguous(t *testing.T) {
	cell := Cell{40, 40, 57, 90, 90, 90}
	g, higher := mustLookup(t, "P 4"), mustLookup(t, "P 4 2 2")
	options := AlternativeIndexings(g, cell, 0.1)
	for _, c := range []struct {
		name  string
		truth *Group
		n     int
		noise float64
		set   *ChoiceSettings
		want  string
	}{
		{"intensities of higher symmetry", higher, 6, 0.3, nil, "agree about equally"},
		{"noise alone", g, 6, 8, nil, "no indexing agrees"},
		{"few", g, 1, 0.1, nil, "fewer than 50"},
		{"a margin that is asked for", g, 6, 0.3, &ChoiceSettings{MinZ: 1000}, "no indexing agrees"},
	} {
		reference, data := invented(c.truth, cell, c.n, c.noise, options[0], 3)
		choice, err := ChooseIndexing(g, cell, options, reference, data, c.set)
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
		} else if !choice.Ambiguous || !strings.Contains(choice.Why, c.want) {
			t.Errorf("%s: %+v, want %q", c.name, choice, c.want)
		}
	}
	reference, data := invented(g, cell, 6, 0.3, options[0], 3)
	choice, err := ChooseIndexing(g, cell, options[:1], reference, data, nil)
	if err != nil || choice.Ambiguous || !math.IsInf(choice.Z, 1) || choice.Best != 0 {
		t.Errorf("one option: %+v, %v", choice, err)
	}
}

// The size of the test that makes a choice: where the intensities have the higher
// symmetry and so cannot tell, a margin of 4 is all but never reached, and the
// margin has about unit spread or less.
func TestMarginSpread(t *testing.T) {
	cell := Cell{40, 40, 57, 90, 90, 90}
	g, higher := mustLookup(t, "P 4"), mustLookup(t, "P 4 2 2")
	options := AlternativeIndexings(g, cell, 0.1)
	sum, n := 0.0, 60
	for seed := range n {
		reference, data := invented(higher, cell, 4, 1, options[0], uint64(seed))
		choice, err := ChooseIndexing(g, cell, options, reference, data, nil)
		if err != nil {
			t.Fatal(err)
		}
		if choice.Z >= 4 {
			t.Errorf("seed %d: %+v", seed, choice)
		}
		sum += choice.Z * choice.Z
	}
	if rms := math.Sqrt(sum / float64(n)); !(rms > 0.1 && rms < 1.3) {
		t.Errorf("root mean square margin %g", rms)
	}
}

func TestFisherMargin(t *testing.T) {
	c := IndexingChoice{Correlation: []float64{0.2, 0.6, math.NaN()}, N: []int{103, 103, 2}}
	c.judge(&ChoiceSettings{MinPairs: 50, MinZ: 3})
	// atanh 0.6 = ln 2, atanh 0.2 = ln(1.5)/2; standard error sqrt(2/100).
	floatcmp.Check(t, "z", c.Z, (math.Log(2)-0.5*math.Log(1.5))/math.Sqrt(0.02), 0, 1e-12)
	if c.Best != 1 || c.Ambiguous {
		t.Errorf("%+v", c)
	}
	floatcmp.Check(t, "correlation", correlation([]float64{1, 2, 3, 4}, []float64{2, 1, 4, 3}), 0.6, 1e-12, 0)
	floatcmp.Check(t, "no spread", correlation([]float64{1, 1, 1, 1}, []float64{2, 1, 4, 3}), math.NaN(), 0, 0)
	floatcmp.Check(t, "negative root", signedRoot(-9), -3, 0, 0)
}

func TestChooseIndexingErrors(t *testing.T) {
	cell := Cell{40, 40, 57, 90, 90, 90}
	g := mustLookup(t, "P 4")
	options := AlternativeIndexings(g, cell, 0.1)
	good := Intensities{[]HKL{{1, 2, 3}}, []float64{1}}
	for _, c := range []struct {
		options         []Reindexing
		cell            Cell
		reference, data Intensities
		want            string
	}{
		{nil, cell, good, good, "no options"},
		{options, Cell{}, good, good, "length a = 0"},
		{options, cell, Intensities{}, good, "reference: no reflections"},
		{options, cell, good, Intensities{[]HKL{{1, 2, 3}}, nil}, "data: 1 reflections and 0 intensities"},
		{options, cell, good, Intensities{[]HKL{{1, 2, 3}}, []float64{math.NaN()}}, "intensity 0, of 1 2 3, is NaN"},
	} {
		_, err := ChooseIndexing(g, c.cell, c.options, c.reference, c.data, nil)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("error %v, want %q", err, c.want)
		}
	}
}
