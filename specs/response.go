package specs

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// ends are the numbers of a response that each kind has, the upper one second.
var ends = map[string][]string{
	"saturation": {"low", "high"},
	"bound":      {"low", "Bmax", "nonspecific"},
	"velocity":   {"low", "V"},
	"signal":     {"low", "high"},
}

// response settles what was measured.
func (b *builder) response(p string, d *Data) saturation.Response {
	r := &d.Response
	out := saturation.Response{Kind: r.Kind, Of: r.Of, Differs: map[string]string{}}
	names, ok := ends[r.Kind]
	if !ok {
		return out // complained of already
	}
	b.responseUnit(p, d)
	out.Unit, out.Percent = r.Unit.String(), r.Unit.IsPercent()
	top := "1"
	if out.Percent {
		top = "100"
	}
	defaults := map[string]string{"low": "0", "high": top, "V": "free", "Bmax": "free",
		"nonspecific": "free"}
	if r.Kind == "signal" {
		defaults["low"], defaults["high"] = "free", "free"
	}
	b.strayEnds(p, r, names)
	out.Low = b.end(p, d, "low", &r.Low, defaults["low"])
	switch r.Kind {
	case "bound":
		out.High = b.bmax(p, d, &out)
		out.Nonspecific = b.end(p, d, "nonspecific", &r.Nonspecific, defaults["nonspecific"])
	case "velocity":
		out.High = b.end(p, d, "V", &r.V, defaults["V"])
	default:
		out.High = b.end(p, d, "high", &r.High, defaults["high"])
		if !out.Low.Free && !out.High.Free && out.Low.Value == out.High.Value {
			at := p + ".low"
			if b.said(p + ".high") {
				at = p + ".high"
			}
			b.fault(at, "no-span", fmt.Sprintf("low and high are both %v, so nothing could be seen",
				out.Low.Value), nil, diag.Remedy{Write: "high: free"})
		}
	}
	b.responseDiffers(p, d, &out, names)
	if r.Of != "" && b.effector(r.Of) < 0 {
		b.fault(p+".of", "unknown-ligand", fmt.Sprintf("the study has no effector %q", r.Of),
			[]string{"The ligand whose binding is counted is one of the effectors: " + b.effectorNames() + "."},
			diag.Remedy{Write: fmt.Sprintf("effectors: [{name: %s, unit: %s}]", plainOrQuoted(r.Of),
				b.study.Ligand.Unit)})
	}
	return out
}

// responseUnit settles the unit of the response.
func (b *builder) responseUnit(p string, d *Data) {
	r := &d.Response
	saturates := r.Kind == "saturation"
	if r.Unit == nil {
		u := units.MustParse("fraction")
		if !saturates {
			u = units.Unit{}
		}
		if !b.said(p + ".unit") {
			b.byDefault("data."+d.Name+".response.unit", u.String())
		}
		r.Unit = &u
		return
	}
	switch {
	case r.Unit.IsLogarithm():
		b.fault(p+".unit", "transformed-response",
			"a response is fitted as it was measured, not as a logarithm",
			[]string{"Its scatter would be weighted wrongly."},
			diag.Remedy{Write: "unit: " + r.Unit.Linear().String()})
	case saturates && !r.Unit.IsPercent() && r.Unit.String() != "fraction" &&
		r.Unit.String() != "1":
		b.fault(p+".unit", "wrong-unit",
			fmt.Sprintf("a saturation is a fraction or percent, not %s", r.Unit), nil,
			diag.Remedy{Write: "unit: fraction"}, diag.Remedy{Say: "For an amount bound write",
				Write: "kind: bound"}, diag.Remedy{Say: "For anything else that follows binding write", Write: "kind: signal"})
	}
}

// strayEnds complains of numbers that this kind of response does not have.
func (b *builder) strayEnds(p string, r *Response, names []string) {
	allowed := slices.Concat([]string{"kind", "unit", "differs"}, names)
	if r.Kind == "bound" {
		allowed = append(allowed, "sites")
	}
	if r.Kind == "bound" || r.Kind == "saturation" {
		allowed = append(allowed, "of")
	}
	for _, k := range keyNames(responseKeys()) {
		if b.said(p+"."+k) && !slices.Contains(allowed, k) {
			b.faultAtKey(p+"."+k, "unknown-key", fmt.Sprintf("a response of the kind %s has no %s",
				r.Kind, k), []string{"Its keys are: " + strings.Join(allowed, ", ") + "."})
		}
	}
}

// end settles one number of a response.
func (b *builder) end(p string, d *Data, name string, s *Setting,
	byDefault string) saturation.Setting {
	if !b.said(p + "." + name) {
		b.byDefault("data."+d.Name+".response."+name, byDefault)
		v, err := strconv.ParseFloat(byDefault, 64)
		*s = Setting{Free: err != nil, Value: v}
	}
	if !s.Free && s.Value <= 0 && (name == "V" || name == "Bmax") || !s.Free && s.Value < 0 &&
		name == "nonspecific" {
		b.fault(p+"."+name, "out-of-bounds", fmt.Sprintf("%s must be above 0, not %v", name,
			s.Value), nil, diag.Remedy{Write: name + ": free"})
	}
	return saturation.Setting{Free: s.Free, Value: s.Value}
}

// bmax settles the ligand bound at saturation: Bmax, or sites per molecule.
func (b *builder) bmax(p string, d *Data, out *saturation.Response) saturation.Setting {
	r := &d.Response
	if b.said(p+".sites") && b.said(p+".Bmax") {
		b.faultAtKey(p+".sites", "two-answers", "Bmax and sites say the same thing twice", nil,
			diag.Remedy{Say: "Keep one of the two."})
	}
	if b.said(p + ".sites") {
		out.SitesPerMolecule = true
		return saturation.Setting{Free: r.Sites.Free, Value: r.Sites.Value}
	}
	if r.Bmax.Word == "sites" {
		out.SitesPerMolecule = true
		return saturation.Setting{} // that of each mechanism
	}
	return b.end(p, d, "Bmax", &r.Bmax, "free")
}

// responseDiffers settles which numbers of a response differ by what.
func (b *builder) responseDiffers(p string, d *Data, out *saturation.Response, names []string) {
	free := map[string]bool{"low": out.Low.Free, names[1]: out.High.Free,
		"nonspecific": out.Nonspecific.Free}
	for _, e := range d.Response.Differs {
		at := join(p+".differs", e.Name)
		switch {
		case !slices.Contains(names, e.Name):
			d := diag.Nearest(e.Name, names)
			var remedies []diag.Remedy
			if d != "" {
				remedies = []diag.Remedy{{Write: "differs: {" + d + ": " + e.Value + "}"}}
			}
			b.faultAtKey(at, "unknown-name", fmt.Sprintf("this response has no number %q", e.Name),
				[]string{"It has: " + strings.Join(names, ", ") + "."}, remedies...)
		case !free[e.Name]:
			b.faultAtKey(at, "not-free", fmt.Sprintf("%s is set to a number, so it cannot differ",
				e.Name), nil, diag.Remedy{Write: e.Name + ": free"})
		default:
			if b.knowsLevel(d, e.Value, at) {
				out.Differs[e.Name] = e.Value
			}
		}
	}
}
