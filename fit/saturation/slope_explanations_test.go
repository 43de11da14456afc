package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms"
)

const (
	xUnlike     = "unlike classes among two sites of a molecule"
	xTwo        = "two populations of molecules"
	xSteps      = "stepwise negative cooperativity of two sites"
	xContact    = "negative cooperativity of two sites in contact"
	xSpread     = "a spread of affinities (Sips)"
	xLine       = "one site with nonspecific binding"
	xEnds       = "one site with an end not reached or set wrongly"
	xShift      = "preparations with n_H 1 each that differ in K"
	xConcerted  = "concerted binding (MWC) of one ligand"
	xDepletion  = "one site that depletes the ligand"
	xIncubation = "one site read before it was at rest"
	xAssembly   = "assembly of molecules linked to binding"
	xKinetic    = "kinetic cooperativity of a one-site enzyme"
	xCycle      = "a covalent cycle near zero order"
)

// explainedAs checks how explanations stand.
func explainedAs(t *testing.T, out *Outcome, want map[string]string) {
	t.Helper()
	reportExplanations(t, out)
	for what, standing := range want {
		if r := explained(t, out, what); r.Standing != standing {
			t.Errorf("%s: %s, want %s (%s)", what, r.Standing, standing, deref(r.Why))
		} else if r.Test == nil || standing == "twin" && r.TwinOf == nil {
			t.Errorf("%s: no test or no twin named", what)
		}
	}
}

// sixDecades is plain over six decades.
func sixDecades(y func(float64) float64) sketch {
	s := plain(y)
	s.low, s.high = -3, 3
	return s
}

// Two unlike sites on a molecule (truth 5) are the twin of a negative pair,
// stepwise or in contact, and MWC is ruled out.
func TestShallowTwinsOfUnlikeSites(t *testing.T) {
	out := analysed(t, sixDecades(func(x float64) float64 {
		return hyperbola(x)/2 +
			hyperbola(x/10)/2
	}).study(t))
	explainedAs(t, out, map[string]string{xUnlike: "open", xTwo: "open", xSteps: "twin", xContact: "twin",
		xSpread: "out", xLine: "out", xEnds: "out", xShift: "out", xConcerted: "out"})
	if r := explained(t, out, xSteps); deref(r.TwinOf) != xUnlike {
		t.Errorf("twin of %q", deref(r.TwinOf))
	}
	if !strings.Contains(out.Verdict.Text, "the same curve as "+xUnlike) {
		t.Error("the verdict does not name the twins")
	}
}

// Where the twin is among the study's mechanisms it is named by its name there.
func TestShallowTwinInTheStudy(t *testing.T) {
	s := sixDecades(func(x float64) float64 { return hyperbola(x)/2 + hyperbola(x/10)/2 })
	s.candidates = []Candidate{
		{Name: "interacting pair", Family: "adair", Mechanism: build(t, "adair",
			mechanisms.Definition{Sites: 2})},
		{Name: "Hill equation", Family: "hill", Mechanism: build(t, "hill", mechanisms.Definition{})},
	}
	out := analysed(t, s.study(t))
	explainedAs(t, out, map[string]string{xUnlike: "twin", xSteps: "twin", xContact: "twin"})
	if r := explained(t, out, xUnlike); deref(r.TwinOf) != quoted("interacting pair") ||
		r.Mechanism != nil {
		t.Errorf("twin of %s, mechanism %s", deref(r.TwinOf), deref(r.Mechanism))
	}
	if r := explained(t, out, xSteps); deref(r.Mechanism) != "interacting pair" {
		t.Errorf("not recognised as %q", deref(r.Mechanism))
	}
}

// Populations with shares 0.35 and 0.65 (truth 7) cannot be equal classes.
func TestShallowPopulations(t *testing.T) {
	out := analysed(t, sixDecades(func(x float64) float64 {
		return 0.35*hyperbola(x) +
			0.65*hyperbola(x/30)
	}).study(t))
	explainedAs(t, out, map[string]string{xTwo: "open", xUnlike: "out", xSteps: "out", xSpread: "out"})
	if r := explained(t, out, xTwo); !(r.AICcAhead > 10) || !strings.Contains(out.Verdict.Text,
		"better than any mechanism tried") {
		t.Errorf("%v ahead of the mechanisms, and the verdict does not say so", r.AICcAhead)
	}
}

