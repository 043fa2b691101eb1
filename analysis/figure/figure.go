package figure

// Figure is one drawing with its words and numbers.
type Figure struct {
	// Title names the figure, Desc says what it shows to one who cannot see it.
	// Both stand inside the SVG.
	Title, Desc string
	// SVG is one self-contained svg element of at most MaxBytes bytes.
	SVG string
	// Table holds the drawn numbers; long curves are thinned to at most 25 rows, to 12
	// where several share the table.
	Table *Table
	// Notes say what an axis or a limit left out, with counts; empty when nothing.
	Notes []string
}

// MaxBytes bounds the SVG of one figure.
const MaxBytes = 150_000

// Table is the numbers of a figure as text, one row a point. Words marks the
// columns that hold words; all others hold numbers or a dash.
type Table struct {
	Caption string
	Head    []string
	Words   []bool
	Rows    [][]string
}

// Scale is how an axis maps numbers to places.
type Scale int

// Scales. Root draws sqrt(|x|) with the sign of x, so that weak and strong
// reflections both have room and negative values stay on the axis; on an axis
// that crosses 0 it draws sqrt(|x|+c) - sqrt(c) instead, with c a twentieth of the
// larger end, since a bare root would blow up every change of sign. Log leaves out values <= 0 and
// counts them. Rank gives every distinct abscissa of the drawn points the same
// room.
const (
	Linear Scale = iota
	Root
	Log
	Rank
)

// Axis describes one axis. Lo and Hi are its ends; when both are 0, or Lo is not
// below Hi, or the scale is Rank, the data give them. Reverse draws it from high to low.
type Axis struct {
	Label   string
	Scale   Scale
	Lo, Hi  float64
	Reverse bool
	// Zero makes the range hold 0 and draws a line there.
	Zero bool
	// Marks are the ticks; nil chooses them by the length of the axis.
	Marks []Mark
	// Column heads the table in place of Label, where the drawn values are not what
	// the ticks say; empty for Label.
	Column string
}

// Mark is a tick with its own label.
type Mark struct {
	At    float64
	Label string
}
