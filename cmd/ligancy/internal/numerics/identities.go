// Package numerics puts the program's numerics to the test against exact
// mathematics and certified values, on the machine it runs on.
package numerics

import (
	"fmt"
	"math"

	"ligancy/mechanisms"
)

// Row is one number that has to come out.
type Row struct {
	Check    string  `json:"check"` // what is claimed
	At       string  `json:"at"`    // for which constants
	Exact    float64 `json:"exact"`
	Reached  float64 `json:"reached"`
	Relative float64 `json:"relative_deviation"`
	Held     bool    `json:"held"`
}

// Tolerance of an identity, relative. The identities are exact; what is lost is rounding.
const Tolerance = 1e-10

// Identities evaluates exact statements about binding curves: each row's exact
// value is worked out from a closed form here, its reached value by the
// mechanism that fits use.
func Identities() []Row {
	var rows []Row
	rows = append(rows, twoSites()...)
	rows = append(rows, twoClasses()...)
	rows = append(rows, hillRatios()...)
	rows = append(rows, concertedRidge()...)
	rows = append(rows, concertedAnywhere()...)
	rows = append(rows, concertedAsStepwise()...)
	rows = append(rows, contacts()...)
	rows = append(rows, medians()...)
	for i := range rows {
		r := &rows[i]
		r.Relative = math.Abs(r.Reached-r.Exact) / math.Abs(r.Exact)
		r.Held = r.Relative <= Tolerance
	}
	return rows
}

// curve binds a family at constants given as the trade quotes them, in the
// order of the family's constants.
func curve(family string, d mechanisms.Definition, constants ...float64) mechanisms.Curve {
	f, ok := mechanisms.Lookup(family)
	if !ok {
		panic("numerics: no such family: " + family)
	}
	d.SiteScale = true
	m, err := f.Build(d)
	if err != nil {
		panic("numerics: " + err.Error())
	}
	theta := make([]float64, len(constants))
	for i, c := range m.Constants() {
		switch theta[i] = constants[i]; c.Scale {
		case mechanisms.Log:
			theta[i] = math.Log(constants[i])
		case mechanisms.Logit:
			theta[i] = math.Log(constants[i] / (1 - constants[i]))
		}
	}
	b := m.Curve()
	b.Bind(theta, mechanisms.Environment{})
	return b
}

func saturation(c mechanisms.Curve, x float64) float64 {
	var y [1]float64
	c.Saturation(y[:], []float64{math.Log(x)}, nil)
	return y[0]
}

func slope(c mechanisms.Curve, x float64) float64 {
	var p mechanisms.Point
	c.At(math.Log(x), &p)
	return p.NH
}

func half(c mechanisms.Curve) float64 { return math.Exp(mechanisms.XAt(c, 0.5).Value) }

// ratio is x_90/x_10.
func ratio(c mechanisms.Curve) float64 {
	return math.Exp(mechanisms.XAt(c, 0.9).Value - mechanisms.XAt(c, 0.1).Value)
}

// twoSites: with intrinsic association constants k₁, k₂ the midpoint slope is
// 2/(1 + √(k₁/k₂)), and x at saturation y solves
// 2k₁k₂(1−y)x² + 2k₁(1−2y)x − 2y = 0.
func twoSites() []Row {
	var rows []Row
	for _, q := range []float64{0.01, 0.25, 4, 100} {
		c := curve("adair", mechanisms.Definition{Sites: 2}, 1, q) // Kd₁ = 1, Kd₂ = k₁/k₂
		at := fmt.Sprintf("k1/k2 = %g", q)
		x := func(y float64) float64 {
			a, b := (1-y)/q, 1-2*y
			return (-b + math.Sqrt(b*b+4*a*y)) / (2 * a)
		}
		rows = append(rows,
			Row{Check: "two sites: midpoint n_H", At: at, Exact: 2 / (1 + math.Sqrt(q)), Reached: mechanisms.HillAtHalf(c).Value},
			Row{Check: "two sites: x_90/x_10", At: at, Exact: x(0.9) / x(0.1), Reached: ratio(c)})
	}
	return rows
}

// twoClasses: two unlike sites with constants in the ratio r have the midpoint
// slope 4√r/(1+√r)².
func twoClasses() []Row {
	var rows []Row
	for _, r := range []float64{2, 10, 100, 1000} {
		c := curve("independent", mechanisms.Definition{Classes: []mechanisms.Count{{Name: "tight", Sites: 1}, {Name: "loose", Sites: 1}}}, 1, r)
		s := math.Sqrt(r)
		rows = append(rows, Row{Check: "two unlike sites: midpoint n_H", At: fmt.Sprintf("ratio %g", r),
			Exact: 4 * s / ((1 + s) * (1 + s)), Reached: mechanisms.HillAtHalf(c).Value})
	}
	return rows
}

// hillRatios: a Hill curve has x_90/x_10 = 81^(1/h).
func hillRatios() []Row {
	var rows []Row
	for _, h := range []float64{0.5, 1, 2, 2.7, 2.8, 4} {
		rows = append(rows, Row{Check: "Hill equation: x_90/x_10", At: fmt.Sprintf("h = %g", h),
			Exact: math.Pow(81, 1/h), Reached: ratio(curve("hill", mechanisms.Definition{}, 3, h))})
	}
	return rows
}