// A Hill curve of 0.7 (truth 8) implies an SD of ln K of 1.850 (exact: theory
// sheet, Sips 1948), and no pair of sites gives it.
func TestShallowSpread(t *testing.T) {
	s := sixDecades(hillOf(0.7))
	s.scatter = 1e-6
	out := analysed(t, s.study(t))
	if r := explained(t, out, xSpread); math.Abs(float64(r.Value)-1.850) > 5e-4 ||
		!(r.Low < r.Value && r.Value < r.High) || deref(r.Name) != spreadOfK {
		t.Errorf("SD of ln K %.4f (%.4f to %.4f)", r.Value, r.Low, r.High)
	}
	s.scatter = 0.01
	out = analysed(t, s.study(t))
	explainedAs(t, out, map[string]string{xSpread: "open", xUnlike: "out", xTwo: "out", xSteps: "out",
		xContact: "out"})
	if r := explained(t, out, xSpread); !(r.Low < 1.850 && 1.850 < r.High) {
		t.Errorf("the interval %.3f to %.3f misses 1.850", r.Low, r.High)
	}
}

// Artefacts that flatten one site: a line, an end set wrongly.
func TestShallowArtefacts(t *testing.T) {
	free := Response{Kind: "signal", Low: Setting{Free: true}, High: Setting{Free: true}}
	line := plain(func(x float64) float64 { return hyperbola(x) + 0.004*x })
	line.response = free
	explainedAs(t, analysed(t, line.study(t)), map[string]string{xLine: "open",
		"one site with both ends fitted": "out", xSpread: "out", xUnlike: "out"})

	low := plain(func(x float64) float64 { return 0.1 + 0.9*hyperbola(x) })
	explainedAs(t, analysed(t, low.study(t)), map[string]string{xEnds: "open", xLine: "out", xUnlike: "out",
		xSpread: "out"})
}

// Preparations of one site whose ln K scatter with SD 1 (truth 11): the shift
// explains the shallowness.
func TestShallowPreparations(t *testing.T) {
	a := shiftStudy(t, shallowSeed, "hill", 1)
	a.Candidates = a.Candidates[:1]
	a.Settings.Draws = 99
	out := analysed(t, a)
	explainedAs(t, out, map[string]string{xShift: "open"})
	if r := explained(t, out, xShift); !(r.Value > 0.8 && r.Value <= 1) ||
		!strings.Contains(deref(r.Why), "shifted by preparation") {
		t.Errorf("explains %.2f: %s", r.Value, deref(r.Why))
	}
	for i := range a.Data[0].Points {
		a.Data[0].Points[i].Preparation = ""
	}
	if r := explained(t, analysed(t, a), xShift); r.Standing != "not asked" {
		t.Errorf("without preparations: %s", r.Standing)
	}
}

// Where a shift cannot be fitted, every preparation alone answers.
func TestShallowPreparationsAlone(t *testing.T) {
	a := shiftStudy(t, shallowSeed, "hill", 1)
	a.Candidates = a.Candidates[:1]
	a.Data[0].Noise = GivenSigma
	for i := range a.Data[0].Points {
		a.Data[0].Points[i].Sigma = 0.02
	}
	out := analysed(t, a)
	if r := explained(t, out, xShift); r.Standing != "open" ||
		!strings.Contains(deref(r.Why), "read alone, in six preparations") {
		t.Errorf("%s: %s", r.Standing, deref(r.Why))
	}
}

// bindingOf is a curve of a mechanism.
func bindingOf(t testing.TB, family string, d mechanisms.Definition,
	theta ...float64) func(float64) float64 {
	c := build(t, family, d).Curve()
	c.Bind(theta, env())
	return func(x float64) float64 {
		var y [1]float64
		c.Saturation(y[:], []float64{math.Log(x)}, nil)
		return y[0]
	}
}

// Four concerted sites: no artefact of one site gives their curve.
func TestSteepConcerted(t *testing.T) {
	out := analysed(t, plain(bindingOf(t, "mwc", four(), math.Log(1e3), math.Log(0.01), 0)).study(t))
	explainedAs(t, out, map[string]string{xDepletion: "out", xIncubation: "out", xEnds: "out",
		"concerted binding (MWC) of four sites":             "open",
		"interaction of four sites in contact (sequential)": "out",
		"stepwise binding to four sites":                    "open", xAssembly: "open",
		"any equilibrium mechanism with one site": "out"})
}

// depletedSite is one site with K 1 against total ligand, S being the sites:
// the quadratic in closed form.
func depletedSite(s float64) func(float64) float64 {
	return func(x float64) float64 {
		b := 1 + x + s
		return (b - math.Sqrt(b*b-4*x*s)) / (2 * s)
	}
}

