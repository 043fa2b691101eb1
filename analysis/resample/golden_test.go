package resample

var goldenWords [3][4]uint64
var goldenDraws []float64
var goldenPerm []int
