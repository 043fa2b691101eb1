// Package curve draws averaged curves through scattered pairs: moving means over
// rank windows, local lines, isotonic steps, their bands and the test of the
// whole curve. Every curve is conditional on the given axis: ranks are fixed
// before anything is drawn again.
//
// It is not for choosing the axis, not for sizes of an effect, and it does not
// plot.
package curve
