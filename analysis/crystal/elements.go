package crystal

// ElementKind says what kind of symmetry element forbids reflections.
type ElementKind int

// The kinds of Element.
const (
	CentringElement ElementKind = iota
	ScrewAxis
	GlidePlane
)

// String is "centring", "screw axis" or "glide plane".
func (k ElementKind) String() string {
	return [...]string{"centring", "screw axis", "glide plane"}[k]
}

// Element is a symmetry element that forbids reflections beyond what the
// centring forbids, with all those equivalent to it by symmetry.
type Element struct {
	Kind       ElementKind
	Symbol     string   // "C"; "21", "41"; "a", "n", "d", "e"
	Directions [][3]int // of the axes, or normal to the planes, in the direct lattice; nil for centring
	Name       string   // "21 along a", "n glide perpendicular to b", "C centring"
	Condition  string   // reflections that are allowed: "h00: h = 2n"
	tests      []zoneTest
}

type zoneTest struct{}

func findElements(g *Group) []Element { return nil }