// One site against added ligand with ten times as many sites as K: the sites
// are found where they are not stated, and exclude it where they are few.
func TestSteepDepletion(t *testing.T) {
	a := plain(depletedSite(10)).study(t)
	out := analysed(t, a)
	explainedAs(t, out, map[string]string{xDepletion: "open", xIncubation: "out",
		"stepwise binding to four sites": "out"})
	if r := explained(t, out, xDepletion); math.Abs(float64(r.Value)/10-1) > 0.1 || r.Unit != "nM" {
		t.Errorf("sites needed %.3g %s, want 10 nM", r.Value, r.Unit)
	}
	a.Data[0].SitesPresent = SitesPresent{Value: 10, Unit: "nM"}
	explainedAs(t, analysed(t, a), map[string]string{xDepletion: "open"})
	a.Data[0].SitesPresent.Value = 0.1
	explainedAs(t, analysed(t, a), map[string]string{xDepletion: "out"})
	a.Data[0].Total, a.Data[0].SitesPresent.Value = true, 10
	for _, r := range analysed(t, a).Explanations {
		t.Errorf("depletion is solved for, yet %s is explained", r.Slope)
	}
}

// One site stopped after one half-life; with the incubation known it is out.
func TestSteepIncubation(t *testing.T) {
	a := plain(func(x float64) float64 { return earlyShare(x, math.Ln2) }).study(t)
	out := analysed(t, a)
	explainedAs(t, out, map[string]string{xIncubation: "open"})
	if r := explained(t, out, xIncubation); math.Abs(float64(r.Value)-1) > 0.1 {
		t.Errorf("half-lives %.3g, want 1", r.Value)
	}
	a.Data[0].Incubation = 3600
	k := 0.01
	a.Candidates[0].Rates = map[string]Rate{"k_on": {Given: mechanisms.Given{Value: &k}, Order: 2}}
	explainedAs(t, analysed(t, a), map[string]string{xIncubation: "out"})
}

// The unrested curve: its gradient against differences, its limits.
func TestUnrestedCurve(t *testing.T) {
	c := unrested{}.Curve()
	rng := rand.New(rand.NewPCG(1, 2))
	p := &mechanisms.Point{}
	y, g := make([]float64, 1), mat.NewDense(1, 2, nil)
	for range 50 {
		theta := []float64{2 * rng.NormFloat64(), rng.NormFloat64()}
		lnx := []float64{3 * rng.NormFloat64()}
		c.Bind(theta, env())
		c.Saturation(y, lnx, g)
		c.At(lnx[0], p)
		if math.Abs(p.Y+p.Empty-1) > 1e-14 || p.Y != y[0] || p.GradY[0] != g.At(0, 0) ||
			p.DY != -p.GradY[0] {
			t.Fatalf("At and Saturation differ at %v, %v", theta, lnx)
		}
		for k := range theta {
			d := 1e-6
			at := theta[k]
			var hi, lo [1]float64
			theta[k] = at + d
			c.Bind(theta, env())
			c.Saturation(hi[:], lnx, nil)
			theta[k] = at - d
			c.Bind(theta, env())
			c.Saturation(lo[:], lnx, nil)
			theta[k] = at
			if want := (hi[0] - lo[0]) / (2 * d); math.Abs(want-g.At(0, k)) > 1e-8 {
				t.Errorf("∂y/∂θ%d = %.9g, differences %.9g", k, g.At(0, k), want)
			}
		}
	}
	c.Bind([]float64{0, math.Log(40)}, env()) // at rest: one site
	if c.At(0.3, p); math.Abs(p.Y-hyperbola(math.Exp(0.3))) > 1e-9 || math.Abs(p.NH-1) > 1e-6 {
		t.Errorf("at rest y %.6f, n_H %.6f", p.Y, p.NH)
	}
}

// A gas is not depleted; velocities and signals have explanations of their own.
func TestSteepByResponse(t *testing.T) {
	s := plain(hillOf(1.4))
	s.response = Response{Kind: "velocity", Unit: "nM/s", High: Setting{Free: true}}
	explainedAs(t, analysed(t, s.study(t)), map[string]string{xKinetic: "open"})
	s.y = hillOf(2.5)
	explainedAs(t, analysed(t, s.study(t)), map[string]string{xKinetic: "out"})
	s.response = Response{Kind: "signal", High: Setting{Free: true}, Low: Setting{Free: true}}
	explainedAs(t, analysed(t, s.study(t)), map[string]string{xCycle: "open"})
	a := plain(hillOf(2.5)).study(t)
	a.Ligand.Unit = "torr"
	explainedAs(t, analysed(t, a), map[string]string{xDepletion: "out"})
}

