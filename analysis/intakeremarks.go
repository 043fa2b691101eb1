package analysis

import (
	"fmt"
	"maps"
	"slices"

	"thinward/analysis/intensity"
)

// mergedBelow is the multiplicity below which a list is called merged; chosen, no
// source.
const mergedBelow = 1.1

// remarksOn counts what does not come through of one position as it was read.
func (s *Study) remarksOn(i, j int, r *IntakeResult) []IntakeRemark {
	p, a := &s.Series.Crystals[i].Positions[j], &s.intake.Positions[i][j]
	var out []IntakeRemark
	add := func(m IntakeRemark) {
		if m.Count > 0 {
			m.Crystal, m.Position = r.Crystal, r.Position
			out = append(out, m)
		}
	}
	for _, f := range p.Sources {
		for _, x := range f.SetAside {
			add(IntakeRemark{Kind: "unusable", Count: x.N, Why: x.Reason, File: f.Path, FirstLine: x.FirstLine})
		}
	}
	joined := a.Audit.Rows - a.Audit.Observations
	switch a.Audit.Policy {
	case intensity.RowsCopies:
		add(IntakeRemark{Kind: "copies", Count: joined, Why: a.Audit.Reason})
	case intensity.RowsSlices:
		add(IntakeRemark{Kind: "slices", Count: joined, Why: a.Audit.Reason})
	}
	for _, reason := range slices.Sorted(maps.Keys(a.Excluded)) {
		add(IntakeRemark{Kind: "excluded", Count: a.Excluded[reason], Why: excludedWhy[reason]})
	}
	if p.Merged || r.Multiplicity < mergedBelow {
		why := "almost every reflection stands once, as in a merged list"
		if p.Merged {
			why = "the file says that the list is merged"
		}
		add(IntakeRemark{Kind: "merged", Count: r.Unique, Why: fmt.Sprintf("%s: sigmas cannot be checked and no halves be made; give the observations before merging", why)})
	}
	return out
}

var excludedWhy = map[string]string{
	"frame": "the manifest excludes their frame",
	"shell": "the manifest excludes their resolution shell (shells_A)",
	"ice":   "the manifest excludes the rings of ice",
}
