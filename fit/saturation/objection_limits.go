package saturation

// Limits are the thresholds beyond which a reviewer asks. A zero takes the
// default. Where a default has a source, the objection names it; the others are
// proposals of this program, to be set as the field's habits are.
type Limits struct {
	SitesPerK    float64 // most sites per K_half at which added ligand counts as free: 0.1
	BoundShare   float64 // largest share of the ligand that may be bound: 0.1
	HalfLives    float64 // least incubation, in half-lives of dissociation: 5
	Saturated    float64 // least saturation at the highest ligand: 10/11, a hyperbola at 10 K
	Empty        float64 // most saturation at the lowest ligand: 1/11, a hyperbola at K/10
	Levels       int     // least number of ligand values on a curve: 8
	Gap          float64 // widest gap between ligand values in the transition, decades at n_H ≤ 1: 0.7
	Preparations int     // least number of independent preparations: 5
	Used         float64 // largest share of the substrate that may be used up: 0.1
	Correction   float64 // largest correction of AICc for few points: 10
}

// orDefaults replaces zeros.
func (l Limits) orDefaults() Limits {
	for _, v := range []struct {
		at        *float64
		byDefault float64
	}{
		{&l.SitesPerK, 0.1}, {&l.BoundShare, 0.1}, {&l.HalfLives, 5}, {&l.Saturated, 10. / 11},
		{&l.Empty, 1. / 11}, {&l.Gap, 0.7}, {&l.Used, 0.1}, {&l.Correction, 10},
	} {
		if *v.at == 0 {
			*v.at = v.byDefault
		}
	}
	if l.Levels == 0 {
		l.Levels = 8
	}
	if l.Preparations == 0 {
		l.Preparations = 5
	}
	return l
}
