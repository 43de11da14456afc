package report

import (
	"fmt"
	"io"
	"math"
	"strconv"

	"ligancy/fit/saturation"
)

// PlanFormat names the layout of documents of plans.
const PlanFormat = "ligancy-plan/1"

// Plan is the next measurement.
type Plan struct {
	Format  string  `json:"format"`
	Program Program `json:"program"`
	Study   Study   `json:"study"`
	Ligand  string  `json:"ligand"`
	Unit    string  `json:"unit"`
	Caution string  `json:"caution"`
	*saturation.PlanOutcome
}

// planCaution stands beside every plan.
const planCaution = "A plan is statistics, not a protocol: solubility, safety and what a reading costs were not checked. Follow local rules. It is as good as the mechanisms tried and the scatter found; neighbouring values serve nearly as well."

// NewPlan assembles the document of a plan.
func NewPlan(a *saturation.Analysis, o *saturation.PlanOutcome, src Source) *Plan {
	rows := *o
	rows.Measure, rows.Odds, rows.Precision = list(rows.Measure), list(rows.Odds), list(rows.Precision)
	return &Plan{Format: PlanFormat, Program: Program{Version: src.Version},
		Study:  Study{Title: a.Title, Origin: a.Origin, File: src.File, SHA256: src.SHA256},
		Ligand: a.Ligand.Name, Unit: a.Ligand.Unit, Caution: planCaution, PlanOutcome: &rows}
}

// WriteText prints what to measure and what it would tell.
func (d *Plan) WriteText(w io.Writer, colour bool) error {
	p := &page{ink: ink{colour}}
	for _, l := range wrap(cut(d.Study.Title, 4*Width), Width) {
		p.line("%s", p.ink.bold(l))
	}
	if d.Study.Origin != "" {
		p.write(hanging("origin: ", cut(d.Study.Origin, 3*Width), Width))
	}
	p.line("")
	p.line("%s", p.ink.bold("WHAT TO MEASURE NEXT"))
	p.write(hanging("  ", d.aimWords(), Width))
	p.line("")
	p.planTable(d)
	p.planOdds(d)
	p.planPrecision(d)
	p.write(hanging("", d.Caution, Width))
	_, err := io.WriteString(w, p.b.String())
	return err
}

func (d *Plan) aimWords() string {
	aim := fmt.Sprintf("To hold the constants of “%s” more firmly", cut(d.Leader, 60))
	if d.Rival != nil {
		aim = fmt.Sprintf("To tell “%s” from “%s”, the nearest rival that is open", cut(d.Leader, 60), cut(*d.Rival, 60))
	}
	if d.Rival != nil && d.Of != d.Leader {
		aim += fmt.Sprintf("; that can draw every curve of “%s”, so the plan looks where its own curve leaves what “%s” can follow", cut(d.Leader, 60), cut(d.Leader, 60))
	}
	return aim + ", beside the readings there are. " + fmt.Sprintf("Averaged over %s of constants.", number(d.Averaged, "set"))
}

// planTable is the ligand values, curve by curve.
func (p *page) planTable(d *Plan) {
	g := &grid{gap: 3, right: []bool{false, true, true, true, true, true}}
	label := cut(d.Ligand, 20)
	if d.Unit != "" {
		label += " / " + cut(d.Unit, 16)
	}
	apart := ""
	if d.Rival != nil {
		apart = "apart by"
	}
	g.add("", label, "readings", "foretold", "scatter", apart)
	for i := range d.Measure {
		r := &d.Measure[i]
		curve := cut(r.Curve, 40)
		if r.Curve == "all" {
			curve = ""
		}
		if i > 0 && d.Measure[i-1].Curve == r.Curve {
			curve = ""
		}
		distance := ""
		if x := float64(r.Apart); finite(x) {
			distance = strconv.FormatFloat(x, 'f', 2, 64) + " σ"
		}
		g.add(curve, significant(float64(r.X), 3), strconv.Itoa(r.Replicates), significant(float64(r.Response), 3),
			significant(float64(r.Scatter), 2), distance)
	}
	for _, l := range g.lines(Width - 2) {
		p.line("  %s", l)
	}
	p.line("")
}

// planOdds is how often the right mechanism would be chosen.
func (p *page) planOdds(d *Plan) {
	if len(d.Odds) == 0 {
		return
	}
	p.line("%s", p.ink.bold("HOW OFTEN THE RIGHT ONE WOULD LEAD"))
	for _, o := range d.Odds {
		q := float64(o.Chosen)
		half := 1.96 * math.Sqrt(math.Max(q*(1-q), 0.25/float64(max(o.Studies, 1)))/float64(max(o.Studies, 1)))
		p.write(hanging("  ", fmt.Sprintf("if “%s” is right: in %.0f %% of %d simulated studies (± %.0f), with the scatter of these data",
			cut(o.Right, 60), 100*q, o.Studies, math.Max(1, 100*half)), Width))
	}
	p.line("")
}

// planPrecision is how firmly the leader's numbers would be held.
func (p *page) planPrecision(d *Plan) {
	if len(d.Precision) == 0 {
		return
	}
	p.line("%s", p.ink.bold(fmt.Sprintf("HOW FIRMLY THE CONSTANTS OF “%s” WOULD BE HELD", cut(d.Of, 50))))
	g := &grid{gap: 3}
	g.add("", "", "now", "then")
	for _, r := range d.Precision {
		curve := cut(r.Curve, 24)
		if r.Curve == "all" {
			curve = ""
		}
		g.add(cut(r.Name, 30), curve, precisionCell(r.Now, r.Factor), precisionCell(r.After, r.Factor))
	}
	for _, l := range g.lines(Width - 2) {
		p.line("  %s", l)
	}
	p.line("")
}

func precisionCell(x saturation.Real, byFactor bool) string {
	v := float64(x)
	switch {
	case !finite(v):
		return "not held"
	case !byFactor:
		return "± " + significant(v, 2)
	case v > 1e3:
		return "hardly"
	}
	return "a factor " + factor(1/v, v)
}
