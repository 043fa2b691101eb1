package size

// Region is a confidence set on the line: one interval, possibly unbounded, or
// two half-lines when a weak axis cannot exclude large values of either sign.
type Region struct{ Pieces []Interval }
