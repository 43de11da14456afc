package saturation

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"ligancy/fit"
	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
)

// TimeRow is one mechanism at one time of the phases that a study asks for.
type TimeRow struct {
	Mechanism  string `json:"mechanism"`
	Curve      string `json:"curve"`
	Phase      int    `json:"phase"` // from 1
	Seconds    Real   `json:"seconds"`
	Saturation Real   `json:"saturation"`
	Labelled   Real   `json:"labelled"` // share of all sites with labelled ligand
	Response   Real   `json:"response"`
	Free       Real   `json:"free"` // ligand, labelled
	Unlabelled Real   `json:"unlabelled"`
}

// RelaxationRow says how fast a mechanism comes to rest at one free ligand.
type RelaxationRow struct {
	Mechanism string `json:"mechanism"`
	Curve     string `json:"curve"`
	X         Real   `json:"x"`
	Slowest   Real   `json:"slowest"` // relaxation times, in seconds
	Fastest   Real   `json:"fastest"`
	Wait99    Real   `json:"wait_99"` // until within 1 % of rest for good
}

// ReadingRow is the curve that would be read after one incubation.
type ReadingRow struct {
	Mechanism string  `json:"mechanism"`
	Curve     string  `json:"curve"`
	Seconds   Real    `json:"seconds"`
	XHalf     Real    `json:"x_half"`
	NH        Real    `json:"n_H_half"`
	RestXHalf Real    `json:"x_half_at_rest"`
	RestNH    Real    `json:"n_H_half_at_rest"`
	Why       *string `json:"why"`
}

// CourseOutcome is binding against time, as rows of plain data.
type CourseOutcome struct {
	Mechanisms  []MechanismRow  `json:"mechanisms"`
	Quantities  []QuantityRow   `json:"quantities"`
	Course      []TimeRow       `json:"course"`
	Relaxations []RelaxationRow `json:"relaxations"`
	Readings    []ReadingRow    `json:"readings"`
	Partings    []PartingRow    `json:"partings"`
	Cautions    []string        `json:"cautions"`
}

// timed is a candidate with constants and rates, ready to be followed.
type timed struct {
	c      *Candidate
	model  *kinetics.Model   // nil for a cycle
	driven mechanisms.Driven // a cycle of catalysis
	theta  []float64
	phi    []float64
	status string
	noise  float64 // scatter, in units of the whole response; NaN where it is not known
}

// Follow follows every candidate that has rates through the phases of the study:
// at the constants that the study gives or, where it gives none, at those that fit
// its data. The error says which candidates were left out, and why.
func (a *Analysis) Follow(ctx context.Context, rec Recorder) (*CourseOutcome, error) {
	a = a.withDefaults()
	out := &CourseOutcome{}
	a.heldLigand(out)
	var all []error
	var list []*timed
	for i := range a.Candidates {
		t, err := a.timed(ctx, &a.Candidates[i], rec)
		if err == nil && t.driven != nil {
			err = a.followCycle(ctx, t, out)
		} else if err == nil {
			err = a.followOne(ctx, t, out)
		}
		switch {
		case err != nil:
			all = append(all, err)
		case t.model != nil:
			list = append(list, t)
		}
	}
	if err := a.part(ctx, list, out); err != nil {
		all = append(all, err)
	}
	return out, errors.Join(all...)
}

// timed settles one candidate's constants and rates.
func (a *Analysis) timed(ctx context.Context, c *Candidate, rec Recorder) (*timed, error) {
	t := &timed{c: c, status: "given", noise: math.NaN()}
	if err := t.rates(a); err != nil {
		return nil, err
	}
	var err error
	if t.theta, err = c.givenTheta(); err == nil && (t.phi != nil || t.driven != nil) {
		return t, nil
	}
	if len(a.Data) == 0 {
		return nil, err
	}
	if rec != nil {
		rec.Progress("fitting "+c.Name, 0, 1)
	}
	return t, t.fitted(ctx, a)
}

// rates settles what makes a candidate move: its rates, or the cycle that it is.
func (t *timed) rates(a *Analysis) error {
	if d, ok := t.c.Mechanism.(mechanisms.Driven); ok {
		t.driven = d
		return nil
	}
	var err error
	if t.model, err = t.c.Kinetics(); err != nil {
		return err
	}
	if t.model == nil {
		return fmt.Errorf("mechanism %q has no rates: write rates: {k_on: …}", t.c.Name)
	}
	if t.phi, err = t.c.givenRates(t.model); err != nil && !a.hasTraces() {
		return err
	}
	return nil
}

