package saturation

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms"
)

// simpleStudy is one invented data set beside one mechanism.
func simpleStudy(t testing.TB, family string, def mechanisms.Definition, r Response, noise Noise) *Analysis {
	t.Helper()
	rng := rand.New(rand.NewPCG(7, 11))
	d := Dataset{Name: "one", Response: r, Noise: noise}
	for i := range 12 {
		x := math.Exp(-4 + 0.75*float64(i))
		for rep := range 3 {
			y := x * x / (1 + x*x)
			d.Points = append(d.Points, Point{X: x, Y: 0.05 + 2*y + 0.02*rng.NormFloat64(), Sigma: 0.02 + 0.01*y,
				Preparation: string(rune('A' + rep)), Row: len(d.Points) + 2})
		}
	}
	return &Analysis{Ligand: Substance{Name: "ligand", Unit: "uM"}, Kelvin: math.NaN(), Data: []Dataset{d},
		Candidates: []Candidate{{Name: family, Family: family, Mechanism: build(t, family, def)}},
		Settings:   Settings{Starts: 10, Seed: 1, Level: 0.95, Method: "profile"}}
}

// Residual gradients agree with central differences for every scatter model,
// response and axis.
func TestBlockGradients(t *testing.T) {
	free := Setting{Free: true}
	responses := map[string]Response{
		"signal":   {Kind: "signal", Low: free, High: free},
		"velocity": {Kind: "velocity", High: free, Low: free},
		"bound":    {Kind: "bound", High: free, Low: free, Nonspecific: free},
	}
	for name, r := range responses {
		for _, noise := range []Noise{Constant, GivenSigma, Proportional, Mixed, Replicates, StudentT} {
			for _, axis := range []string{"free", "total", "total from Bmax"} {
				t.Run(fmt.Sprint(name, " ", noise, " ", axis), func(t *testing.T) {
					a := simpleStudy(t, "mwc", mechanisms.Definition{Sites: 4}, r, noise)
					d := &a.Data[0]
					d.Points = append(d.Points, Point{X: 0, Y: 0.04, Sigma: 0.02, Preparation: "A"})
					switch axis {
					case "total":
						d.Total, d.SitesPresent.Value = true, 0.7
					case "total from Bmax":
						d.Total, d.SitesPresent.FromBmax = true, 0.4
					}
					if name == "bound" {
						for i := range d.Points {
							d.Points[i].Blocked = i%4 == 3
						}
					}
					checkBlockGradient(t, a)
				})
			}
		}
	}
}

func checkBlockGradient(t *testing.T, a *Analysis) {
	t.Helper()
	m, err := newModel(a, &a.Candidates[0])
	if err != nil {
		t.Fatal(err)
	}
	b := m.blocks[0]
	rng := rand.New(rand.NewPCG(3, 5))
	theta := make([]float64, len(m.params))
	for i, p := range m.params {
		theta[i] = p.StartLow + (0.3+0.4*rng.Float64())*(p.StartHigh-p.StartLow)
		if p.kind == ofShift {
			theta[i] = 0.3 * rng.NormFloat64()
		}
	}
	n, k := b.Len(), len(theta)
	res, jac := make([]float64, n), mat.NewDense(n, k, nil)
	if err := b.Eval(res, jac, theta); err != nil {
		t.Fatal(err)
	}
	hi, lo := make([]float64, n), make([]float64, n)
	for j := range theta {
		h := 1e-5 * math.Max(1e-2, math.Abs(theta[j]))
		at := theta[j]
		theta[j] = at + h
		_ = b.Eval(hi, nil, theta)
		theta[j] = at - h
		_ = b.Eval(lo, nil, theta)
		theta[j] = at
		scale := 0.0
		for i := range n {
			scale = math.Max(scale, math.Abs(jac.At(i, j)))
		}
		for i := range n {
			want := (hi[i] - lo[i]) / (2 * h)
			if !(math.Abs(jac.At(i, j)-want) <= 2e-6*(1e-3+scale)) {
				t.Fatalf("∂r[%d]/∂%s = %.9g, differences %.9g", i, m.params[j].Name, jac.At(i, j), want)
			}
		}
	}
}

// Measurements of one prediction pooled into their mean give the sum of
// squares of the single measurements.
func TestPoolingKeepsTheSumOfSquares(t *testing.T) {
	free := Setting{Free: true}
	for _, noise := range []Noise{Constant, GivenSigma} {
		a := simpleStudy(t, "hill", mechanisms.Definition{}, Response{Kind: "signal", Low: free, High: free}, noise)
		m, err := newModel(a, &a.Candidates[0])
		if err != nil {
			t.Fatal(err)
		}
		b := m.blocks[0]
		theta := []float64{0.1, 0.2, 0.03, 2.1}
		res := make([]float64, b.Len())
		_ = b.Eval(res, nil, theta)
		pooled, more := b.Pooled()
		for _, r := range res {
			pooled += r * r
		}
		single := 0.0
		for i, q := range b.pts {
			s := 1.0
			if noise == GivenSigma {
				s = a.Data[0].Points[q.index].Sigma
			}
			e := (b.predicted(i) - b.y[i]) / s
			single += e * e
		}
		if b.Len() != 12 || more != 24 || math.Abs(pooled/single-1) > 1e-12 {
			t.Errorf("%s: %d rows, %d more, SS %.15g, want 12, 24, %.15g", noise, b.Len(), more, pooled, single)
		}
	}
}
