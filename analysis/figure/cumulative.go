package figure

import (
	"fmt"
	"math"
)

// Distribution is one measured cumulative distribution: Below[i] is the share of N
// values below Z[i], Law[i] the share that a law expects there (nil for none). N of
// 0 is not known.
type Distribution struct {
	Name          string
	Z, Below, Law []float64
	N             int
}

// DistributionKind is one panel of distributions under laws of one kind, such as
// those of centric reflections.
type DistributionKind struct {
	Name   string
	Curves []Distribution
}

// Cumulative is a figure of cumulative distributions N(z), one panel a kind: above,
// the measured shares as lines in colour with the law of each dashed in grey; below,
// on a scale of its own, measured minus law, which is small beside N(z) itself. The
// pale band there is where 95 % of shares of the fewest values fall by chance when
// the law is true, 1.96 sqrt(p (1 - p) / n) with p of the law.
type Cumulative struct {
	Title, Desc string // places and shares of the curves are added to Desc
	X           Axis   // of z
	Law         string // what the dashed lines are, for the legend
	Kinds       []DistributionKind
}

const (
	cumulativeWide = 430.0
	cumulativeHigh = 350.0
	stripHigh      = 74.0 // of the differences
	stripGap       = 30.0 // between both plots, for the label
)

// Draw draws all kinds side by side. It fails when there is none, when slices differ
// in length, or when the SVG passes MaxBytes.
func (c *Cumulative) Draw() (*Figure, error) { return c.draw(c.Title, c.Kinds) }

// Each draws every kind as a figure of its own, with the axes that they share in
// Draw. It fails as Draw does.
func (c *Cumulative) Each() ([]*Figure, error) {
	var out []*Figure
	for i := range c.Kinds {
		title := c.Title
		if name := c.Kinds[i].Name; name != "" {
			title += ": " + name
		}
		f, err := c.draw(title, c.Kinds[i:i+1])
		if err != nil {
			return nil, err
		}
		out = append(out, f)
	}
	return out, nil
}

func (c *Cumulative) check() error {
	if len(c.Kinds) == 0 {
		return fmt.Errorf("figure: %q has no distribution", c.Title)
	}
	for _, k := range c.Kinds {
		for _, d := range k.Curves {
			if len(d.Below) != len(d.Z) || d.Law != nil && len(d.Law) != len(d.Z) {
				return fmt.Errorf("figure: distribution %q of %q has %d places, %d shares and %d of the law", d.Name, c.Title, len(d.Z), len(d.Below), len(d.Law))
			}
		}
	}
	return nil
}

// over is measured minus law.
func (d *Distribution) over() []float64 {
	if d.Law == nil {
		return nil
	}
	out := make([]float64, len(d.Z))
	for i := range out {
		out[i] = d.Below[i] - d.Law[i]
	}
	return out
}

// chance is the half width of the band of the fewest values of a kind that has a law.
func (k *DistributionKind) chance() (z, half []float64) {
	least := -1
	for i, d := range k.Curves {
		if d.N > 0 && d.Law != nil && (least < 0 || d.N < k.Curves[least].N) {
			least = i
		}
	}
	if least < 0 {
		return nil, nil
	}
	d := &k.Curves[least]
	half = make([]float64, len(d.Z))
	for i, p := range d.Law {
		half[i] = 1.96 * math.Sqrt(max(p*(1-p), 0)/float64(d.N))
	}
	return d.Z, half
}

func (c *Cumulative) draw(title string, kinds []DistributionKind) (*Figure, error) {
	if err := c.check(); err != nil {
		return nil, err
	}
	var zs, shares, overs, bounds [][]float64
	legend := 0.0
	for i := range c.Kinds {
		k := &c.Kinds[i]
		for j := range k.Curves {
			d := &k.Curves[j]
			zs, shares, overs = append(zs, d.Z), append(shares, d.Below, d.Law), append(overs, d.over())
		}
		if _, half := k.chance(); half != nil {
			bounds = append(bounds, half, negated(half))
		}
		legend = max(legend, legendHeight(c.curves(k), cumulativeWide))
	}
	yAxis, overAxis := Axis{Label: "share below", Zero: true}, Axis{Label: "measured \u2212 law", Zero: true}
	x, y, over := newScaler(c.X, zs, nil), newScaler(yAxis, shares, nil), newScaler(overAxis, overs, bounds)
	overAxis.Marks = over.ticks(stripHigh, 24)
	high := cumulativeHigh + legend
	s := newSheet(float64(len(kinds))*cumulativeWide, high)
	top := 22 + legend + 28
	left := max(yAxis.leftRoom(y, high-top-footRoom-stripHigh-stripGap), overAxis.leftRoom(over, stripHigh))
	for i := range kinds {
		at := float64(i) * cumulativeWide
		upper := &frame{x0: at + left, y0: top, x1: at + cumulativeWide - 14, y1: high - footRoom - stripHigh - stripGap, x: x, y: y}
		lower := &frame{x0: upper.x0, y0: high - footRoom - stripHigh, x1: upper.x1, y1: high - footRoom, x: x, y: over}
		c.panel(s, &kinds[i], at, legend, upper, lower, &yAxis, &overAxis)
	}
	svg, err := s.finish(title, c.words(kinds))
	if err != nil {
		return nil, err
	}
	f := &Figure{Title: title, Desc: c.words(kinds), SVG: svg, Table: c.table(title, kinds)}
	if n := y.note(yAxis.Label); n != "" {
		f.Notes = append(f.Notes, n)
	}
	return f, nil
}

