package simulate

import "fmt"

// Flaw is one thing wrong with an otherwise sound series, or one true effect of
// thickness, each made to trip one entry of the ledger.
type Flaw int

const (
	FlawOffset       Flaw = iota // 3 % additive constant in the thick positions
	FlawCopies                   // every observation stands on three frames
	FlawDeviations               // deviations of 10, 20, 30 %
	FlawNegatives                // negative observations removed
	FlawDeadCounts               // dead-time-like loss in the thick positions, 6 % at unit intensity
	FlawBleed                    // 3 % of lattice neighbours' signal in the thick positions
	FlawTilt                     // exchange of 25 % that grows as 1/cos of the tilt
	FlawScale                    // thick positions twice as intense as their thickness says
	FlawScatter                  // equivalents disagree by 25 % in the thick positions
	FlawDose                     // dose in step with thickness in all crystals, with damage
	FlawSigma                    // sigmas of the thin positions reported 1.5 times too small
	FlawIndexing                 // one position indexed the other way in an ambiguous group
	FlawCoverage                 // thick positions measured over a third of the tilt range
	FlawIce                      // ice rings in the thick positions
	FlawOneCrystal               // one crystal only
	FlawJitter                   // 20 % jitter between frames of the thick positions
	FlawFlicker                  // 60 % jitter between blocks of 2.5 degrees of the thick positions
	FlawForbidden                // forbidden reflections not recorded
	FlawExchange                 // a true exchange of 2, 6 and 12 %
	FlawCurb                     // a true curb of 0, 0.01 and 0.03
	FlawMates                    // Friedel mates of the thick positions differ by half of their intensity either way
	FlawOnce                     // lists merged elsewhere, sigmas of the thin positions 1.5 times too small
	FlawBackground               // background left in the thick positions, under a scale that swings
	FlawSaturation               // loss in the thick positions that takes half at unit intensity
	FlawAlike                    // crystals that lie alike
	FlawGroupLow                 // P 21 21 2 declared, P 21 21 21 true
	FlawGroupHigh                // P 21 21 21 declared, P 21 21 2 true
	FlawCentringLow              // P 2 2 21 declared, C 2 2 21 true
	FlawCentringHigh             // C 2 2 21 declared, P 2 2 21 true
	FlawLaueHigh                 // P 21 21 21 declared, P 1 21 1 true
	FlawReplicates               // replicate positions of the thin ones with an exchange of 15 %
	FlawCentringNull             // C 2 2 21 with background left in the thick positions, also where the centring forbids
	flaws
)

var flawNames = [flaws]string{
	"offset", "copies", "deviations", "negatives", "dead counts", "bleed", "tilt", "scale", "scatter", "dose",
	"sigma", "indexing", "coverage", "ice", "one crystal", "jitter", "flicker", "forbidden", "exchange", "curb",
	"mates", "once", "background", "saturation", "alike", "group low", "group high", "centring low", "centring high", "Laue class high", "replicates", "centring null",
}

// String returns the flaw in a word or two.
func (f Flaw) String() string {
	if f < 0 || f >= flaws {
		return fmt.Sprintf("Flaw(%d)", int(f))
	}
	return flawNames[f]
}

// Flaws lists every flaw in order.
func Flaws() []Flaw {
	out := make([]Flaw, flaws)
	for i := range out {
		out[i] = Flaw(i)
	}
	return out
}

// Flawed returns the plan of Sound(seed) with one flaw. It panics for an unknown flaw.
func Flawed(f Flaw, seed uint64) *Plan {
	if f < 0 || f >= flaws {
		panic("simulate: Flawed: unknown flaw")
	}
	p := Sound(seed)
	p.Title = "Series with a flaw: " + f.String()
	switch f {
	case FlawIndexing:
		p.SpaceGroup, p.Cell.B = "P 41", p.Cell.A
		p.Crystals[1].Positions[2].Reindex = "k,h,-l"
	case FlawOneCrystal:
		p.Crystals = p.Crystals[:1]
	case FlawAlike:
		for i := range p.Crystals {
			p.Crystals[i].Euler = []float64{20 + float64(i), 50, 70}
		}
	case FlawGroupLow:
		p.Declared = "P 21 21 2"
	case FlawGroupHigh:
		p.SpaceGroup, p.Declared = "P 21 21 2", "P 21 21 21"
	case FlawCentringLow:
		p.SpaceGroup, p.Declared, p.Common.WithCentring = "C 2 2 21", "P 2 2 21", true
	case FlawCentringHigh:
		p.SpaceGroup, p.Declared = "P 2 2 21", "C 2 2 21"
	case FlawLaueHigh:
		p.SpaceGroup, p.Declared = "P 1 21 1", "P 21 21 21"
	case FlawCentringNull:
		p.SpaceGroup, p.Common.WithCentring = "C 2 2 21", true
	case FlawReplicates:
		p.Crystals = Replicates(seed).Crystals
		for i := range p.Crystals {
			p.Crystals[i].Positions[1].Exchange = 0.15
		}
	}
	for i := range p.Crystals {
		for j := range p.Crystals[i].Positions {
			spoil(f, j, &p.Crystals[i].Positions[j])
		}
	}
	return p
}

// spoil changes position j of a crystal, 0 the thinnest and 2 the thickest.
func spoil(f Flaw, j int, q *Position) {
	thick := j == 2
	switch {
	case f == FlawCopies:
		q.Copies = 3
	case f == FlawDeviations:
		q.Deviation = 0.1 * float64(j+1)
	case f == FlawNegatives:
		cut := 0.0
		q.CutBelow = &cut
	case f == FlawTilt:
		q.Exchange, q.TiltThickens = 0.25, true
	case f == FlawDose:
		q.Order, q.Dose, q.DoseB = j+1, 3*float64(j+1), 0.25
	case f == FlawForbidden:
		q.OmitForbidden = true
	case f == FlawExchange:
		q.Exchange = []float64{0.02, 0.06, 0.12}[j]
	case f == FlawCurb:
		q.Curb = []float64{0, 0.01, 0.03}[j]
	case f == FlawOnce:
		q.Once = true
		q.Counts *= 0.1
		if j == 0 {
			q.SigmaFactor = 0.5
		}
	case f == FlawSigma && j == 0:
		q.SigmaFactor = 1 / 1.5
	case f == FlawMates && j > 0:
		q.Polarity = 0.8
	case f == FlawBackground && thick:
		q.Offset, q.Cos, q.Sin = 0.15, []float64{0.9}, []float64{-0.4}
	case f == FlawSaturation && thick:
		q.DeadCounts = 1 / 560.
	case (f == FlawOffset || f == FlawCentringNull) && thick:
		q.Offset = 0.03
	case f == FlawDeadCounts && thick:
		q.DeadCounts = 1e-4
	case f == FlawBleed && thick:
		q.Bleed = 0.03
	case f == FlawScale && thick:
		q.LnScale = 0.7
	case f == FlawScatter && thick:
		q.Scatter = 0.25
	case f == FlawCoverage && thick:
		q.TiltDeg = []float64{-20, 20}
	case f == FlawIce && thick:
		q.Ice = 0.5
	case f == FlawJitter && thick:
		q.FrameJitter = 0.2
	case f == FlawFlicker && thick:
		q.FrameDeg, q.FrameJitter = 2.5, 0.6
	}
}