// fitted takes the constants from a fit, the rates too where there are traces. Where
// constants differ between curves, those of the first curve stand for all.
func (t *timed) fitted(ctx context.Context, a *Analysis) error {
	f := a.fitCandidate(ctx, t.c, fit.Settings{Starts: a.Settings.Starts, Seed: a.Settings.Seed, Workers: a.Settings.Workers})
	if f.result == nil {
		why := "there is no answer"
		if f.row.Why != nil {
			why = *f.row.Why
		}
		return fmt.Errorf("mechanism %q could not be fitted: %s", t.c.Name, why)
	}
	t.status = f.row.Status
	t.theta = nil
	for _, j := range f.m.cells[0].theta {
		t.theta = append(t.theta, f.result.Theta[j])
	}
	if f.m.timing != nil {
		t.phi = nil
		for _, j := range f.m.timing.at {
			t.phi = append(t.phi, f.result.Theta[j])
		}
	}
	t.noise = f.relativeScatter()
	return nil
}

// relativeScatter is the scatter of the first block in units of its response's whole
// range; NaN where that is not known.
func (f *fitted) relativeScatter() float64 {
	b := f.m.blocks[0]
	dev := f.deviations(b)
	q := &b.pts[0]
	low, high := value(f.result.Theta, q.low, b.resp.Low), value(f.result.Theta, q.high, b.resp.High)
	if !b.ends.span {
		high -= low
	}
	sum := 0.0
	for _, s := range dev {
		sum += s * s
	}
	return f.blockSigma(0) * math.Sqrt(sum/float64(len(dev))) / math.Abs(high)
}

// followOne writes the rows of one candidate.
func (a *Analysis) followOne(ctx context.Context, t *timed, out *CourseOutcome) error {
	env, label := a.courseEnvironment(t.c)
	b := t.model.Bound()
	if err := b.Bind(t.theta, t.phi, env); err != nil {
		return fmt.Errorf("mechanism %q: %w", t.c.Name, err)
	}
	p := a.courseProgram()
	if p != nil {
		c, err := b.Run(ctx, p, a.courseTimes(p), false)
		if err != nil {
			return fmt.Errorf("mechanism %q: %w", t.c.Name, err)
		}
		for i, s := range c.Seconds {
			out.Course = append(out.Course, TimeRow{t.c.Name, label, c.Phase[i] + 1, Real(s), Real(c.Saturation[i]), Real(c.Labelled[i]),
				Real(c.Seen[i]), Real(c.Free[i]), Real(c.Unlabelled[i])})
		}
	}
	if err := a.relaxations(t, b, label, out); err != nil {
		return fmt.Errorf("mechanism %q: %w", t.c.Name, err)
	}
	a.readings(t, b, label, out)
	out.Mechanisms = append(out.Mechanisms, t.row())
	a.courseConstants(t, out)
	return nil
}

// row is how the mechanism stands: with its constants as given or as fitted.
func (t *timed) row() MechanismRow {
	return MechanismRow{Name: t.c.Name, Family: t.c.Family, Sites: t.c.Mechanism.Sites(), Status: t.status, SumOfSquares: nan, Scatter: nan,
		LogLikelihood: nan, AICc: nan, AICcBehind: nan, AICcWeight: nan, BIC: nan, LackOfFitP: nan, RunsP: nan, PredictionError: nan}
}

// courseConstants lists the constants and rates in force.
func (a *Analysis) courseConstants(t *timed, out *CourseOutcome) {
	m := &model{a: a, c: t.c}
	add := func(w wanted, v float64) {
		r := w.row
		r.Value, r.Low, r.High, r.Level, r.Interval, r.Held = finite(v), nan, nan, nan, "none", "fixed"
		out.Quantities = append(out.Quantities, r)
	}
	for i, k := range t.c.Mechanism.Constants() {
		w := wanted{row: QuantityRow{Mechanism: t.c.Name, Curve: "all"}}
		w.constantRow(m, k)
		add(w, unscaled(k, t.theta[i]))
	}
	if t.model == nil {
		return
	}
	for i, k := range t.model.Rates() {
		w := wanted{row: QuantityRow{Mechanism: t.c.Name, Curve: "all"}}
		w.constantRow(m, k)
		w.row.Unit = a.rateUnit(k)
		add(w, math.Exp(t.phi[i]))
	}
}

// courseEnvironment is the effectors that a course is asked for, the others absent.
func (a *Analysis) courseEnvironment(c *Candidate) (mechanisms.Environment, string) {
	var parts []string
	env := mechanisms.Environment{}
	for _, name := range c.Mechanism.Effectors() {
		v := 0.0
		if a.Course != nil {
			for _, h := range a.Course.At {
				if (h.Name == name || a.effectorName(h.Name) == name) && len(h.Values) > 0 {
					v = h.Values[0]
				}
			}
		}
		env.Effectors = append(env.Effectors, v)
		parts = append(parts, a.label(name, number(v)))
	}
	return env, joinLabels(parts)
}

// courseProgram is what the study's course does with a sample; nil without a course.
// Where the first data set speaks of total ligand, ligand is used up.
func (a *Analysis) courseProgram() *kinetics.Program {
	if a.Course == nil || len(a.Course.Phases) == 0 {
		return nil
	}
	p := &kinetics.Program{Phases: programPhases(a.Course.Phases)}
	if sites, ok := a.courseSites(); ok {
		p.Sites = sites
	}
	return p
}

