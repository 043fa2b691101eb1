package intensity

import "fmt"

// RowPolicy says what rows of one index are to each other.
type RowPolicy int

const (
	// RowsAuto decides by what the rows look like and refuses to guess.
	RowsAuto RowPolicy = iota
	// RowsRepeats takes every row as an observation of its own.
	RowsRepeats
	// RowsCopies takes rows of equal index, intensity and sigma as one observation.
	RowsCopies
	// RowsSlices takes rows of one index on consecutive frames as parts of one
	// observation, to be summed.
	RowsSlices
)

var policyNames = [...]string{"auto", "repeats", "copies", "slices"}

// String returns the word the manifest uses: auto, repeats, copies or slices.
func (p RowPolicy) String() string {
	if p < 0 || int(p) >= len(policyNames) {
		return fmt.Sprintf("RowPolicy(%d)", int(p))
	}
	return policyNames[p]
}

// ParseRowPolicy reads the word of the manifest; the empty word is auto.
func ParseRowPolicy(word string) (RowPolicy, error) {
	if word == "" {
		return RowsAuto, nil
	}
	for p, name := range policyNames {
		if name == word {
			return RowPolicy(p), nil
		}
	}
	return RowsAuto, fmt.Errorf("rows = %q is none of \"auto\", \"repeats\", \"copies\", \"slices\"", word)
}

// LimitOfRows is the share of rows (one in twenty) above which copies are
// collapsed, and rows that might be slices are a question, in automatic mode.
const LimitOfRows = 0.05

// RowAudit is what became of the rows of one list.
type RowAudit struct {
	Rows         int // rows read
	Observations int // observations they amount to
	Distinct     int // different indices among them

	Policy RowPolicy // what was done, never RowsAuto
	Reason string    // why, in words

	// Copies counts rows that repeat intensity and sigma of a row of the same
	// index on the same or the next frame (without frames: of the row of that
	// index before them); CopyShare is Copies over Rows.
	Copies    int
	CopyShare float64
	// Neighbours counts rows that have a row of the same index on the frame
	// before but another intensity or sigma; NeighbourShare is over Rows.
	Neighbours     int
	NeighbourShare float64
	// Repeats counts observations beyond the first of their index.
	Repeats     int
	RepeatShare float64 // over Observations

	// PhiMean says how the angle of a collapsed or summed observation was
	// formed: "plain", "partiality" (mean weighted by the recorded share), or ""
	// when nothing was joined or there are no angles.
	PhiMean string
	// Incomplete counts summed observations whose recorded shares add to less
	// than 0.95.
	Incomplete int
	Warnings   []Warning
}

// RowsUnclearError says that rows of one index on neighbouring frames differ
// and nothing tells whether they are parts of one reflection or measurements
// of their own. The remedy is the manifest key rows.
type RowsUnclearError struct {
	Neighbours, Rows int
	Example          [3]int // one such index
	Why              string // what is missing or contradicts
}

// Error names the counts, an example and the manifest key.
func (e *RowsUnclearError) Error() string {
	return fmt.Sprintf("%d of %d rows have another row of the same index beside them with a different intensity (for instance %d %d %d), and %s: "+
		"say in the manifest rows = \"slices\" (parts of one reflection, summed), \"repeats\" (measurements of their own) or \"copies\" (only equal rows joined)",
		e.Neighbours, e.Rows, e.Example[0], e.Example[1], e.Example[2], e.Why)
}

// Collapse turns rows into observations.
//
// Copies (equal index, intensity and sigma) become one observation with the
// mean angle and partiality and the middle frame. Slices (one index on
// consecutive frames) become one with
//
//	I = sum I_i,  sigma = sqrt(sum sigma_i^2)
//
// the recorded shares summed and the angle weighted by them, plain where there
// are none. In automatic mode more than LimitOfRows copies are collapsed;
// neighbouring rows that differ are summed when a partiality column shows
// them to be parts, and otherwise, above LimitOfRows of the rows, refused with a
// *RowsUnclearError. What is kept as repeats comes back as the same columns,
// not copied; joined observations are ordered by h, k, l, then frame. Errors:
// what Columns.Check refuses, RowsSlices without frames, an unknown policy.
// Time is n log n at most, memory 8 bytes a row beside the result.
func Collapse(rows *Columns, policy RowPolicy) (*Columns, *RowAudit, error) {
	if err := rows.Check(); err != nil {
		return nil, nil, err
	}
	if policy < RowsAuto || policy > RowsSlices {
		return nil, nil, fmt.Errorf("row policy %d is unknown", int(policy))
	}
	order := byIndex(rows)
	a := survey(rows, order)
	if policy == RowsAuto {
		if err := a.decide(rows, order); err != nil {
			return nil, a, err
		}
	} else {
		a.Policy, a.Reason = policy, "declared in the manifest"
	}
	out := rows
	switch a.Policy {
	case RowsCopies:
		out = joinCopies(rows, order, a)
	case RowsSlices:
		if rows.Frame == nil {
			return nil, a, fmt.Errorf("rows = \"slices\" needs frame numbers, and the list has none")
		}
		out = joinSlices(rows, order, a)
	default:
		a.warnKept()
	}
	a.Observations = out.Len()
	a.Repeats = a.Observations - a.Distinct
	if a.Observations > 0 {
		a.RepeatShare = float64(a.Repeats) / float64(a.Observations)
	}
	return out, a, nil
}

