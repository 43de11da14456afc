package specs

import (
	"fmt"
	"math"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
)

// judge holds what was read against what a fit needs.
func (r *points) judge() {
	if r.d.faulty {
		return // nothing can be said of points that were not read
	}
	var kept []saturation.Point
	for _, p := range r.out.Points {
		if p.LeftOut == "" {
			kept = append(kept, p)
		}
	}
	if len(kept) == 0 {
		if len(r.out.Points) > 0 {
			r.faultAtKey(r.path+".columns.left_out", "no-rows-kept", "every row is left out",
				[]string{"An empty cell in this column keeps its row."},
				diag.Remedy{Write: "left_out: COLUMN"})
		}
		return
	}
	r.judgeBlocked(kept)
	r.judgeSpread(kept)
	r.judgePercent(kept)
	r.judgeNoise(kept)
}

// judgeBlocked asks that some tubes were blocked, and some not.
func (r *points) judgeBlocked(kept []saturation.Point) {
	if r.blocked < 0 {
		return
	}
	n := 0
	for _, p := range kept {
		if p.Blocked {
			n++
		}
	}
	column := r.d.Columns.Blocked.Name
	at := r.path + ".blocked_when"
	if !r.said(at) {
		at = r.path + ".columns.blocked"
	}
	switch n {
	case 0:
		r.fault(at, "no-such-value", fmt.Sprintf("no row has %q in column %s", r.d.BlockedWhen,
			column),
			[]string{fmt.Sprintf("Column %s holds: %s.", column, shortList(r.t.Values(r.blocked),
				12))}, diag.Remedy{Write: "blocked_when: " + nearestOr(r.d.BlockedWhen,
				r.t.Values(r.blocked))})
	case len(kept):
		r.fault(at, "all-blocked", fmt.Sprintf("every row has %q in column %s, so nothing specific was measured", r.d.BlockedWhen, column), nil, diag.Remedy{Say: "Name the column and the word that tell blocked tubes from open ones."})
	}
}

func nearestOr(word string, valid []string) string {
	if near := diag.Nearest(word, valid); near != "" {
		return near
	}
	for _, v := range valid {
		if v != "" {
			return v
		}
	}
	return "…"
}

// judgeSpread asks for more than one ligand value and more than one response.
func (r *points) judgeSpread(kept []saturation.Point) {
	x, y := kept[0].X, kept[0].Y
	sameX, sameY := true, true
	for _, p := range kept {
		sameX = sameX && p.X == x && p.Seconds == kept[0].Seconds
		sameY = sameY && p.Y == y
	}
	if sameX && len(kept) > 1 {
		r.fault(r.ligand.path, "one-ligand-value",
			fmt.Sprintf("all %d points are at one ligand value, %s %s", len(kept), number(x),
				r.study.Ligand.Unit), []string{"A curve needs several."},
			diag.Remedy{Say: "Name the column that holds the ligand:", Write: "ligand: COLUMN"})
	}
	if sameY && len(kept) > 1 {
		r.fault(r.response[0].path, "all-equal",
			fmt.Sprintf("all %d responses are %s, so there is no curve", len(kept), number(y)), nil,
			diag.Remedy{Say: "Name the column that holds what was measured:",
				Write: "response: COLUMN"})
	}
}

// judgePercent asks whether fractions are percent, or the reverse.
func (r *points) judgePercent(kept []saturation.Point) {
	if r.failed[r.path+".response.unit"] || r.out.Response.Kind != "saturation" ||
		r.response[0].unit.IsPercent() != r.response[0].to.IsPercent() {
		return
	}
	top := math.Inf(-1)
	for _, p := range kept {
		top = max(top, p.Y)
	}
	at := r.path + ".response.unit"
	if !r.said(at) {
		at = r.response[0].path
	}
	switch {
	case !r.out.Response.Percent && top > 2:
		r.fault(at, "percent", fmt.Sprintf("saturations up to %s are no fractions", number(top)),
			nil, diag.Remedy{Write: "unit: percent"},
			diag.Remedy{Say: "For an amount bound write", Write: "kind: bound"})
	case r.out.Response.Percent && top <= 1.5:
		r.warn(at, "percent", fmt.Sprintf("no saturation is above %s percent", number(top)), nil,
			diag.Remedy{Say: "If these are fractions, write", Write: "unit: fraction"})
	}
	high := r.d.Response.High
	if r.out.Response.Percent && high.Said && !high.Free && high.Value == 1 {
		r.warn(r.path+".response.high", "percent", "high is 1 percent here", nil,
			diag.Remedy{Say: "If full saturation is meant, write", Write: "high: 100"})
	}
}

// judgeNoise asks that the scatter model has what it needs.
func (r *points) judgeNoise(kept []saturation.Point) {
	c := &r.d.Columns
	spread := c.Sigma.Name != "" || c.SEM.Name != ""
	at := r.path + ".noise"
	switch {
	case c.Sigma.Name != "" && c.SEM.Name != "":
		r.faultAtKey(r.path+".columns.sem", "two-answers", "sigma and sem say the same thing twice",
			nil, diag.Remedy{Say: "Keep one of the two."})
	case spread && c.Weight.Name != "":
		r.faultAtKey(r.path+".columns.weight", "two-answers",
			"weight does not go with a standard deviation in the same table", nil,
			diag.Remedy{Say: "Keep one of the two."})
	case r.d.Noise == "given" && !spread:
		r.fault(at, "missing-column", "noise given needs a standard deviation for each row", nil,
			diag.Remedy{Write: "sigma: COLUMN", Where: "under columns,"}, diag.Remedy{Say: "or",
				Write: "sem: COLUMN, n: COLUMN", Where: "under columns."})
	case r.d.Noise != "given" && spread:
		r.warn(at, "unused-column", fmt.Sprintf("with noise %s the standard deviations of the table are not used", r.d.Noise), nil, diag.Remedy{Say: "To use them, write", Write: "noise: given"})
	case r.d.Noise == "replicates" && !hasReplicates(kept):
		r.fault(at, "no-replicates", "no ligand value was measured twice, so the scatter cannot come from replicates", nil, diag.Remedy{Write: "noise: constant"})
	}
}

// hasReplicates reports whether two points differ in nothing but the response.
func hasReplicates(kept []saturation.Point) bool {
	seen := map[string]bool{}
	for _, p := range kept {
		k := fmt.Sprint(p.X, p.Seconds, p.Levels, p.Effectors, p.Blocked)
		if seen[k] {
			return true
		}
		seen[k] = true
	}
	return false
}
