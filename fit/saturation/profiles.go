package saturation

import (
	"context"
	"math"
)

// ProfileRow is one place on the profile likelihood of a constant: an end of
// its profile interval of one level. Between them they draw the profile, which
// an interval of one level alone does not show: lopsided, flat, or round.
type ProfileRow struct {
	Mechanism string  `json:"mechanism"`
	Curve     string  `json:"curve"`
	Name      string  `json:"name"`
	Ligand    *string `json:"ligand"`
	Site      *string `json:"site"`
	Level     Real    `json:"level"` // of the interval that ends here
	Value     Real    `json:"value"`
	Unit      string  `json:"unit"`
}

// profileLevels are the levels at which profiles are sampled, beside that of
// the study's intervals.
var profileLevels = []float64{0.5, 0.8, 0.9, 0.99}

// mostProfiles bounds the constants whose profiles are sampled.
const mostProfiles = 30

// profileRows samples the profiles of one fit's constants. There are none where
// the study asks for quick intervals.
func (a *Analysis) profileRows(ctx context.Context, f *fitted) []ProfileRow {
	if f.result == nil || f.profiler(a.Settings.Level) == nil || f.row.Status == "stopped" {
		return nil
	}
	var list []wanted
	for _, w := range f.wantedRows() {
		if w.row.Of == "constant" && !w.quick && len(list) < mostProfiles {
			list = append(list, w)
		}
	}
	n := len(profileLevels)
	rows := make([]QuantityRow, n*len(list))
	a.sideBySide(len(rows), func() worker {
		return worker{
			do: func(i int) {
				pr := f.profiler(profileLevels[i%n])
				rows[i] = f.withInterval(ctx, list[i/n], pr)
			},
			better: func() []float64 { return nil },
		}
	})
	var out []ProfileRow
	for i := range rows {
		q := &rows[i]
		if q.Interval != "profile" && q.Held == "fixed" {
			continue
		}
		for _, v := range []Real{q.Low, q.High} {
			if !math.IsNaN(float64(v)) {
				out = append(out, ProfileRow{q.Mechanism, q.Curve, q.Name, q.Ligand, q.Site, Real(profileLevels[i%n]), v, q.Unit})
			}
		}
	}
	return out
}
