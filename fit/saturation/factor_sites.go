package saturation

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// mostFactored is the largest number of sites whose independence is asked for.
const mostFactored = 8

// factorRows asks of every fitted polynomial whether independent sites give the
// same curve. The roots of the fit itself do not decide it: sites nearly alike
// make a double root, which scatter splits into a complex pair half of the time.
// So the fit constrained to independent sites is compared with the mechanism's
// own by parametric bootstrap.
func (a *Analysis) factorRows(ctx context.Context, fits []*fitted) []FactorRow {
	rows := []FactorRow{}
	for i, f := range fits {
		if f.result == nil || ctx.Err() != nil {
			continue
		}
		t := &factoring{a: a, f: f, seed: a.Settings.Seed<<16 ^ uint64(i)<<8}
		rows = append(rows, t.rows(ctx)...)
	}
	return rows
}

// factoring asks one mechanism.
type factoring struct {
	a    *Analysis
	f    *fitted
	seed uint64
	free *fitted // the fit to independent sites; nil where none was asked for
}

func (t *factoring) rows(ctx context.Context) []FactorRow {
	f := t.f
	var rows []FactorRow
	var cells []int
	for _, c := range f.m.curveCells() {
		p := mechanisms.Factor(f.m.boundCurve(c, f.result.Theta))
		if p.Why != "" || f.row.Sites < 2 {
			continue
		}
		row := f.factorRow(f.m.cells[c].label)
		for _, z := range p.Roots {
			row.Roots = append(row.Roots, RootRow{finite(real(z)), finite(imag(z))})
		}
		rows, cells = append(rows, row), append(cells, c)
	}
	if len(rows) == 0 {
		return nil
	}
	why := t.whyNot()
	if why == "" {
		why = t.constrain(ctx)
	}
	if why != "" {
		for i := range rows {
			rows[i].Why = text(why)
		}
		return rows
	}
	t.decide(ctx, rows)
	if t.free == f {
		return rows
	}
	t.share(ctx, rows, cells)
	for i, c := range cells {
		if rows[i].Standing != factorsRefused {
			rows[i].Kd = t.sites(ctx, f.m.cells[c].label)
		}
	}
	return rows
}

// whyNot says why a mechanism is not asked; "" where it is.
func (t *factoring) whyNot() string {
	f := t.f
	switch {
	case !f.answered():
		return "the fit has no answer"
	case f.row.Standing == "out":
		return "the mechanism is out"
	case f.m.shift != nil:
		return "not asked of curves with a shift by preparation"
	case f.row.Sites > mostFactored:
		return fmt.Sprintf("not asked of more than %d sites", mostFactored)
	case t.a.Settings.Draws <= 0:
		return "no deciding bootstrap"
	}
	return ""
}

// constrain fits as many independent sites as the polynomial has, each with a
// constant of its own on every curve that the mechanism tells apart.
func (t *factoring) constrain(ctx context.Context) string {
	key, why := t.f.m.soleKey()
	if why != "" {
		return why
	}
	if t.f.row.Family == "independent" {
		t.free = t.f
		return ""
	}
	family, _ := mechanisms.Lookup("independent")
	def := mechanisms.Definition{Differs: key != ""}
	for i := range t.f.row.Sites {
		def.Classes = append(def.Classes, mechanisms.Count{Name: fmt.Sprintf("site %d", i+1), Sites: 1})
	}
	mech, err := family.Build(def)
	if err != nil {
		return err.Error()
	}
	c := Candidate{Name: "independent sites", Family: "independent", Mechanism: mech, Ends: t.f.m.c.Ends}
	if key != "" {
		c.Differs = map[string]string{"all": key}
	}
	g := t.a.fitCandidate(ctx, &c, fit.Settings{Starts: min(t.a.Settings.Starts, 20), Seed: t.a.Settings.Seed, Workers: t.a.Settings.Workers})
	if g.result == nil || g.row.Status == "no answer" {
		return "independent sites have no fit to these data"
	}
	t.free = g
	return ""
}

// soleKey is the one factor (or effector, preparation, data set) by which the
// curves of a model are told apart, "" for one curve.
func (m *model) soleKey() (key, why string) {
	var keys []string
	for _, c := range m.cells {
		for _, k := range c.keys {
			if !slices.Contains(keys, k) {
				keys = append(keys, k)
			}
		}
	}
	switch len(keys) {
	case 0:
		return "", ""
	case 1:
		return keys[0], ""
	}
	return "", "not asked of curves that more than one factor tells apart"
}

