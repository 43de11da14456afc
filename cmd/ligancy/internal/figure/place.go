package figure

import "math"

// obstacles are places that a label should leave clear.
type obstacles struct {
	at    []XY
	boxes [][4]float64
}

// polyline adds places along a curve, a few units apart.
func (o *obstacles) polyline(pts []XY) {
	for i := 1; i < len(pts); i++ {
		a, b := pts[i-1], pts[i]
		n := int(math.Ceil(math.Hypot(b.X-a.X, b.Y-a.Y) / 4))
		for k := range min(n, 200) {
			t := float64(k) / float64(n)
			if q := (XY{a.X + t*(b.X-a.X), a.Y + t*(b.Y-a.Y)}); finite(q.Y) {
				o.at = append(o.at, q)
			}
		}
	}
}

// place finds where a label of a width stands near its own curve with as
// little as possible in its way: it tries both sides of every part of the
// curve. The place is the start of the baseline.
func (o *obstacles) place(own []XY, width, size float64, p *panel) XY {
	best, least := XY{p.x.x0 + size, p.top + 1.5*size}, math.Inf(1)
	height := p.bottom - p.top
	for i := 0; i < len(own); i += max(1, len(own)/60) {
		q := own[i]
		if !finite(q.Y) {
			continue
		}
		for _, c := range []XY{
			{q.X - 0.8*size - width, q.Y}, {q.X + 0.8*size, q.Y + 0.7*size},
			{q.X - 1.6*size - width, q.Y}, {q.X + 1.6*size, q.Y + 0.7*size},
			{q.X - width/2, q.Y - size}, {q.X - width/2, q.Y + 1.8*size},
		} {
			box := [4]float64{c.X - 5, c.Y - size - 2, c.X + width + 5, c.Y + 0.3*size + 2}
			if box[0] < p.x.x0 || box[2] > p.x.x1 || box[1] < p.top || box[3] > p.bottom {
				continue
			}
			// The middle of the curve is where curves are apart.
			cost := 2 * math.Abs((p.bottom-q.Y)/height-0.5)
			cost += 3 * o.covered(box)
			if cost < least {
				best, least = c, cost
			}
		}
	}
	o.boxes = append(o.boxes, [4]float64{best.X - 3, best.Y - size, best.X + width + 3, best.Y + 0.3*size})
	return best
}

// covered counts what lies under a box; another label counts most.
func (o *obstacles) covered(box [4]float64) float64 {
	n := 0.0
	for _, q := range o.at {
		if q.X > box[0] && q.X < box[2] && q.Y > box[1] && q.Y < box[3] {
			n++
		}
	}
	for _, b := range o.boxes {
		if b[0] < box[2] && box[0] < b[2] && b[1] < box[3] && box[1] < b[3] {
			n += 40
		}
	}
	return n
}