// concertedRidge: where L = c^(−n/2) the curve is symmetrical: x_50 = K_R/√c
// and the slope there, 1 + (n−1)((1−√c)/(1+√c))², is its maximum.
func concertedRidge() []Row {
	var rows []Row
	for _, n := range []int{2, 4, 8, 12} {
		for _, c := range []float64{0.01, 5e-4} {
			b := concerted(n, math.Pow(c, -float64(n)/2), c)
			s := (1 - math.Sqrt(c)) / (1 + math.Sqrt(c))
			at := fmt.Sprintf("n %d, c %g, L = c^(-n/2)", n, c)
			rows = append(rows,
				Row{Check: "concerted, symmetrical: x_50/K_R", At: at, Exact: 1 / math.Sqrt(c), Reached: half(b)},
				Row{Check: "concerted, symmetrical: midpoint n_H", At: at, Exact: 1 + float64(n-1)*s*s, Reached: mechanisms.HillAtHalf(b).Value})
		}
	}
	return rows
}

// concerted is the MWC family with K_R = 1. With two sites one of its three
// constants has to be held; which one does not change the curve.
func concerted(n int, l, c float64) mechanisms.Curve {
	d := mechanisms.Definition{Sites: n}
	if n == 2 {
		d.Constants = map[string]mechanisms.Given{"c": {Fixed: &c}}
	}
	return curve("mwc", d, l, c, 1)
}

// concertedAnywhere: n_H = 1 + (n−1) R̄ T̄ (Ȳ_R−Ȳ_T)²/(Ȳ(1−Ȳ)) at any x.
func concertedAnywhere() []Row {
	const n, l, c = 4, 9054, 0.014
	b := concerted(n, l, c)
	var rows []Row
	for _, x := range []float64{0.1, 3, 9.8968, 40, 1000} {
		yR, yT := x/(1+x), c*x/(1+c*x)
		wR, wT := math.Pow(1+x, n), l*math.Pow(1+c*x, n)
		r, t := wR/(wR+wT), wT/(wR+wT)
		y, empty := r*yR+t*yT, r/(1+x)+t/(1+c*x)
		at := fmt.Sprintf("n 4, L 9054, c 0.014, x %g K_R", x)
		rows = append(rows,
			Row{Check: "concerted: saturation", At: at, Exact: y, Reached: saturation(b, x)},
			Row{Check: "concerted: n_H", At: at, Exact: 1 + (n-1)*r*t*(yR-yT)*(yR-yT)/(y*empty), Reached: slope(b, x)})
	}
	return rows
}

// concertedAsStepwise: the intrinsic association constants of a concerted
// protein are k_i K_R = (1 + L cⁱ)/(1 + L cⁱ⁻¹); both families then give one curve.
func concertedAsStepwise() []Row {
	const n, l, c = 4, 9054, 0.014
	kd := make([]float64, n)
	for i := range kd {
		kd[i] = (1 + l*math.Pow(c, float64(i))) / (1 + l*math.Pow(c, float64(i+1)))
	}
	a, b := curve("adair", mechanisms.Definition{Sites: n}, kd...), concerted(n, l, c)
	return []Row{
		{Check: "concerted as stepwise: x_50/K_R", At: "n 4, L 9054, c 0.014", Exact: half(b), Reached: half(a)},
		{Check: "concerted as stepwise: midpoint n_H", At: "n 4, L 9054, c 0.014",
			Exact: mechanisms.HillAtHalf(b).Value, Reached: mechanisms.HillAtHalf(a).Value},
	}
}

// contacts: four sites in pairwise contact with K = 1, K_AB = 1, K_BB = a.
// Square: x_50 = 1/a, n_50 = (8 + 8/a)/(2 + 8/a + (4a + 2)/a²).
// Tetrahedral: x_50 = a^(−3/2), n_50 = (8 + 8a^(−3/2))/(2 + 8a^(−3/2) + 6a^(−2)).
func contacts() []Row {
	const a = 12.0
	square := curve("sequential", mechanisms.Definition{Sites: 4, Contacts: "square"}, 1, a)
	tetra := curve("sequential", mechanisms.Definition{Sites: 4, Contacts: "tetrahedral"}, 1, a)
	q := math.Pow(a, -1.5)
	return []Row{
		{Check: "square contacts: x_50/K", At: "K_BB = 12", Exact: 1 / a, Reached: half(square)},
		{Check: "square contacts: midpoint n_H", At: "K_BB = 12",
			Exact: (8 + 8/a) / (2 + 8/a + (4*a+2)/(a*a)), Reached: mechanisms.HillAtHalf(square).Value},
		{Check: "tetrahedral contacts: x_50/K", At: "K_BB = 12", Exact: q, Reached: half(tetra)},
		{Check: "tetrahedral contacts: midpoint n_H", At: "K_BB = 12",
			Exact: (8 + 8*q) / (2 + 8*q + 6/(a*a)), Reached: mechanisms.HillAtHalf(tetra).Value},
	}
}

// medians: the median ligand activity is β_n^(−1/n), the geometric mean of the
// intrinsic dissociation constants (Wyman 1964).
func medians() []Row {
	var rows []Row
	for _, kd := range [][]float64{{60, 30, 6.6, 0.66}, {1, 1, 1, 1}, {0.01, 1, 100}} {
		lnM := 0.0
		for _, k := range kd {
			lnM += math.Log(k) / float64(len(kd))
		}
		c := curve("adair", mechanisms.Definition{Sites: len(kd)}, kd...)
		rows = append(rows, Row{Check: "stepwise: median ligand activity", At: fmt.Sprintf("Kd %v", kd),
			Exact: math.Exp(lnM), Reached: math.Exp(mechanisms.Median(c).Value)})
	}
	return rows
}