// decide compares the constrained fit with the mechanism's own.
func (t *factoring) decide(ctx context.Context, rows []FactorRow) {
	standing, behind, p := factors, 2*(t.f.lnL-t.free.lnL), nan
	why := ""
	switch d := (&decider{a: t.a, fits: []*fitted{t.f, t.free}, order: []int{0, 1}}); {
	case t.free == t.f:
		standing, behind, why = factorsBuilt, 0, "the mechanism is one of independent sites"
	case d.hopeless(1, behind):
		standing, why = factorsRefused, "independent sites are so far behind that no study was simulated"
	case behind <= 0:
		p = 1
	default:
		wins, draws := t.wins(ctx, behind)
		p = shareOf(wins+1, draws+1)
		if p <= outShare {
			standing = factorsRefused
		}
	}
	for i := range rows {
		rows[i].Standing, rows[i].Behind, rows[i].P = standing, Real(behind), p
		if why != "" {
			rows[i].Why = text(why)
		}
	}
}

// enoughWins are the wins after which a share is known well enough.
const enoughWins = 20

// wins counts the studies simulated from independent sites in which the
// mechanism wins by as much as it did.
func (t *factoring) wins(ctx context.Context, behind float64) (wins, draws int) {
	most := t.a.Settings.Draws
	won := make([]bool, most)
	sim := newSimulation(t.free, t.seed|1)
	at := t.f.result.Theta
	if r := newRefitter(t.f); r != nil {
		r.observe(sim.mean)
		if misfit, theta := r.misfit(ctx, sim, at, t.f.m.firstStarts()[0]); misfit >= 0 {
			at = theta
		}
	}
	var crews []crew
	for range min(t.a.Settings.Workers, most) {
		own, rival := newRefitter(t.free), newRefitter(t.f)
		if own == nil || rival == nil {
			return 0, 0
		}
		crews = append(crews, func(k int, y [][]float64) {
			own.observe(y)
			rival.observe(y)
			won[k] = 2*(rival.from(ctx, at)-own.from(ctx, t.free.result.Theta)) >= behind
		})
	}
	for draws < most && wins < enoughWins && ctx.Err() == nil {
		to := min(draws+32, most)
		sim.draws(ctx, draws, to, crews)
		for _, w := range won[draws:to] {
			if w {
				wins++
			}
		}
		draws = to
	}
	return wins, draws
}

// share counts the studies simulated from the mechanism's own fit whose fitted
// polynomials factor, curve by curve.
func (t *factoring) share(ctx context.Context, rows []FactorRow, cells []int) {
	most := t.a.Settings.Draws
	factor := make([][]bool, most)
	sim := newSimulation(t.f, t.seed|2)
	var crews []crew
	for range min(t.a.Settings.Workers, most) {
		r := newRefitter(t.f)
		if r == nil {
			return
		}
		crews = append(crews, func(k int, y [][]float64) {
			r.observe(y)
			r.from(ctx, t.f.result.Theta)
			factor[k] = make([]bool, len(cells))
			for i, c := range cells {
				factor[k][i] = mechanisms.Factor(t.f.m.boundCurve(c, r.theta)).Independent
			}
		})
	}
	sim.draws(ctx, 0, most, crews)
	for i := range rows {
		n, of := 0, 0
		for _, list := range factor {
			if list != nil {
				of++
				if list[i] {
					n++
				}
			}
		}
		rows[i].Share, rows[i].Draws = shareOf(n, of), of
	}
}

// farOff is the factor beyond which an end of an interval is where a bound of
// the fit stopped it, not where the data did.
const farOff = 1e4

// siteRow is the constant of one site.
func siteRow(q *QuantityRow) SiteRow {
	s := SiteRow{Value: q.Value, Low: q.Low, High: q.High, Unit: q.Unit}
	if s.High > farOff*s.Value {
		s.High = nan
	}
	if s.Low < s.Value/farOff {
		s.Low = nan
	}
	s.Held = held(math.IsNaN(float64(s.Low)), math.IsNaN(float64(s.High)))
	return s
}

// sites are the constants of the independent sites on one curve, ascending.
func (t *factoring) sites(ctx context.Context, curve string) []SiteRow {
	g := t.free
	for range 3 {
		out := []SiteRow{}
		pr := g.profiler(t.a.Settings.Level)
		for _, w := range g.wantedRows() {
			if w.row.Of == "constant" && (w.row.Curve == curve || w.row.Curve == "all") {
				q := g.withInterval(ctx, w, pr)
				out = append(out, siteRow(&q))
			}
		}
		if pr == nil || !g.moveTo(ctx, [][]float64{pr.Better()}) {
			slices.SortStableFunc(out, func(a, b SiteRow) int { return cmp.Compare(float64(a.Value), float64(b.Value)) })
			return out
		}
	}
	return []SiteRow{}
}