// survey counts what the rows look like, in the order of index and frame.
func survey(c *Columns, order []int32) *RowAudit {
	a := &RowAudit{Rows: c.Len()}
	for i, r := range order {
		if i == 0 || !c.sameIndex(r, order[i-1]) {
			a.Distinct++
			continue
		}
		// Rows of one frame may stand in any order, so a copy of the frame
		// before can lie behind several rows of this one.
		switch copied, beside := c.lookBack(order, i); {
		case copied:
			a.Copies++
		case beside:
			a.Neighbours++
		}
	}
	if a.Rows > 0 {
		a.CopyShare = float64(a.Copies) / float64(a.Rows)
		a.NeighbourShare = float64(a.Neighbours) / float64(a.Rows)
	}
	return a
}

// lookBackMost bounds the rows of one index on two frames that are compared
// with each other, so that a list of one index alone stays linear.
const lookBackMost = 16

// lookBack reports whether row order[i] repeats a row before it, and whether a
// row of the frame before carries the same index. Without frames only the row
// of that index just before it is looked at, and nothing lies beside anything.
func (c *Columns) lookBack(order []int32, i int) (copied, beside bool) {
	r := order[i]
	for j := i - 1; j >= 0 && i-j <= lookBackMost && c.sameIndex(r, order[j]); j-- {
		p := order[j]
		if c.Frame != nil && int64(c.Frame[r])-int64(c.Frame[p]) > 1 {
			break
		}
		if c.I[r] == c.I[p] && c.Sigma[r] == c.Sigma[p] {
			return true, beside
		}
		if c.Frame == nil {
			break
		}
		beside = beside || c.Frame[r] != c.Frame[p]
	}
	return false, beside
}

func (a *RowAudit) decide(c *Columns, order []int32) error {
	many := a.NeighbourShare > LimitOfRows
	if a.CopyShare > LimitOfRows {
		a.Policy = RowsCopies
		a.Reason = fmt.Sprintf("%.1f %% of the rows repeat intensity and sigma of the row of the same index beside them", 100*a.CopyShare)
		if many {
			return a.unclear(c, order, "others repeat theirs exactly")
		}
		return nil
	}
	if c.Partiality != nil {
		parts, whole, loose := sliceSigns(c, order)
		switch {
		case loose > 0 && float64(loose) > LimitOfRows*float64(a.Rows):
			a.Neighbours = loose
			return a.unclear(c, order, "without frame numbers parts cannot be put together")
		case parts > 0 && parts >= 9*whole:
			a.Policy = RowsSlices
			a.Reason = fmt.Sprintf("%d rows lie beside one of the same index with shares that add to one at most", parts)
			return nil
		case many:
			return a.unclear(c, order, "their recorded shares add to more than one")
		}
	} else if many {
		return a.unclear(c, order, "there is no partiality column")
	}
	a.Policy = RowsRepeats
	a.Reason = "rows of one index are neither copies nor parts of one reflection"
	return nil
}

// sliceSigns counts neighbouring rows whose recorded shares can be parts of one
// reflection, those that cannot, and partial rows of one index in a list
// without frames.
func sliceSigns(c *Columns, order []int32) (parts, whole, loose int) {
	const most = 1.1 // shares are estimates; ten percent over is still one reflection
	for i := 1; i < len(order); i++ {
		r, p := order[i], order[i-1]
		if !c.sameIndex(r, p) {
			continue
		}
		sum := c.Partiality[r] + c.Partiality[p]
		switch {
		case c.Frame == nil:
			if sum <= most {
				loose++
			}
		case int64(c.Frame[r])-int64(c.Frame[p]) != 1:
		case sum <= most:
			parts++
		default:
			whole++
		}
	}
	return parts, whole, loose
}

func (a *RowAudit) unclear(c *Columns, order []int32, why string) error {
	e := &RowsUnclearError{Neighbours: a.Neighbours, Rows: a.Rows, Why: why}
	for i := 1; i < len(order); i++ {
		r := order[i]
		if !c.sameIndex(r, order[i-1]) {
			continue
		}
		if copied, beside := c.lookBack(order, i); !copied && (beside || c.Frame == nil) {
			e.Example = [3]int{int(c.H[r]), int(c.K[r]), int(c.L[r])}
			break
		}
	}
	return e
}

func (a *RowAudit) warnKept() {
	if a.Copies > 0 {
		a.Warnings = append(a.Warnings, Warning{Code: "copies-kept", Text: fmt.Sprintf(
			"%d rows (%.1f %%) repeat intensity and sigma of a row of the same index beside them and were kept as observations; copies are no multiplicity and no measure of error",
			a.Copies, 100*a.CopyShare)})
	}
	if a.Neighbours > 0 {
		a.Warnings = append(a.Warnings, Warning{Code: "neighbours-kept", Text: fmt.Sprintf(
			"%d rows (%.1f %%) have another row of the same index on the frame before and were kept as observations of their own; if they are parts of one reflection, say rows = \"slices\"",
			a.Neighbours, 100*a.NeighbourShare)})
	}
}
