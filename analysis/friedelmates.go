package analysis

import (
	"context"

	"thinward/analysis/intensity"
)

// FriedelMates says how unequal Friedel mates of one position are; kind is acentric or
// centric, the latter a null. Share is a root mean square over the mean, see
// intensity.FriedelMates; Lo and Hi are its 95 % interval.
type FriedelMates struct {
	Crystal  string  `json:"crystal"`
	Position string  `json:"position"`
	Kind     string  `json:"kind"`
	N        int     `json:"n"`
	Share    float64 `json:"share"`
	Lo       float64 `json:"lo"`
	Hi       float64 `json:"hi"`
	Z        float64 `json:"z"`
	Why      string  `json:"why,omitempty"`
}

// FriedelMates says of every position how unequal its Friedel mates are. In a group with a
// centre, whose mates are equivalents, there is only the null.
func (s *Study) FriedelMates(ctx context.Context) ([]FriedelMates, error) {
	if _, _, err := s.Quality(ctx); err != nil {
		return nil, err
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.mates, nil
}

// friedelOf measures the mates of one scaled position.
func (s *Study) friedelOf(p *intensity.Scaled, crystal, position string) []FriedelMates {
	cat := s.intake.Catalogue
	m := intensity.Merge(cat.Len(), p)
	acentric, centric := intensity.MeasureFriedel(p, m, cat, cat.Shells(s.shellCount([]*intensity.Merged{m}), m))
	row := func(kind string, f *intensity.FriedelMates) FriedelMates {
		return FriedelMates{Crystal: crystal, Position: position, Kind: kind, N: f.N, Share: f.Share, Lo: f.Lo, Hi: f.Hi, Z: f.Z, Why: f.Why}
	}
	out := []FriedelMates{row("centric", centric)}
	if !cat.Group.Centrosymmetric() {
		out = append([]FriedelMates{row("acentric", acentric)}, out...)
	}
	return out
}
