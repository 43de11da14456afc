package specs

import (
	"fmt"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// sitesPresent settles the concentration of sites.
func (b *builder) sitesPresent(p string, d *Data) saturation.SitesPresent {
	s := d.SitesPresent
	at := p + ".sites_present"
	switch {
	case s.From != "":
		return b.sitesFromBmax(p, d)
	case s.Amount != nil:
		return b.sitesSaid(at, d)
	case d.LigandAxis == "total" && !b.said(at):
		b.faultAtKey(p+".ligand_axis", "missing-key",
			"total ligand on the axis needs the concentration of sites",
			[]string{"What is bound is taken from what was added."},
			diag.Remedy{Write: "sites_present: 80 uM"}, diag.Remedy{Say: "or, where Bmax gives it,",
				Write: "sites_present: {from: Bmax, at: 0.30 mg/mL}"})
	}
	return saturation.SitesPresent{}
}

// sitesSaid settles `sites_present: 80 uM`.
func (b *builder) sitesSaid(at string, d *Data) saturation.SitesPresent {
	q, ligand := d.SitesPresent.Amount, b.study.Ligand.Unit
	if q.Value <= 0 {
		b.fault(at, "out-of-bounds", "sites_present must be above 0", nil,
			diag.Remedy{Write: "sites_present: 80 uM"})
		return saturation.SitesPresent{}
	}
	if q.Bare {
		return saturation.SitesPresent{Value: q.Value, Unit: ligand.String()}
	}
	if q.Unit.Same(ligand) {
		v, _ := q.In(ligand)
		return saturation.SitesPresent{Value: v, Unit: ligand.String()}
	}
	switch {
	case d.LigandAxis == "total":
		b.wrongUnit(at, q.Unit, ligand, "total ligand")
	case !q.Unit.IsConcentration():
		b.fault(at, "wrong-unit", fmt.Sprintf("sites_present: %s is %s, not a concentration of sites", q.Unit, q.Unit.Kind()), nil, diag.Remedy{Write: "sites_present: 80 uM"})
	}
	return saturation.SitesPresent{Value: q.Value, Unit: q.Unit.String()}
}

// sitesFromBmax settles `sites_present: {from: Bmax, at: 0.30 mg/mL}`: the
// factor that makes a concentration in the ligand's unit of Bmax.
func (b *builder) sitesFromBmax(p string, d *Data) saturation.SitesPresent {
	at, ligand := p+".sites_present", b.study.Ligand.Unit
	if d.Response.Kind != "bound" || d.Response.Unit == nil {
		b.fault(at+".from", "no-bmax",
			"only a response of the kind bound has a Bmax to make sites from", nil,
			diag.Remedy{Write: "sites_present: 80 uM"})
		return saturation.SitesPresent{}
	}
	one := units.Quantity{Value: 1, Bare: true}
	if d.SitesPresent.At != nil {
		one = *d.SitesPresent.At
	}
	made := *d.Response.Unit
	if !one.Bare {
		made = units.Multiply(made, one.Unit)
	}
	if b.failed["ligand.unit"] || b.failed[p+".response.unit"] {
		return saturation.SitesPresent{} // nothing is known of the units
	}
	f, err := units.Factor(made, ligand)
	if err != nil || one.Value <= 0 {
		needs := units.Divide(ligand, *d.Response.Unit)
		b.fault(at, "wrong-unit", fmt.Sprintf("Bmax in %s at %s makes no concentration in %s",
			d.Response.Unit, one, ligand), nil,
			diag.Remedy{Say: "Say what Bmax is multiplied by, in a unit like " + needs.String() + ":", Write: "sites_present: {from: Bmax, at: 0.30 mg/mL}"})
		return saturation.SitesPresent{}
	}
	return saturation.SitesPresent{FromBmax: f * one.Value, Unit: ligand.String()}
}

// phases settles stretches of time.
func (b *builder) phases(p string, phases []Phase) []saturation.Phase {
	var out []saturation.Phase
	for i, ph := range phases {
		at := indexed(p, i)
		q := saturation.Phase{Dilute: ph.Dilute, Wash: ph.Wash, Seconds: b.seconds(at+".for",
			ph.For)}
		var does []string
		for _, k := range []string{"add", "dilute", "block", "wash"} {
			if b.said(at + "." + k) {
				does = append(does, k)
			}
		}
		if len(does) != 1 {
			b.fault(at, "one-thing-a-phase",
				fmt.Sprintf("a phase does one of add, dilute, block and wash; this one has %d of them", len(does)), nil, diag.Remedy{Write: "{add: 10 nM, for: 30 min}"})
		}
		q.Add = b.positive(at+".add", ph.Add)
		q.Block = b.positive(at+".block", ph.Block)
		out = append(out, q)
	}
	return out
}

// positive settles an amount of ligand that must be above zero; 0 where it is not said.
func (b *builder) positive(p string, q *units.Quantity) float64 {
	if q == nil {
		return 0
	}
	v, ok := b.inUnit(p, q, b.study.Ligand.Unit, "the ligand")
	if ok && v <= 0 {
		b.fault(p, "out-of-bounds", fmt.Sprintf("%s must be above 0, not %s", lastName(p), q), nil,
			diag.Remedy{Say: "Write for example", Write: fmt.Sprintf("%s: 1 %s", lastName(p),
				b.study.Ligand.Unit)})
	}
	return v
}
