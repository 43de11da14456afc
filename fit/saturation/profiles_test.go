package saturation

import (
	"context"
	"testing"
)

// Intervals of higher levels hold those of lower ones, and the study's own lies
// between those of 90 and 99 %.
func TestProfilesNestByLevel(t *testing.T) {
	a := clamStudy(t)
	a.Settings.Draws = 0
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	type constant struct{ curve, name string }
	ends := map[constant]map[float64][2]float64{}
	for _, r := range out.Profiles {
		if r.Mechanism != out.Verdict.Leads {
			t.Fatalf("a profile of %q", r.Mechanism)
		}
		k := constant{r.Curve, r.Name}
		if ends[k] == nil {
			ends[k] = map[float64][2]float64{}
		}
		e := ends[k][float64(r.Level)]
		if e[0] == 0 {
			e[0] = float64(r.Value)
		} else {
			e[1] = float64(r.Value)
		}
		ends[k][float64(r.Level)] = e
	}
	if len(ends) != 4 { // K_R, c and L at two pH
		t.Errorf("profiles of %d constants", len(ends))
	}
	for k, by := range ends {
		for i := 1; i < len(profileLevels); i++ {
			a, b := by[profileLevels[i-1]], by[profileLevels[i]]
			if !(b[0] < a[0] && a[0] < a[1] && a[1] < b[1]) {
				t.Errorf("%v: %v within %v", k, a, b)
			}
		}
		for _, q := range out.Quantities {
			if q.Mechanism == out.Verdict.Leads && q.Of == "constant" && q.Name == k.name && q.Curve == k.curve {
				if a, b := by[0.9], by[0.99]; !(b[0] < float64(q.Low) && float64(q.Low) < a[0] && a[1] < float64(q.High) && float64(q.High) < b[1]) {
					t.Errorf("%v: 95 %% from %v to %v, 90 %% %v, 99 %% %v", k, q.Low, q.High, a, b)
				}
			}
		}
	}
}