// courseSites is the concentration of sites in a course; false where ligand is taken as
// not used up.
func (a *Analysis) courseSites() (float64, bool) {
	if len(a.Data) == 0 || !a.Data[0].Total {
		return 0, false
	}
	s := a.Data[0].SitesPresent
	return s.Value, s.Value > 0 && (s.Unit == "" || s.Unit == a.Ligand.Unit)
}

// heldLigand is the caution that goes with a course whose ligand is not used up though
// the data say that it is.
func (a *Analysis) heldLigand(out *CourseOutcome) {
	if _, ok := a.courseSites(); !ok && len(a.Data) > 0 && a.Data[0].Total {
		out.Cautions = append(out.Cautions, "The data are on a total axis, but the concentration of sites is no number in "+
			a.Ligand.Unit+": here ligand is taken as not used up. Write sites_present with its unit.")
	}
}

// coursePoints is the number of times of a phase where the study leaves it open.
const coursePoints = 61

// courseTimes spreads times evenly over each phase, from its beginning to its end.
func (a *Analysis) courseTimes(p *kinetics.Program) []float64 {
	n := a.Course.Points
	if n < 2 {
		n = coursePoints
	}
	times := []float64{0}
	begin := 0.0
	for _, ph := range p.Phases {
		for i := 1; i < n; i++ {
			times = append(times, begin+ph.Seconds*float64(i)/float64(n-1))
		}
		begin += ph.Seconds
	}
	return times
}

// relaxationPoints is the number of ligand values at which relaxation is told.
const relaxationPoints = 9

// relaxations writes how fast a mechanism comes to rest, over the ligand of the study.
func (a *Analysis) relaxations(t *timed, b *kinetics.Bound, label string, out *CourseOutcome) error {
	for _, x := range a.courseLigand(t) {
		tau, err := b.Relaxations(x)
		if err != nil {
			return err
		}
		row := RelaxationRow{Mechanism: t.c.Name, Curve: label, X: Real(x), Slowest: nan, Fastest: nan, Wait99: nan}
		if len(tau) > 0 {
			row.Slowest, row.Fastest = Real(tau[0]), Real(tau[len(tau)-1])
		}
		wait, err := b.Wait(x, 0.01)
		if err != nil {
			return err
		}
		row.Wait99 = Real(wait)
		out.Relaxations = append(out.Relaxations, row)
	}
	return nil
}

// courseLigand is the ligand values about which a course speaks: those of the curve
// block, else those tested, else what the phases add, and its parts and multiples.
func (a *Analysis) courseLigand(t *timed) []float64 {
	low, high := 0.0, 0.0
	if a.Curve != nil {
		low, high = a.Curve.From, a.Curve.To
	}
	if !(low > 0 && high > low) {
		low, high = a.testedRange()
	}
	if !(low > 0 && high > low) && a.Course != nil {
		for _, ph := range a.Course.Phases {
			if ph.Add > 0 {
				low, high = ph.Add/100, ph.Add*100
				break
			}
		}
	}
	if !(low > 0 && high > low) {
		curve := t.c.Mechanism.Curve()
		env, _ := a.courseEnvironment(t.c)
		curve.Bind(t.theta, env)
		half := mechanisms.XAt(curve, 0.5)
		if half.Why != "" {
			return nil
		}
		low, high = math.Exp(half.Value)/100, math.Exp(half.Value)*100
	}
	out := make([]float64, relaxationPoints)
	for i := range out {
		out[i] = low * math.Pow(high/low, float64(i)/(relaxationPoints-1))
	}
	return out
}

// readings writes what would be read after the incubations of the study and after
// every phase that adds ligand.
func (a *Analysis) readings(t *timed, b *kinetics.Bound, label string, out *CourseOutcome) {
	for _, s := range a.courseIncubations() {
		row := ReadingRow{Mechanism: t.c.Name, Curve: label, Seconds: Real(s), XHalf: nan, NH: nan, RestXHalf: nan, RestNH: nan}
		r, err := b.ReadAt(s)
		if err == nil {
			row.XHalf, row.NH, row.RestXHalf, row.RestNH = Real(r.XHalf), Real(r.NH), Real(r.AtRestXHalf), Real(r.AtRestNH)
		} else {
			row.Why = text(err.Error())
		}
		out.Readings = append(out.Readings, row)
	}
}

// courseIncubations are the incubations of the data and of phases that add, ascending.
func (a *Analysis) courseIncubations() []float64 {
	var list []float64
	for i := range a.Data {
		if s := a.Data[i].Incubation; s > 0 {
			list = append(list, s)
		}
	}
	if a.Course != nil {
		for _, ph := range a.Course.Phases {
			if ph.Add > 0 && ph.Seconds > 0 {
				list = append(list, ph.Seconds)
			}
		}
	}
	slices.Sort(list)
	return slices.Compact(list)
}
