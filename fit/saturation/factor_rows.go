package saturation

import "math"

// FactorRow says of one polynomial, that of one mechanism on one curve, whether
// independent sites give the same curve (theory: section 5).
type FactorRow struct {
	Mechanism string `json:"mechanism"`
	Curve     string `json:"curve"`
	Sites     int    `json:"sites"`
	// Standing: "factors" (independent sites cannot be refused), "refused" (no
	// set of independent sites gives this curve), "by construction" (the
	// mechanism is one of independent sites), "not asked".
	Standing string `json:"standing"`
	// Share of studies simulated from the mechanism's own fit whose fitted
	// polynomials factor, out of Draws.
	Share Real `json:"share"`
	Draws int  `json:"draws"`
	// Behind is 2 ln(L/L_independent) of the mechanism against independent
	// sites, N·ln(SS_independent/SS) for constant scatter; P is the share of
	// studies simulated from independent sites in which it is as large.
	Behind Real      `json:"behind"`
	P      Real      `json:"p"`
	Roots  []RootRow `json:"roots"`
	// Kd are the dissociation constants of the independent sites fitted to the
	// same data, ascending; empty where they are refused or were not asked for.
	Kd  []SiteRow `json:"Kd"`
	Why *string   `json:"why"`
}

// RootRow is a root of a binding polynomial, in the ligand's unit.
type RootRow struct {
	Re Real `json:"re"`
	Im Real `json:"im"`
}

// SiteRow is the dissociation constant of one independent site.
type SiteRow struct {
	Value Real   `json:"value"`
	Low   Real   `json:"low"`
	High  Real   `json:"high"`
	Unit  string `json:"unit"`
	Held  string `json:"held"`
}

// Standings of a factorisation.
const (
	factors        = "factors"
	factorsRefused = "refused"
	factorsBuilt   = "by construction"
	factorsUnasked = "not asked"
)

// factorRow is an empty row of one curve.
func (f *fitted) factorRow(curve string) FactorRow {
	return FactorRow{Mechanism: f.row.Name, Curve: curve, Sites: f.row.Sites, Standing: factorsUnasked,
		Share: nan, Behind: nan, P: nan, Roots: []RootRow{}, Kd: []SiteRow{}}
}

// shareOf is a count of draws as a share; null without draws.
func shareOf(n, of int) Real {
	if of == 0 {
		return Real(math.NaN())
	}
	return Real(float64(n) / float64(of))
}
