package saturation

import (
	"math"
	"testing"

	"ligancy/mechanisms"
)

// Every derived number's gradient agrees with central differences, on both axes.
func TestQuantityGradients(t *testing.T) {
	free := Setting{Free: true}
	for _, family := range []string{"mwc", "adair", "hill", "independent"} {
		def := mechanisms.Definition{}
		switch family {
		case "mwc", "adair":
			def.Sites = 4
		case "independent":
			def.Classes = []mechanisms.Count{{Name: "tight", Sites: 1}, {Name: "loose", Sites: 2}}
		}
		a := simpleStudy(t, family, def, Response{Kind: "bound", High: free, Nonspecific: free}, Proportional)
		a.Data[0].Total, a.Data[0].SitesPresent.FromBmax = true, 0.3
		m, err := newModel(a, &a.Candidates[0])
		if err != nil {
			t.Fatal(err)
		}
		theta := make([]float64, len(m.params))
		for i, p := range m.params {
			theta[i] = p.StartLow + 0.62*(p.StartHigh-p.StartLow)
		}
		if family == "adair" { // a curve with one steepest place
			copy(theta, []float64{0.4, 0.3, 2, 6})
		}
		list := append(m.curveWanted(0), m.totalWanted(0)...)
		if len(list) < 15 {
			t.Fatalf("%d numbers", len(list))
		}
		for _, w := range list {
			checkQuantityGradient(t, family, w, theta)
		}
	}
}

func checkQuantityGradient(t *testing.T, family string, w wanted, theta []float64) {
	t.Helper()
	q := w.make()
	g, scratch := make([]float64, len(theta)), make([]float64, len(theta))
	if math.IsNaN(q(theta, g)) {
		return
	}
	for j := range theta {
		h := 1e-5 * math.Max(0.1, math.Abs(theta[j]))
		at := theta[j]
		theta[j] = at + h
		hi := q(theta, scratch)
		theta[j] = at - h
		lo := q(theta, scratch)
		theta[j] = at
		if want := (hi - lo) / (2 * h); !(math.Abs(g[j]-want) <= 3e-6*(1+math.Abs(want))) {
			t.Errorf("%s: ∂%s/∂θ%d = %.9g, differences %.9g", family, w.row.Name, j, g[j], want)
		}
	}
}