func negated(v []float64) []float64 {
	out := make([]float64, len(v))
	for i := range v {
		out[i] = -v[i]
	}
	return out
}

// curves are the lines of the upper plot; the laws share one entry of the legend.
func (c *Cumulative) curves(k *DistributionKind) []Curve {
	var measured, laws []Curve
	for i := range k.Curves {
		d := &k.Curves[i]
		measured = append(measured, Curve{Name: d.Name, X: d.Z, Y: d.Below})
		if d.Law != nil {
			law := Curve{X: d.Z, Y: d.Law, Style: Ghost}
			if len(laws) == 0 {
				law.Name = c.Law
			}
			laws = append(laws, law)
		}
	}
	return append(measured, laws...)
}

func (c *Cumulative) panel(s *sheet, k *DistributionKind, x, legend float64, upper, lower *frame, yAxis, overAxis *Axis) {
	curves := c.curves(k)
	s.text(nameStyle, x, 14, k.Name)
	s.legend(curves, x, 22, cumulativeWide)
	s.text(labelY, x, 22+legend+14, yAxis.Label)
	bare := c.X
	bare.Marks, bare.Label = []Mark{}, ""
	s.axes(upper, &bare, yAxis)
	s.text(labelY, x, lower.y0-9, overAxis.Label)
	s.axes(lower, &c.X, overAxis)
	if z, half := k.chance(); half != nil {
		s.fill(ghostly, 0.22, lower.band(z, negated(half), half)...)
	}
	drawn := false
	// Laws first, so that what was measured lies over them.
	for i := len(curves) - 1; i >= 0; i-- {
		token := ghostly
		if curves[i].Style != Ghost {
			token = seriesToken(i)
		}
		drawn = s.curve(upper, &curves[i], token, i) || drawn
	}
	for i := range k.Curves {
		if d := &k.Curves[i]; d.Law != nil {
			over := Curve{Name: d.Name, X: d.Z, Y: d.over()}
			s.curve(lower, &over, seriesToken(i), i)
		}
	}
	if !drawn {
		s.text(style{size: 13, token: muted, anchor: "middle"}, (upper.x0+upper.x1)/2, (upper.y0+upper.y1)/2, "nothing to draw")
	}
	s.readers = append(s.readers, reader{upper, k.Name, c.X.Label, yAxis.Label, curves})
}

// words says what the figure shows to one who cannot see it: every curve at its
// first place and where it is farthest from its law.
func (c *Cumulative) words(kinds []DistributionKind) string {
	text := c.Desc
	for i := range kinds {
		for j := range kinds[i].Curves {
			d := &kinds[i].Curves[j]
			if len(d.Z) == 0 {
				continue
			}
			name := d.Name
			if kinds[i].Name != "" {
				name = kinds[i].Name + ", " + name
			}
			text += fmt.Sprintf(" %s: %s below %s", name, Number(d.Below[0]), Number(d.Z[0]))
			far := farthest(d.over())
			if far < 0 {
				text += "."
				continue
			}
			text += fmt.Sprintf(" (by the law %s), farthest from the law at %s, by %s.", Number(d.Law[0]), Number(d.Z[far]), Number(d.over()[far]))
		}
	}
	return text
}

// farthest is the index of the largest size, -1 without a number.
func farthest(v []float64) int {
	far := -1
	for i, x := range v {
		if !math.IsNaN(x) && (far < 0 || math.Abs(x) > math.Abs(v[far])) {
			far = i
		}
	}
	return far
}

func (c *Cumulative) table(title string, kinds []DistributionKind) *Table {
	t := &Table{Caption: title, Head: []string{"kind", "curve", c.X.name("z"), "share below", "by the law", "measured \u2212 law"}, Words: []bool{true, true, false, false, false, false}}
	for i := range kinds {
		for j := range kinds[i].Curves {
			d := &kinds[i].Curves[j]
			over := d.over()
			for _, k := range thin(d.Z, sharedRows) {
				t.Rows = append(t.Rows, []string{kinds[i].Name, d.Name, Number(d.Z[k]), Number(d.Below[k]), cellOf(d.Law, k), cellOf(over, k)})
			}
		}
	}
	return t
}
