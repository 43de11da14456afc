package saturation

import "context"

const dissociationSource = "Ackers & Halvorson 1974 Proc Natl Acad Sci 71:4312, from memory"

// asksDissociation asks whether a molecule of several sites may fall apart at
// the concentration of the assay.
func (r *review) asksDissociation(context.Context) {
	sites, assembly := r.mostSites(), false
	for i := range r.a.Candidates {
		assembly = assembly || r.a.Candidates[i].Family == "assembly"
	}
	if sites < 3 || assembly {
		return
	}
	for di := range r.a.Data {
		d := &r.a.Data[di]
		if d.Trace {
			continue
		}
		a := answer{id: "dissociation", source: dissociationSource, group: foundGood}
		if d.SitesPresent.Value <= 0 && d.SitesPresent.FromBmax <= 0 {
			a.group, a.remedy = settleFirst, "sites_present: 80 uM"
			if !pressure(r.a.Ligand.Unit) {
				a.group = forCompleteness // asked by depletion already
			}
			a.text = r.where(di) +
				"The concentration of sites is not stated: whether molecules fall apart into smaller " +
				"ones cannot be judged."
			a.effect = "Where they do, n_H falls towards that of the parts."
		} else {
			a.text = r.where(di) +
				"The concentration of sites is stated; set it against the constant of dissociation into " +
				"smaller molecules."
		}
		r.add(a)
	}
}

// mostSites is the largest number of sites on one molecule among the mechanisms.
func (r *review) mostSites() int {
	n := 0
	for i := range r.a.Candidates {
		n = max(n, r.a.Candidates[i].Mechanism.Sites())
	}
	return n
}
