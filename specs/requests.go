package specs

import (
	"fmt"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/mechanisms"
	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// requests settles the blocks of curve, course and plan.
func (b *builder) requests() {
	s, a := b.study, b.analysis
	if c := s.Curve; c != nil {
		a.Curve = &saturation.CurveRequest{From: b.positive("curve.from", c.From),
			To: b.positive("curve.to", c.To), Points: c.Points, At: b.held("curve.at", c.At)}
		if a.Curve.From > 0 && a.Curve.To > 0 && a.Curve.From >= a.Curve.To {
			b.fault("curve.to", "out-of-bounds",
				fmt.Sprintf("the curve would end at %s, not above its beginning %s", c.To, c.From),
				nil, diag.Remedy{Write: fmt.Sprintf("from: %s, to: %s", c.To, c.From)})
		}
		if len(s.Data) == 0 && (c.From == nil || c.To == nil) && !b.said("data") {
			b.faultAtKey("curve", "missing-key", "without data a curve needs from and to", nil,
				diag.Remedy{Write: fmt.Sprintf("curve: {from: 0.1 %s, to: 100 %s}", s.Ligand.Unit,
					s.Ligand.Unit)})
		}
	}
	if c := s.Course; c != nil {
		a.Course = &saturation.CourseRequest{Phases: b.phases("course.phases", c.Phases),
			Points: c.Points, At: b.heldOne("course.at", c.At)}
	}
	if c := s.Plan; c != nil {
		a.Plan = b.plan(c)
	}
}

var foldSeries = regexp.MustCompile(`^([0-9.]+)-fold$`)

func (b *builder) plan(c *Plan) *saturation.PlanRequest {
	out := &saturation.PlanRequest{Points: c.Points, Replicates: c.Replicates, Aim: c.Aim,
		At: b.heldOne("plan.at", c.At)}
	if len(c.Range) == 2 {
		out.Low, out.High = b.positive("plan.range[0]", &c.Range[0]), b.positive("plan.range[1]",
			&c.Range[1])
		if out.Low > 0 && out.High > 0 && out.Low >= out.High {
			b.fault("plan.range", "out-of-bounds",
				fmt.Sprintf("the range would end at %s, not above its beginning %s", c.Range[1],
					c.Range[0]), nil, diag.Remedy{Write: fmt.Sprintf("range: [%s, %s]", c.Range[1],
					c.Range[0])})
		}
	}
	if !b.said("plan.aim") {
		out.Aim = "discriminate"
		b.byDefault("plan.aim", out.Aim)
	}
	if c.Series != "" {
		m := foldSeries.FindStringSubmatch(c.Series)
		if m != nil {
			out.Series, _ = strconv.ParseFloat(m[1], 64)
		}
		if out.Series <= 1 {
			b.fault("plan.series", "unknown-word", fmt.Sprintf("series cannot be %q", c.Series),
				nil, diag.Remedy{Write: "series: 2-fold"})
		}
	}
	return out
}

func (b *builder) heldOne(p string, list []Named[string]) []saturation.Held {
	var many []Named[[]string]
	for _, e := range list {
		many = append(many, Named[[]string]{Name: e.Name, Value: []string{e.Value}})
	}
	return b.held(p, many)
}

// held settles what holds for the curves of a request.
func (b *builder) held(p string, list []Named[[]string]) []saturation.Held {
	var out []saturation.Held
	for _, e := range list {
		h := saturation.Held{Name: e.Name, Levels: e.Value}
		if i := b.effector(e.Name); i >= 0 {
			for j, text := range e.Value {
				at := join(p, e.Name)
				if b.said(indexed(at, j)) {
					at = indexed(at, j)
				}
				v, _ := b.effectorValue(at, text, b.study.Effectors[i])
				h.Values = append(h.Values, v)
			}
		} else if levels := b.levelsOf(e.Name); len(levels) > 0 {
			b.knownLevels(p, e, levels)
		} else if !slices.Contains(b.asked(), e.Name) {
			b.faultAtKey(join(p, e.Name), "unknown-factor",
				fmt.Sprintf("the study has no effector or factor %q", e.Name),
				[]string{"Its effectors are: " + b.effectorNames() + "."})
		}
		out = append(out, h)
	}
	return out
}

// knownLevels asks that levels of a factor occur in the data; numbers match as numbers.
func (b *builder) knownLevels(p string, e Named[[]string], levels []string) {
	for _, want := range e.Value {
		ok := slices.ContainsFunc(levels, func(l string) bool {
			v, err := units.ParseNumber(l)
			w, werr := units.ParseNumber(want)
			return l == want || err == nil && werr == nil && v == w
		})
		if !ok {
			b.fault(join(p, e.Name), "no-such-value", fmt.Sprintf("no point has %s %s", e.Name,
				want), []string{fmt.Sprintf("The levels of %s are: %s.", e.Name, shortList(levels,
				12))}, diag.Remedy{Write: fmt.Sprintf("at: {%s: %s}", plainOrQuoted(e.Name),
				levels[0])})
		}
	}
}

// rates settles the rate constants of a mechanism: in seconds and the ligand's unit.
func (b *builder) rates(p string, list []Named[Rate]) map[string]saturation.Rate {
	if len(list) == 0 {
		return nil
	}
	out := map[string]saturation.Rate{}
	for _, e := range list {
		at := join(p, e.Name)
		r := saturation.Rate{}
		read := func(where string, q *units.Quantity) *float64 {
			if q == nil {
				return nil
			}
			v, order := b.rate(where, e.Name, q)
			if order != 0 && r.Order != 0 && order != r.Order {
				b.fault(where, "wrong-unit", fmt.Sprintf("%s is %s here and of the other order before", e.Name, q.Unit.Kind()), nil)
			}
			r.Order = max(r.Order, order)
			return &v
		}
		for i := range e.Value.Each {
			where := at
			if len(e.Value.Each) > 1 {
				where = indexed(at, i)
			}
			r.Each = append(r.Each, *read(where, &e.Value.Each[i]))
		}
		says := &e.Value.Says
		r.Given = mechanisms.Given{Start: read(at+".start", says.Start), Fixed: read(at+".fixed",
			says.Fixed), Value: read(at+".value", says.Value), Low: read(at+".range[0]", says.Low),
			High: read(at+".range[1]", says.High)}
		out[e.Name] = r
	}
	return out
}

// rate converts one rate constant, and says of which order it is; 0 where that is wrong.
func (b *builder) rate(at, name string, q *units.Quantity) (float64, int) {
	u := b.unitOf(name)
	first := units.MustParse("1/s")
	second := units.Divide(first, u)
	example := diag.Remedy{Say: "Write for example", Write: fmt.Sprintf("%s: 1e3 1/s", name)}
	if strings.Contains(name, "on") {
		example.Write = fmt.Sprintf("%s: 1e7 1/(%s s)", name, u)
	}
	switch {
	case q.Value <= 0 || q.Bare:
		problem := fmt.Sprintf("%s: a rate constant needs its unit", name)
		if q.Value <= 0 {
			problem = fmt.Sprintf("%s must be above 0", name)
		}
		b.fault(at, "bad-quantity", problem, nil, example)
	case q.Unit.Same(first):
		v, _ := q.In(first)
		return v, 1
	case q.Unit.Same(second):
		v, _ := q.In(second)
		return v, 2
	case strings.HasPrefix(q.Unit.Kind(), "a rate constant"):
		b.fault(at, "wrong-unit", fmt.Sprintf("%s: %s does not go with a ligand in %s", name,
			q.Unit, u), nil, example)
	default:
		b.fault(at, "wrong-unit", fmt.Sprintf("%s: %s is %s, not a rate constant", name, q.Unit,
			q.Unit.Kind()), nil, example)
	}
	return 0, 0
}
