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
func (o *obstacles) place(own []XY, width, size float64, p *panel) (at XY, cost float64) {
	best, least := XY{p.x.x0 + size, p.top + 1.5*size}, math.Inf(1)
	height := p.bottom - p.top
	for i := 0; i < len(own); i += max(1, len(own)/60) {
		q := own[i]
		if !finite(q.Y) {
			continue
		}
		for _, c := range []XY{
			{q.X - 0.8*size - width, q.Y}, {q.X + 0.8*size, q.Y + 0.7*size},
			{q.X - 0.6*size - width, q.Y}, {q.X + 0.6*size, q.Y + 0.7*size},
			{q.X - 1.6*size - width, q.Y}, {q.X + 1.6*size, q.Y + 0.7*size},
			{q.X - width/2, q.Y - size}, {q.X - width/2, q.Y + 1.8*size},
		} {
			box := [4]float64{c.X - 4, c.Y - size - 1, c.X + width + 4, c.Y + 0.3*size + 1}
			if box[0] < p.x.x0 || box[2] > p.x.x1 || box[1] < p.top || box[3] > p.bottom {
				continue
			}
			// The middle of the curve is where curves are apart.
			cost := 3 * math.Abs((p.bottom-q.Y)/height-0.5)
			if cost < least {
				cost += 0.4 * o.covered(box, (least-cost)/0.4)
			}
			if cost < least {
				best, least = c, cost
			}
		}
	}
	return best, least
}

// take keeps the place of a label clear of others.
func (o *obstacles) take(at XY, width, size float64) {
	o.boxes = append(o.boxes, [4]float64{at.X - 3, at.Y - size, at.X + width + 3, at.Y + 0.3*size})
}

// named is a curve to be named: its name, a shorter one, where it runs.
type named struct {
	name, short string
	ink         Ink
	at          []XY
}

// names writes the names of curves beside them. Where one finds no clear place
// for its whole name, all but the first take the shorter ones.
func (o *obstacles) names(p *panel, curves []named) {
	if len(curves) < 2 {
		return
	}
	lay := func(short bool) (labels []Label, at []XY, cost float64) {
		free := len(o.boxes)
		for i, c := range curves {
			text := c.name
			if short && i > 0 {
				text = c.short
			}
			l := Words(SansBold, text).Cut(p.s.Size, 0.4*(p.x.x1-p.x.x0))
			q, price := o.place(c.at, l.Width(p.s.Size), p.s.Size, p)
			o.take(q, l.Width(p.s.Size), p.s.Size)
			labels, at, cost = append(labels, l), append(at, q), max(cost, price)
		}
		o.boxes = o.boxes[:free]
		return labels, at, cost
	}
	labels, at, cost := lay(false)
	if cost > 1 {
		if l, q, less := lay(true); less < cost-0.3 {
			labels, at = l, q
		}
	}
	for i, c := range curves {
		o.take(at[i], labels[i].Width(p.s.Size), p.s.Size)
		p.d.add(&lettering{x: at[i].X, y: at[i].Y, size: p.s.Size, ink: c.ink, runs: labels[i], halo: true})
	}
}

// along finds a place for a label beside an upright line.
func (o *obstacles) along(line []XY, width, size float64, p *panel) XY {
	var own []XY
	for k := range 20 {
		t := (float64(k) + 0.5) / 20
		own = append(own, XY{line[0].X, line[0].Y + t*(line[1].Y-line[0].Y)})
	}
	best, least := own[0], math.Inf(1)
	for _, q := range own {
		for _, x := range []float64{q.X - 0.5*size - width, q.X + 0.5*size} {
			box := [4]float64{x - 2, q.Y - 0.8*size, x + width + 2, q.Y + 0.3*size}
			if box[0] < p.x.x0 || box[2] > p.x.x1 {
				continue
			}
			if cost := o.covered(box, least); cost < least {
				best, least = XY{x, q.Y}, cost
			}
		}
	}
	o.boxes = append(o.boxes, [4]float64{best.X - 2, best.Y - 0.8*size, best.X + width + 2, best.Y + 0.3*size})
	return best
}

// covered counts what lies under a box; another label counts most. It stops
// counting once there is more than a limit.
func (o *obstacles) covered(box [4]float64, limit float64) float64 {
	n := 0.0
	for _, b := range o.boxes {
		if b[0] < box[2] && box[0] < b[2] && b[1] < box[3] && box[1] < b[3] {
			n += 40
		}
	}
	for _, q := range o.at {
		if q.X > box[0] && q.X < box[2] && q.Y > box[1] && q.Y < box[3] {
			if n++; n > limit {
				return n
			}
		}
	}
	return n
}
