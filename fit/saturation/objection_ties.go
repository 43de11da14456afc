package saturation

import (
	"context"
	"fmt"
	"math"
	"strconv"
)

const (
	tiesSource = "Middendorf & Aldrich 2017 J Gen Physiol 149:105, 121"
	tied       = 0.95
)

// asksTies asks how L and K_R of concerted mechanisms are tied.
func (r *review) asksTies(context.Context) {
	f := r.standing("mwc")
	if f == nil || f.result.Cov == nil {
		return
	}
	strongest, name := 0.0, ""
	for i, p := range f.m.params {
		for j, q := range f.m.params {
			if p.kind != ofConstant || q.kind != ofConstant || f.m.consts[p.constant].Name != "L" ||
				f.m.consts[q.constant].Name != "K_R" || f.m.consts[q.constant].Ligand != "" {
				continue
			}
			v := f.result.Cov.At(i, j) / math.Sqrt(f.result.Cov.At(i, i)*f.result.Cov.At(j, j))
			if math.Abs(v) > math.Abs(strongest) && math.Abs(v) < 1+1e-9 { // edges have no variance
				strongest, name = v, p.title()
			}
		}
	}
	if name == "" {
		r.add(answer{id: "tied-constants", group: foundGood, source: tiesSource,
			text: "L and K_R are not both fitted, and so not tied."})
		return
	}
	a := answer{id: "tied-constants", group: foundGood, source: tiesSource,
		text: fmt.Sprintf("ln %s and ln K_R of %s are correlated by %s.", name, quoted(f.row.Name),
			fourPlaces(strongest))}
	if math.Abs(strongest) >= tied {
		a.group = sayInPaper
		a.text = fmt.Sprintf("ln %s and ln K_R of %s are tied (r = %s): the data hold K_R·L^(1/%d), "+
			"not each.",
			name, quoted(f.row.Name), fourPlaces(strongest), f.row.Sites)
		a.effect = "n_H is held better than either."
		a.remedy = "print L with K_R and r, or an effector series that parts them"
	}
	r.add(a)
}

// fourPlaces writes a correlation.
func fourPlaces(v float64) string { return strconv.FormatFloat(v, 'f', 4, 64) }
