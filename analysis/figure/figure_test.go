package figure

import (
	"encoding/xml"
	"errors"
	"flag"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

var regen = flag.Bool("regen", false, "write the golden figures anew")

var nan, inf = math.NaN(), math.Inf(1)

// wave is a curve with both bands, from fixed formulas.
func wave(n int) Curve {
	c := Curve{Name: "measured"}
	for i := 0; i < n; i++ {
		x := 0.08 + 4*float64(i*i)/float64(n*n)
		y := -0.1 + 0.15*x
		e := 0.02 + 0.05*x
		c.X, c.Y = append(c.X, x), append(c.Y, y)
		c.Lo, c.Hi = append(c.Lo, y-e), append(c.Hi, y+e)
		c.LoSim, c.HiSim = append(c.LoSim, y-1.6*e), append(c.HiSim, y+1.6*e)
	}
	return c
}

func ghostOf(c Curve) Curve {
	g := Curve{Name: "ghost of noise", Style: Ghost, X: c.X}
	for _, x := range c.X {
		g.Y = append(g.Y, -0.05/(1+x))
	}
	return g
}

func strengthPanels() *Panels {
	c := wave(40)
	return &Panels{Title: "Thin minus thick <& strength>", Desc: "A \"test\" figure.",
		X: Axis{Label: "strength", Scale: Root}, Y: Axis{Label: "thin \u2212 thick", Scale: Root, Zero: true},
		Panel: []Panel{{"L1", "p < 0.001", []Curve{c, ghostOf(c)}}, {"L2", "", []Curve{ghostOf(c)}}}}
}

func forest() *Forest {
	return &Forest{Title: "Exchange", Desc: "Intervals of m.", X: Axis{Label: "exchange m", Zero: true}, Rows: []Row{
		{Group: "L1", Name: "thin \u2212 thick", Value: 0.11, Lo: 0.08, Hi: 0.14, Lead: true},
		{Group: "L1", Name: "open below", Value: 0.05, Lo: -inf, Hi: 0.09, Target: 0.05, HasTarget: true},
		{Group: "together", Name: "in these crystals", Value: 0.08, Lo: 0.065, Hi: 0.094, Summary: true},
		{Group: "together", Name: "not estimable", Value: nan, Lo: -inf, Hi: inf},
	}}
}

func cloud(n int) *Cloud {
	c := &Cloud{Title: "Pairs", Desc: "Points.", X: Axis{Label: "strength", Scale: Root}, Y: Axis{Label: "difference", Zero: true}, Over: []Curve{{X: wave(20).X, Y: wave(20).Y}}}
	for i := 0; i < n; i++ {
		u, v := math.Mod(float64(i)*0.6180339887, 1), math.Mod(float64(i)*0.7548776662, 1)
		c.PX, c.PY = append(c.PX, -math.Log(u+1e-6)), append(c.PY, (v-0.5)*(0.3+u))
	}
	return c
}

func shares() *Shares {
	return &Shares{Title: "Budget", Desc: "Shares.", X: Axis{Label: "thickness (nm)"}, Y: Axis{Label: "share"}, At: []float64{0, 100, 200, 300},
		Parts: []Part{{"unscattered", []float64{1, 0.7, 0.5, 0.35}}, {"once", []float64{0, 0.15, 0.2, 0.2}}, {"more", []float64{0, 0.15, 0.3, 0.45}}}}
}

func joined() *Panels {
	return &Panels{Title: "Growth", Desc: "Lines.", X: Axis{Label: "thickness (nm)"}, Y: Axis{Label: "mu", Zero: true}, Panel: []Panel{{Curves: []Curve{
		{Name: "L1", Style: Joined, X: []float64{140, 220, 310}, Y: []float64{0, 0.05, 0.12}, Lo: []float64{0, 0.03, 0.08}, Hi: []float64{0, 0.07, 0.16}},
		{Name: "L2", Style: Joined, X: []float64{150, 235, 320}, Y: []float64{0, 0.03, 0.07}, Lo: []float64{0, 0.01, -inf}, Hi: []float64{0, 0.05, 0.1}},
		{Name: "L3", Style: Marks, X: []float64{130, 215}, Y: []float64{nan, 0.02}},
	}}}}
}

type drawer interface{ Draw() (*Figure, error) }

func all() map[string]drawer {
	logged := joined()
	logged.Title, logged.X.Scale, logged.Y.Scale = "Log and rank", Rank, Log
	logged.Y.Zero = false
	bars := shares()
	bars.Title, bars.At = "Bars", bars.At[:2]
	for i := range bars.Parts {
		bars.Parts[i].Share = bars.Parts[i].Share[:2]
	}
	return map[string]drawer{"strength": strengthPanels(), "forest": forest(), "points": cloud(60), "hexagons": cloud(2500), "cumulative": cumulative(), "forestcolumns": forestColumns(), "shares": shares(), "bars": bars, "joined": joined(), "log": logged}
}

func drawn(t *testing.T, d drawer) *Figure {
	t.Helper()
	f, err := d.Draw()
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func TestGolden(t *testing.T) {
	for name, d := range all() {
		f := drawn(t, d)
		path := filepath.Join("testdata", name+".svg")
		text := strings.ReplaceAll(f.SVG, "><", ">\n<") + "\n"
		if *regen {
			if err := os.MkdirAll("testdata", 0o755); err != nil {
				t.Fatal(err)
			}
			if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		if text != string(want) {
			t.Errorf("%s differs from %s; look at it, then run with -regen", name, path)
		}
		if again := drawn(t, all()[name]); again.SVG != f.SVG {
			t.Errorf("%s: two drawings differ", name)
		}
	}
}

// wellFormed checks what every figure must have.
func wellFormed(t interface {
	Helper()
	Fatalf(string, ...any)
}, f *Figure, title string) {
	t.Helper()
	d := xml.NewDecoder(strings.NewReader(f.SVG))
	ids := map[string]bool{}
	var stack []string
	seenTitle, seenDesc := "", false
	for {
		tok, err := d.Token()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			t.Fatalf("not well-formed: %v", err)
		}
		switch e := tok.(type) {
		case xml.StartElement:
			stack = append(stack, e.Name.Local)
			for _, a := range e.Attr {
				if a.Name.Local == "id" {
					if ids[a.Value] {
						t.Fatalf("id %s twice", a.Value)
					}
					ids[a.Value] = true
				}
				if a.Name.Local == "style" {
					t.Fatalf("a style attribute, which the page's policy forbids")
				}
				if strings.Contains(a.Value, "NaN") || strings.Contains(strings.ToLower(a.Value), "#fe01") || (a.Name.Local == "d" && strings.Contains(a.Value, "Inf")) {
					t.Fatalf("%s=%q", a.Name.Local, a.Value)
				}
			}
			seenDesc = seenDesc || e.Name.Local == "desc"
		case xml.EndElement:
			stack = stack[:len(stack)-1]
		case xml.CharData:
			if len(stack) > 0 && stack[len(stack)-1] == "title" {
				seenTitle += string(e)
			}
		}
	}
	if seenTitle != title || !seenDesc {
		t.Fatalf("title %q, want %q; description %v", seenTitle, title, seenDesc)
	}
	if !strings.Contains(f.SVG, `role="img"`) {
		t.Fatalf("no role")
	}
	if len(f.SVG) > MaxBytes {
		t.Fatalf("%d bytes", len(f.SVG))
	}
}

func TestEveryFigureHasWordsAndNoLooseEnds(t *testing.T) {
	for name, d := range all() {
		f := drawn(t, d)
		wellFormed(t, f, f.Title)
		if f.Table == nil || len(f.Table.Rows) == 0 {
			t.Errorf("%s: no numbers", name)
		}
		for i, row := range f.Table.Rows {
			if len(row) != len(f.Table.Head) || len(f.Table.Words) != len(f.Table.Head) {
				t.Errorf("%s: row %d has %d cells of %d", name, i, len(row), len(f.Table.Head))
			}
		}
	}
}

func TestColoursAreVariablesWithFallbacks(t *testing.T) {
	svg := drawn(t, strengthPanels()).SVG
	for _, want := range []string{`stroke="var(--series-1,#1f77a8)"`, `fill-opacity="0.23999"`, `fill-opacity="0.12"`, "var(--ghost,#7d8590)", `color="var(--ink,var(--jp-content-font-color1,#1d2733))"`} {
		if !strings.Contains(svg, want) {
			t.Errorf("no %s", want)
		}
	}
	if strings.Contains(svg, "#FFFFFF") || strings.Contains(svg, "<rect") {
		t.Error("a background is left")
	}
	ghost, _, _ := strings.Cut(svg[strings.Index(svg, `stroke="var(--ghost`):], "/>")
	if !strings.Contains(ghost, `stroke-dasharray="5,4"`) {
		t.Errorf("a ghost that only colour tells apart: %s", ghost)
	}
}

func TestIDsFollowTheContent(t *testing.T) {
	a, b := drawn(t, strengthPanels()), strengthPanels()
	b.Panel[0].Curves[0].Y[3] += 0.05
	if id(a.SVG) == id(drawn(t, b).SVG) {
		t.Error("two contents, one id")
	}
}

func id(svg string) string {
	_, rest, _ := strings.Cut(svg, `title id="`)
	name, _, _ := strings.Cut(rest, `"`)
	return name
}

func TestWhatCannotBeDrawnIsCounted(t *testing.T) {
	p := &Panels{Title: "t", X: Axis{Label: "x", Scale: Log}, Y: Axis{Label: "y"}, Panel: []Panel{{Curves: []Curve{{X: []float64{-1, 0, 1, 2, nan}, Y: []float64{1, 1, inf, 1, 1}}}}}}
	f := drawn(t, p)
	want := []string{"x: values left out, not positive and finite, as a logarithmic axis needs: 2.", "y: values left out, not finite or too large to draw: 1."}
	if len(f.Notes) != 2 || f.Notes[0] != want[0] || f.Notes[1] != want[1] {
		t.Errorf("notes %q", f.Notes)
	}
	c := cloud(50)
	c.Y.Lo, c.Y.Hi = -0.1, 0.1
	outside := 0
	for _, v := range c.PY {
		if v < -0.1 || v > 0.1 {
			outside++
		}
	}
	f, places, err := c.DrawPlaces()
	if err != nil {
		t.Fatal(err)
	}
	missing := 0
	for _, p := range places {
		if math.IsNaN(p.X) {
			missing++
		}
	}
	if missing != outside || outside == 0 || len(f.Notes) != 1 || !strings.HasPrefix(f.Notes[0], "Points outside") {
		t.Errorf("%d outside, %d without a place, notes %q", outside, missing, f.Notes)
	}
}

func TestErrors(t *testing.T) {
	short := []float64{1}
	for _, c := range []struct {
		d    drawer
		want string
	}{
		{&Panels{Title: "t"}, `figure: "t" has no panel`},
		{&Panels{Title: "t", Panel: []Panel{{Curves: []Curve{{Name: "c", X: []float64{1, 2}, Y: short}}}}}, `figure: curve "c" of "t" has 2 places and 1 values`},
		{&Panels{Title: "t", Panel: []Panel{{Curves: []Curve{{Name: "c", X: short, Y: short, Lo: short}}}}}, `figure: curve "c" of "t" has half a band`},
		{&Forest{Title: "t"}, `figure: "t" has no row`},
		{&Cloud{Title: "t", PX: short}, `figure: cloud "t" has 1 and 0 coordinates`},
		{&Shares{Title: "t"}, `figure: "t" has no part`},
		{&Shares{Title: "t", At: []float64{1, 2}, Parts: []Part{{"p", short}}}, `figure: part "p" of "t" has 1 values for 2 places`},
	} {
		if _, err := c.d.Draw(); err == nil || err.Error() != c.want {
			t.Errorf("error %v, want %s", err, c.want)
		}
	}
}

func TestInputsAreNotChanged(t *testing.T) {
	p := strengthPanels()
	p.X.Scale = Rank
	before := append([]float64(nil), p.Panel[0].Curves[0].X...)
	drawn(t, p)
	for i, v := range p.Panel[0].Curves[0].X {
		if v != before[i] {
			t.Fatalf("place %d changed", i)
		}
	}
}

func TestEmptyPanelSaysSo(t *testing.T) {
	f := drawn(t, &Panels{Title: "t", Panel: []Panel{{Name: "L1"}, {Name: "L2", Curves: []Curve{{X: []float64{nan, nan}, Y: []float64{1, nan}}}}}})
	if n := strings.Count(f.SVG, "nothing to draw"); n != 2 {
		t.Errorf("%d panels say that they are empty, not 2", n)
	}
}

func TestNothingPanics(t *testing.T) {
	odd := rapid.OneOf(rapid.Float64(), rapid.SampledFrom([]float64{0, nan, inf, -inf, math.MaxFloat64, -math.MaxFloat64, math.SmallestNonzeroFloat64, 1, 1 + 1e-16, 1e-300, 1e149, -1e150}), rapid.Float64Range(-3, 3))
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(0, 12).Draw(t, "n")
		column := func(name string) []float64 { return rapid.SliceOfN(odd, n, n).Draw(t, name) }
		axis := func(name string) Axis {
			return Axis{Label: name, Scale: Scale(rapid.IntRange(0, 3).Draw(t, name+" scale")), Lo: odd.Draw(t, name+" lo"), Hi: odd.Draw(t, name+" hi"), Zero: rapid.Bool().Draw(t, name+" zero"), Reverse: rapid.Bool().Draw(t, name+" reverse")}
		}
		c := Curve{Name: "c", X: column("x"), Y: column("y"), Lo: column("lo"), Hi: column("hi"), LoSim: column("los"), HiSim: column("his"), Style: Style(rapid.IntRange(0, 3).Draw(t, "style"))}
		x, y := axis("x"), axis("y")
		rows := []Row{{Name: "r", Value: odd.Draw(t, "v"), Lo: odd.Draw(t, "l"), Hi: odd.Draw(t, "h"), Summary: rapid.Bool().Draw(t, "s"), Target: odd.Draw(t, "t"), HasTarget: true}, {Group: "g", Value: odd.Draw(t, "v2"), Lo: odd.Draw(t, "l2"), Hi: odd.Draw(t, "h2")}}
		for _, d := range []drawer{
			&Panels{Title: "p", X: x, Y: y, Panel: []Panel{{"a", "b", []Curve{c, c}}, {}}},
			&Forest{Title: "f", X: x, Rows: rows},
			&Cloud{Title: "c", X: x, Y: y, PX: c.X, PY: c.Y, Over: []Curve{c}},
		} {
			f, err := d.Draw()
			if err != nil {
				t.Fatalf("%v", err)
			}
			wellFormed(t, f, f.Title)
		}
		if n > 0 {
			f, err := (&Shares{Title: "s", X: x, Y: y, At: c.X, Parts: []Part{{"a", c.Y}, {"b", c.Lo}}}).Draw()
			if err != nil {
				t.Fatalf("%v", err)
			}
			wellFormed(t, f, "s")
		}
	})
}
