package saturation

import "math"

// The functions of this file say what a fault of an assay does to half
// saturation and to n_H there, for binding that is understood.

// depleted is what half saturation and n_H become when a curve with exponent h
// and r = (sites)/(K_half) is drawn against total instead of free ligand:
//
//	X_half = x_half + S/2 ,  X_half/x_half = 1 + r/2 ,
//	n_H(X) = n_H(x) d ln x/d ln X = h (1 + r/2)/(1 + r h/4) ,
//
// exact for one site (h = 1) and for every curve whose n_H at half saturation is h.
func depleted(r, h float64) (shift, slope float64) {
	return 1 + r/2, h * (1 + r/2) / (1 + r*h/4)
}

// early is what one site shows after m half-lives of its dissociation. With
// z = x/K and τ = m ln 2 = k_off t,
//
//	y = z/(1+z) · (1 − e^{−(1+z)τ}) .
//
// It gives z where y = 1/2, that is EC50/K, and n_H there. As m → 0 n_H goes to
// 2 ln 2 and z to ln 2/τ.
func early(m float64) (shift, slope float64) {
	tau := m * math.Ln2
	low, high := 0.0, math.Max(40, 2*math.Log(1+1/tau))
	for range 200 { // bisection in ln z: y rises with z
		mid := (low + high) / 2
		if earlyShare(math.Exp(mid), tau) < 0.5 {
			low = mid
		} else {
			high = mid
		}
	}
	z := math.Exp((low + high) / 2)
	e := math.Exp(-(1 + z) * tau)
	dy := (1-e)/((1+z)*(1+z)) + z/(1+z)*tau*e // dy/dz
	return z, 4 * z * dy
}

func earlyShare(z, tau float64) float64 { return z / (1 + z) * -math.Expm1(-(1+z)*tau) }

// halfLivesStood inverts early for what an experiment shows: from s = k_on·EC50·t,
// EC50 being what was read off, it gives the half-lives m. s is never below ln 2
// however short the incubation, since k_on·EC50·t = τ·EC50/K → ln 2; zero is
// returned there.
func halfLivesStood(s float64) float64 {
	if !(s > math.Ln2) {
		return 0
	}
	low, high := -30.0, math.Log(s/math.Ln2)+1 // ln m
	for range 200 {
		mid := (low + high) / 2
		m := math.Exp(mid)
		if shift, _ := early(m); m*math.Ln2*shift < s {
			low = mid
		} else {
			high = mid
		}
	}
	return math.Exp((low + high) / 2)
}

// consumed is what the mean velocity of a one-site enzyme shows when substrate
// is used up while it is measured: τ = V t/K. From −ln(1 − p/s) + p = τ, with p
// the product and s the substrate over K,
//
//	s_half = (τ/2)/(1 − e^{−τ/2}) ,  n_H there = 2/(1 + s_half − τ/2) .
func consumed(tau float64) (shift, slope float64) {
	if tau == 0 {
		return 1, 1
	}
	s := tau / 2 / -math.Expm1(-tau/2)
	return s, 2 / (1 + s - tau/2)
}

// logisticSpread matches a normal to a logistic density: a Hill curve flattened
// by a normal spread s of ln K keeps its shape nearly, with exponent
// n/√(1 + (n s/1.70)²). A rough guide (computed, reference/practice.md).
const logisticSpread = 1.70

// flattened is the exponent of the mean of Hill curves of exponent n whose ln K
// (or ln x) scatter with standard deviation s.
func flattened(n, s float64) float64 {
	return n / math.Sqrt(1+n*n*s*s/(logisticSpread*logisticSpread))
}

// sipsSpread is the standard deviation of ln K of the population of simple sites
// that gives a Hill curve with h below 1 (Sips 1948, J Chem Phys 16:490):
//
//	σ(ln K) = (π/√3)·√(1/h² − 1) .
func sipsSpread(h float64) float64 {
	if h >= 1 {
		return 0
	}
	return float64(spread(Real(h)))
}

// twoClassHalf is n_H at half saturation of two equal classes of sites whose
// constants stand in the ratio ρ: 4√ρ/(1+√ρ)².
func twoClassHalf(rho float64) float64 {
	q := math.Sqrt(rho)
	return 4 * q / ((1 + q) * (1 + q))
}

// twoClassPoints and twoClassDecades lay out the points of twoClassFit, evenly
// in ln x around the middle of the curve.
const (
	twoClassPoints  = 16
	twoClassDecades = 5
)

// twoClassFit is the exponent of the Hill curve closest to two equal classes by
// least squares over five decades, and the rms misfit that remains. Curves and
// points are symmetrical about √ρ, so that the Hill curve's K is √ρ.
func twoClassFit(rho float64) (h, rms float64) {
	c := math.Log(rho) / 2
	half := twoClassDecades * math.Ln10 / 2
	misfit := func(h float64) float64 {
		ss := 0.0
		for i := range twoClassPoints {
			u := half * (2*float64(i)/(twoClassPoints-1) - 1)
			e := (expit(u-c)+expit(u+c))/2 - expit(h*u)
			ss += e * e
		}
		return math.Sqrt(ss / twoClassPoints)
	}
	h = goldenSection(misfit, 0.05, 1, goldenSteps)
	return h, misfit(h)
}

// hiddenRatio is the ratio of two equal classes whose closest Hill curve has
// exponent h: what an h down to this value may hide.
func hiddenRatio(h float64) float64 {
	if h >= 1 {
		return 1
	}
	low, high := 0.0, 30.0 // ln ρ
	for range 60 {
		mid := (low + high) / 2
		if got, _ := twoClassFit(math.Exp(mid)); got > h {
			low = mid
		} else {
			high = mid
		}
	}
	return math.Exp((low + high) / 2)
}

func expit(u float64) float64 { return 1 / (1 + math.Exp(-u)) }
