package saturation

import (
	"math"

	"ligancy/mechanisms"
)

// balance is the conservation of the varied ligand in one tube,
//
//	x + S·Ȳ(x) + ν·x = X ,
//
// where X is the total and x the free ligand, S the concentration of sites and
// ν the nonspecifically bound ligand per free ligand, all in the ligand's unit.
type balance struct {
	lnTotal float64 // ln X
	sites   float64 // S
	ns      float64 // ν
	blocked bool    // no site is open: S counts as zero
}

// freeLigand solves a balance for ln x and leaves the curve's point there in p.
// The left side is smooth and increasing in ln x; Newton's method runs on
// ln(x + S·Ȳ + νx) − ln X, whose slope lies between 0 and n, inside a bracket.
// The balance closes to a few units of rounding.
func freeLigand(c mechanisms.Curve, b balance, p *mechanisms.Point) float64 {
	if b.blocked {
		b.sites = 0
	}
	if math.IsInf(b.lnTotal, -1) || b.sites == 0 {
		lnx := b.lnTotal - math.Log1p(b.ns)
		c.At(lnx, p)
		return lnx
	}
	high := b.lnTotal - math.Log1p(b.ns)
	low := math.Inf(-1)
	lnx := high
	for range 200 {
		c.At(lnx, p)
		free := math.Exp(lnx) * (1 + b.ns)
		sum := free + b.sites*p.Y
		g := math.Log(sum) - b.lnTotal
		if g > 0 {
			high = lnx
		} else {
			low = lnx
		}
		if math.Abs(g) <= 4e-16*math.Max(1, math.Abs(b.lnTotal)) {
			return lnx
		}
		next := lnx - g*sum/(free+b.sites*p.DY)
		if !(next >= low && next <= high) {
			next = bisected(low, high, lnx)
		}
		if next == lnx || math.Abs(next-lnx) <= 1e-16*math.Abs(lnx) {
			return lnx
		}
		lnx = next
	}
	return lnx
}

// bisected is the middle of a bracket that may have no lower end yet.
func bisected(low, high, lnx float64) float64 {
	if math.IsInf(low, -1) {
		return lnx - 2*(1+math.Abs(high-lnx))
	}
	return low + (high-low)/2
}

// response of ln x to the constants, by the implicit function theorem:
//
//	∂ln x/∂θ = −[S ∂Ȳ/∂θ + Ȳ ∂S/∂θ + x ∂ν/∂θ] / [x(1+ν) + S ∂Ȳ/∂ln x].
func (b *balance) denominator(lnx float64, p *mechanisms.Point) float64 {
	s := b.sites
	if b.blocked {
		s = 0
	}
	return math.Exp(lnx)*(1+b.ns) + s*p.DY
}

// slopeAgainstTotal is d ln x/d ln X: what multiplies a slope against free
// ligand to give the slope against total ligand.
func (b *balance) slopeAgainstTotal(lnx float64, p *mechanisms.Point) float64 {
	return math.Exp(b.lnTotal) / b.denominator(lnx, p)
}
