package figure

// token is one colour by its role. Drawing uses stand-in colours that no figure
// would choose; svg.go turns each into the CSS variable with its fallback.
type token struct {
	name     string
	fallback string
	host     string // variable of a notebook page, tried before the fallback
}

// The series colours keep a contrast of three to one against white and against
// near-black, so that the fallbacks serve pages of both kinds. They were chosen
// to differ for the common kinds of colour blindness (blue, orange, plum, moss,
// brick, slate), and every series also has its own dash and marker.
var tokens = []token{
	{"ink", "#1d2733", "jp-content-font-color1"},
	{"muted", "#66707c", "jp-content-font-color2"},
	{"rule", "#d5dae0", "jp-border-color2"},
	{"paper", "#ffffff", "jp-layout-color0"},
	{"ghost", "#7d8590", ""},
	{"series-1", "#1f77a8", ""},
	{"series-2", "#c2660c", ""},
	{"series-3", "#98508f", ""},
	{"series-4", "#5b8526", ""},
	{"series-5", "#b8434b", ""},
	{"series-6", "#5f6fb0", ""},
}

const (
	ink = iota
	muted
	rule
	paper
	ghostly
	series
)

const seriesCount = 6

func seriesToken(i int) int { return series + i%seriesCount }

// standIn is the colour that stands for a token while drawing. The SVG writer
// divides by the opacity and cuts to whole numbers, so the channels carry a
// margin that survives it.
type standIn struct {
	token   int
	opacity float64
}

// RGBA gives red 254, green 1 and the token as blue, premultiplied.
func (c standIn) RGBA() (r, g, b, a uint32) {
	a = uint32(c.opacity*0xffff + 0.5)
	channel := func(v int) uint32 { return uint32((float64(v) + 0.4) * float64(a) / 255) }
	return channel(254), channel(1), channel(c.token), a
}

func (t token) css() string {
	if t.host == "" {
		return "var(--" + t.name + "," + t.fallback + ")"
	}
	return "var(--" + t.name + ",var(--" + t.host + "," + t.fallback + "))"
}

// dashes belong to the series in turn, so that lines differ without colour.
var dashes = [seriesCount][]float64{nil, {7, 3}, {2, 2.5}, {9, 3, 2, 3}, {4, 2}, {12, 4}}
