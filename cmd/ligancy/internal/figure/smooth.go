package figure

import "math"

// XY is a place.
type XY struct{ X, Y float64 }

// smooth adds a curve through points in order of x that never swings beyond
// them: cubic Hermite pieces with the slopes of Fritsch and Carlson (SIAM J
// Numer Anal 1980;17:238), so that a saturation never overshoots 1. Points
// that are not finite break the curve.
func (p *Path) smooth(points []XY) {
	for from := 0; from < len(points); {
		to := from
		for to < len(points) && finite(points[to].X) && finite(points[to].Y) {
			to++
		}
		if to-from > 1 {
			p.monotone(points[from:to])
		}
		from = to + 1
	}
}

// monotone adds one unbroken piece of a smooth curve.
func (p *Path) monotone(pts []XY) {
	n := len(pts)
	delta, slope := make([]float64, n-1), make([]float64, n)
	for i := range delta {
		if h := pts[i+1].X - pts[i].X; h > 0 {
			delta[i] = (pts[i+1].Y - pts[i].Y) / h
		}
	}
	slope[0], slope[n-1] = delta[0], delta[n-2]
	for i := 1; i < n-1; i++ {
		if delta[i-1]*delta[i] > 0 {
			// Weighted harmonic mean of the neighbouring chords.
			h0, h1 := pts[i].X-pts[i-1].X, pts[i+1].X-pts[i].X
			w0, w1 := 2*h1+h0, h1+2*h0
			slope[i] = (w0 + w1) / (w0/delta[i-1] + w1/delta[i])
		}
	}
	p.MoveTo(pts[0].X, pts[0].Y)
	for i := range n - 1 {
		h := (pts[i+1].X - pts[i].X) / 3
		p.CurveTo(pts[i].X+h, pts[i].Y+h*slope[i], pts[i+1].X-h, pts[i+1].Y-h*slope[i+1], pts[i+1].X, pts[i+1].Y)
	}
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

// between cuts points in order of x to those from lo to hi, with points laid
// in at the cuts.
func between(pts []XY, lo, hi float64) []XY {
	var out []XY
	for i, q := range pts {
		if i > 0 {
			for _, cut := range [2]float64{lo, hi} {
				if r := pts[i-1]; r.X < cut && cut < q.X {
					out = append(out, XY{cut, r.Y + (q.Y-r.Y)*(cut-r.X)/(q.X-r.X)})
				}
			}
		}
		if q.X >= lo && q.X <= hi {
			out = append(out, q)
		}
	}
	return out
}
