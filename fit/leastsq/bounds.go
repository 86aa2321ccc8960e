package leastsq

import "math"

// This file keeps the damped step between the bounds: an active set, never a
// change of the model.

// activate lists the parameters that are free to move.
func (d *damped) activate() {
	d.free = d.free[:0]
	for i, x := range d.x {
		switch {
		case d.b.lower[i] == d.b.upper[i]:
		case x <= d.b.lower[i] && d.g[i] > 0:
		case x >= d.b.upper[i] && d.g[i] < 0:
		default:
			d.free = append(d.free, i)
		}
	}
}

// step fills p with the damped step that stays between the bounds and returns
// the decrease that the model promises.
func (d *damped) step(λ float64) (float64, bool) {
	clear(d.p)
	free := append(d.keep[:0], d.free...)
	for len(free) > 0 {
		if !d.m.solve(d.p, free, λ) || !allFinite(d.p) {
			return 0, false
		}
		inside := free[:0]
		for _, i := range free {
			switch t := d.x[i] + d.p[i]; {
			case t < d.b.lower[i]:
				d.p[i] = d.b.lower[i] - d.x[i]
			case t > d.b.upper[i]:
				d.p[i] = d.b.upper[i] - d.x[i]
			default:
				inside = append(inside, i)
			}
		}
		if len(inside) == len(free) {
			break
		}
		free = inside
	}
	if pred := d.m.predicted(d.p); pred > 0 {
		return pred, true
	}
	return d.shortened(λ)
}

// shortened is the step of all free parameters cut where the first reaches its
// bound: a descent direction, since the model is convex.
func (d *damped) shortened(λ float64) (float64, bool) {
	clear(d.p)
	free := append(d.keep[:0], d.free...)
	for len(free) > 0 {
		if !d.m.solve(d.p, free, λ) || !allFinite(d.p) {
			return 0, false
		}
		t := 1.0
		inside := free[:0]
		for _, i := range free {
			room := d.b.upper[i] - d.x[i]
			if d.p[i] < 0 {
				room = d.x[i] - d.b.lower[i]
			}
			switch a := math.Abs(d.p[i]); {
			case a > 0 && room == 0:
				d.p[i] = 0
				continue
			case a > room:
				t = math.Min(t, room/a)
			}
			inside = append(inside, i)
		}
		if len(inside) == len(free) {
			for _, i := range free {
				d.p[i] *= t
			}
			break
		}
		free = inside
	}
	return d.m.predicted(d.p), true
}

// trial puts x+p into dst, between the bounds to the last bit, and tells
// whether that differs from x.
func (d *damped) trial(dst []float64) bool {
	moved := false
	for i, x := range d.x {
		t := x + d.p[i]
		switch {
		case d.p[i] == 0:
			t = x
		case t <= d.b.lower[i] || d.p[i] == d.b.lower[i]-x:
			t = d.b.lower[i]
		case t >= d.b.upper[i] || d.p[i] == d.b.upper[i]-x:
			t = d.b.upper[i]
		}
		dst[i] = t
		moved = moved || t != x
	}
	return moved
}
