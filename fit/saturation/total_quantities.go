package saturation

import (
	"math"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// totalWanted lists half saturation and n_H against total ligand for one
// curve measured on a total axis, once for every concentration of sites.
// With u = ln x_half, n = n_H there, X = eᵘ(1+ν) + S/2 and D = eᵘ(1+ν) + S·n/4,
//
//	x_half_total = X ,   n_H_half_total = n·X/D .
func (m *model) totalWanted(cell int) []wanted {
	var out []wanted
	for _, b := range m.blocks {
		if !m.a.Data[b.data].Total || b.tracer >= 0 {
			continue
		}
		done := map[[2]int]bool{}
		for i := range b.rows {
			q := b.rows[i]
			if q.cell != cell || q.blocked || done[[2]int{q.high, q.ns}] {
				continue
			}
			done[[2]int{q.high, q.ns}] = true
			label := m.totalLabel(cell, b, &q)
			out = append(out,
				wanted{index: -1, back: math.Exp, make: m.againstTotal(cell, b, q, false), row: QuantityRow{Mechanism: m.c.Name,
					Curve: label, Of: "position", Name: "x_half_total", Unit: m.a.Ligand.Unit, Ligand: text(m.a.Ligand.Name)}},
				wanted{index: -1, back: same, make: m.againstTotal(cell, b, q, true), row: QuantityRow{Mechanism: m.c.Name,
					Curve: label, Of: "hill", Name: "n_H_half_total", Unit: "1"}})
		}
	}
	return out
}

// totalLabel names a curve and the level that settles its concentration of sites.
func (m *model) totalLabel(cell int, b *block, q *row) string {
	label := m.cells[cell].label
	if b.m.a.Data[b.data].SitesPresent.FromBmax == 0 || q.high < 0 || m.params[q.high].curve == "all" {
		return label
	}
	if label == "all" {
		return m.params[q.high].curve
	}
	return label + ", " + m.params[q.high].curve
}

// againstTotal is ln X_half or n_H_half_total as a function of Θ.
func (m *model) againstTotal(cell int, b *block, q row, slope bool) func() fit.Quantity {
	return func() fit.Quantity {
		half := m.measured(cell, at(0.5))()
		hill := m.measured(cell, mechanisms.HillAtHalf)()
		gu, gn := make([]float64, len(m.params)), make([]float64, len(m.params))
		return func(theta, grad []float64) float64 {
			u, n := half(theta, gu), hill(theta, gn)
			bal, dS, dNu := b.balanceGradient(&q, theta)
			x := math.Exp(u)
			free := x * (1 + bal.ns)
			total, d := free+bal.sites/2, free+bal.sites*n/4
			v := n * total / d
			for j := range grad {
				dFree := free*gu[j] + x*dNu[j]
				dTotal, dD := dFree+dS[j]/2, dFree+dS[j]*n/4+bal.sites*gn[j]/4
				grad[j] = dTotal / total
				if slope {
					grad[j] = v * (gn[j]/n + dTotal/total - dD/d)
				}
			}
			if slope {
				return v
			}
			return math.Log(total)
		}
	}
}

// balanceGradient is a row's balance with the gradients of S and ν.
func (b *block) balanceGradient(q *row, theta []float64) (bal balance, dS, dNu []float64) {
	bal, f := b.balanceOf(q, theta)
	dS, dNu = make([]float64, len(theta)), make([]float64, len(theta))
	d := &b.m.a.Data[b.data]
	high := value(theta, q.high, b.resp.High)
	if d.SitesPresent.FromBmax > 0 && q.high >= 0 {
		dS[q.high] = f
	}
	if d.Response.Kind == "bound" {
		if q.ns >= 0 {
			dNu[q.ns] = f
		}
		if d.SitesPresent.FromBmax == 0 && q.high >= 0 && high > 0 {
			dNu[q.high] = -bal.ns / high
		}
	}
	return bal, dS, dNu
}
