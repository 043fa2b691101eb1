package figure

import "math"

// frame is the rectangle of a plot, in pixels, with its two scales.
type frame struct {
	x0, y0, x1, y1 float64
	x, y           *scaler
}

func (f *frame) px(v float64) float64 { return f.x0 + f.x.at(v)*(f.x1-f.x0) }
func (f *frame) py(v float64) float64 { return f.y1 - f.y.at(v)*(f.y1-f.y0) }

func (f *frame) place(x, y float64) (point, bool) {
	p := point{f.px(x), f.py(y)}
	return p, !math.IsNaN(p.x) && !math.IsNaN(p.y)
}

func (f *frame) holds(p point) bool {
	const e = 0.05
	return p.x >= f.x0-e && p.x <= f.x1+e && p.y >= f.y0-e && p.y <= f.y1+e
}

// segment cuts a segment to the frame (Liang and Barsky, 1984).
func (f *frame) segment(a, b point) (point, point, bool) {
	t0, t1 := 0.0, 1.0
	dx, dy := b.x-a.x, b.y-a.y
	for _, e := range [4][2]float64{{-dx, a.x - f.x0}, {dx, f.x1 - a.x}, {-dy, a.y - f.y0}, {dy, f.y1 - a.y}} {
		p, q := e[0], e[1]
		switch {
		case p == 0 && q < 0:
			return a, b, false
		case p < 0:
			t0 = max(t0, q/p)
		case p > 0:
			t1 = min(t1, q/p)
		}
	}
	if t0 > t1 {
		return a, b, false
	}
	return point{a.x + t0*dx, a.y + t0*dy}, point{a.x + t1*dx, a.y + t1*dy}, true
}

// polyline turns a curve into the pieces of it that lie inside the frame.
func (f *frame) polyline(x, y []float64) [][]point {
	var out [][]point
	var last point
	open, have := false, false
	for i := range x {
		p, ok := f.place(x[i], y[i])
		if !ok {
			open, have = false, false
			continue
		}
		if have && p != last {
			a, b, in := f.segment(last, p)
			if !in {
				open = false
			} else if n := len(out); open && out[n-1][len(out[n-1])-1] == a {
				out[n-1] = append(out[n-1], b)
			} else {
				out = append(out, []point{a, b})
				open = true
			}
		}
		last, have = p, true
	}
	return out
}

// band gives the closed outlines between lo and hi, one for each run of finite
// points, pressed into the frame.
func (f *frame) band(x, lo, hi []float64) [][]point {
	var out [][]point
	var up, down []point
	flush := func() {
		if len(up) > 1 {
			for i := len(down) - 1; i >= 0; i-- {
				up = append(up, down[i])
			}
			out = append(out, up)
		}
		up, down = nil, nil
	}
	for i := range x {
		a, okA := f.place(x[i], open(lo[i], -largest))
		b, okB := f.place(x[i], open(hi[i], largest))
		if !okA || !okB || a.x < f.x0-0.05 || a.x > f.x1+0.05 {
			flush()
			continue
		}
		a.y, b.y = f.press(a.y), f.press(b.y)
		if n := len(up); n > 0 && up[n-1] == b && down[n-1] == a {
			continue
		}
		up, down = append(up, b), append(down, a)
	}
	flush()
	return out
}

func (f *frame) press(y float64) float64 { return min(max(y, f.y0), f.y1) }

// open turns an infinite end into one far outside every frame.
func open(v, far float64) float64 {
	if math.IsInf(v, 0) {
		return far
	}
	return v
}