// One site has nothing to explain, and neither has what cannot be read.
func TestNothingToExplain(t *testing.T) {
	out := analysed(t, plain(hyperbola).study(t))
	if len(out.Explanations) != 0 || out.Explanations == nil {
		t.Errorf("%d explanations of n_H 1", len(out.Explanations))
	}
	a := plain(hillOf(0.5)).study(t)
	a.Data[0].Trace = true
	if rows := (&review{a: a.withDefaults(),
		hills: a.hillStudies(context.Background())}).explanations(context.Background()); len(rows) != 0 {
		t.Error("a trace has no saturation curve to explain")
	}
}

// Same study, same digits, whatever the cores.
func TestExplanationsKeepTheirDigits(t *testing.T) {
	a := sixDecades(func(x float64) float64 { return hyperbola(x)/2 + hyperbola(x/10)/2 }).study(t)
	a.Settings.Workers = 1
	one := analysed(t, a)
	a.Settings.Workers = 3
	three := analysed(t, a)
	for i, r := range one.Explanations {
		s := three.Explanations[i]
		if r.Standing != s.Standing || r.AICcBehind != s.AICcBehind && r.AICcBehind == r.AICcBehind ||
			deref(r.Why) != deref(s.Why) {
			t.Errorf("%s: %+v and %+v", r.Explanation, r, s)
		}
	}
	for i, o := range one.Objections {
		p := three.Objections[i]
		if o.Text != p.Text || deref(o.Effect) != deref(p.Effect) {
			t.Errorf("%s: %q and %q", o.ID, o.Text, p.Text)
		}
	}
}

// shallowSeed draws preparations whose pooled curve is shallow beyond doubt.
const shallowSeed = 20

// What makes n_H an artefact stands in the verdict: depletion with the sites
// given, a short incubation, n_H above the number of sites, a linearised
// response; and nothing of the kind where all is well.
func TestVerdictNamesArtefacts(t *testing.T) {
	depleted := plain(depletedSite(10)).study(t)
	depleted.Data[0].SitesPresent = SitesPresent{Value: 10, Unit: "nM"}
	short := plain(func(x float64) float64 { return earlyShare(x, math.Ln2) }).study(t)
	short.Data[0].Incubation = 60
	short.Candidates[0].Rates = map[string]Rate{"k_on": {Given: mechanisms.Given{Value: ptr(math.Ln2 / 60)},
		Order: 2}}
	steep := plain(hillOf(2.6)).study(t)
	linear := plain(func(x float64) float64 { return 1 + 1/x }).study(t)
	linear.Data[0].Response = Response{Kind: "velocity", High: Setting{Free: true}}
	for words, a := range map[string]*Analysis{"unless free ligand was measured": depleted,
		"incubation was too short":    short,
		"exceeds the number of sites": steep, "a transform of what was measured": linear} {
		if text := analysed(t, a).Verdict.Text; !strings.Contains(text,
			"To be settled before n_H is believed") || !strings.Contains(text, words) {
			t.Errorf("the verdict does not say %q: %s", words, text)
		}
	}
	if text := analysed(t, plain(hyperbola).study(t)).Verdict.Text; strings.Contains(text, "is believed") {
		t.Errorf("one site is doubted: %s", text)
	}
}

// Random studies without fault are hardly ever objected to where chance decides:
// tests are made at 99 % at least.
func TestObjectionsRarelyCryWolf(t *testing.T) {
	cries := 0
	const studies = 60
	for seed := range uint64(studies) {
		s := plain(hillOf(2))
		s.seed = seed + 100
		list := s.study(t).Objections(context.Background())
		s.levels, s.replicates, s.names = 60, 1, []string{"A"}
		list = append(list, s.study(t).Objections(context.Background())...)
		for _, o := range list {
			for _, id := range []string{"uneven-scatter", "ligand-scatter", "correlated-points", "pooling",
				"baseline", "plateau"} {
				if o.ID == id && o.Group != foundGood && o.Group != forCompleteness {
					cries++
				}
			}
		}
	}
	if cries > 4 { // of 480 asked
		t.Errorf("%d objections to %d faultless studies", cries, 2*studies)
	}
}
