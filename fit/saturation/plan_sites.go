package saturation

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// planSite is one place where a reading can be taken: a ligand value of a curve.
type planSite struct {
	data  int
	curve string
	point Point
	sd    float64 // of one reading, by the leader's scatter
}

// planner chooses among sites. Throughout, standard deviations are those of the
// leader's fit, taken as known.
type planner struct {
	a      *Analysis // its data with known standard deviations
	right  *fitted   // of the study: the mechanism taken for right
	sites  []planSite
	chosen []int       // readings at each site
	each   int         // readings that one choice stands for
	draws  [][]float64 // its Θ: the best, then draws
	leads  [][]float64 // per draw, per site: its response
	grid   *model      // it over the data and one reading at every site

	rival  *fitted
	rivals [][]float64 // per draw, per site: the refitted rival's response
	starts [][]float64 // per draw: where the rival's next refit starts
}

func newPlanner(a *Analysis, right *fitted) (*planner, error) {
	p := &planner{right: right, each: max(1, a.Plan.Replicates)}
	p.a = knownScatter(a, right)
	if err := p.place(a); err != nil {
		return nil, err
	}
	p.chosen = make([]int, len(p.sites))
	var err error
	if p.grid, err = newModel(p.with(p.everywhere()), right.m.c); err != nil {
		return nil, err
	}
	p.scatterOfSites()
	p.drawConstants(a.Settings.Seed)
	for _, theta := range p.draws {
		p.leads = append(p.leads, p.responses(p.grid, theta))
	}
	return p, nil
}

// knownScatter is the analysis with the standard deviation of every point as the
// leader's fit has it.
func knownScatter(a *Analysis, f *fitted) *Analysis {
	b := *a
	b.Data = slices.Clone(a.Data)
	s := newSimulation(f, 0)
	for bi, bl := range f.m.blocks {
		d := &b.Data[bl.data]
		d.Noise, d.Points = GivenSigma, slices.Clone(d.Points)
		for k := range bl.pts {
			q := &d.Points[bl.pts[k].index]
			q.Sigma, q.Weight = s.sd[bi][k], 0
		}
	}
	return &b
}

// place lays the sites: on every curve that the plan asks for, over its range.
func (p *planner) place(a *Analysis) error {
	low, high := a.Plan.Low, a.Plan.High
	if !(low > 0 && high > low) {
		low, high = a.testedRange()
	}
	if !(low > 0 && high > low) {
		return errors.New("a plan needs a range; write   range: [LOWEST, HIGHEST]   with units under plan")
	}
	seen := map[string]bool{}
	for _, b := range p.right.m.blocks {
		d := &a.Data[b.data]
		for k := range b.pts {
			q := d.Points[b.pts[k].index]
			label := p.right.m.cells[b.pts[k].cell].label
			name := fmt.Sprint(b.data, "\x00", label, q.Levels, q.Effectors)
			if q.Blocked || seen[name] || !a.asksFor(d, &q) {
				continue
			}
			seen[name] = true
			for _, x := range ligandValues(low, high, a.Plan.Series) {
				q.X, q.Y, q.Weight, q.LeftOut = x, 0, 0, ""
				p.sites = append(p.sites, planSite{data: b.data, curve: curveName(d, &q, a), point: q})
			}
		}
	}
	if len(p.sites) == 0 {
		return errors.New("no curve of the data is what   plan: at:   asks for")
	}
	return nil
}

// curveName is the levels of a point's factors and effectors.
func curveName(d *Dataset, q *Point, a *Analysis) string {
	var parts []string
	for i, f := range d.Factors {
		parts = append(parts, a.label(f, q.Levels[i]))
	}
	for i, e := range a.Effectors {
		if i < len(q.Effectors) {
			parts = append(parts, a.label(e.Name, number(q.Effectors[i])))
		}
	}
	return joinLabels(parts)
}

// asksFor says whether a point belongs to a curve at which the plan is asked for.
func (a *Analysis) asksFor(d *Dataset, q *Point) bool {
	for _, h := range a.Plan.At {
		if i := slices.Index(d.Factors, h.Name); i >= 0 && !slices.Contains(h.Levels, q.Levels[i]) {
			return false
		}
		for i, e := range a.Effectors {
			if (e.Name == h.Name || e.Symbol == h.Name) && i < len(q.Effectors) && !slices.Contains(h.Values, q.Effectors[i]) {
				return false
			}
		}
	}
	return true
}

// ligandValues from low to high: evenly in the logarithm, or the steps of a dilution
// series down from the highest.
func ligandValues(low, high, series float64) []float64 {
	var all []float64
	if series > 1 {
		for x := high; x >= low*(1-1e-9) && len(all) < 1000; x /= series {
			all = append(all, x)
		}
		slices.Reverse(all)
		return all
	}
	for i := range planGrid {
		all = append(all, low*math.Pow(high/low, float64(i)/(planGrid-1)))
	}
	return all
}

// everywhere is one reading at each site.
func (p *planner) everywhere() []int {
	n := make([]int, len(p.sites))
	for i := range n {
		n[i] = 1
	}
	return n
}

// with is the analysis with readings at sites, behind those there are.
func (p *planner) with(readings []int) *Analysis {
	b := *p.a
	b.Data = slices.Clone(p.a.Data)
	for i := range b.Data {
		b.Data[i].Points = slices.Clone(b.Data[i].Points)
	}
	for i, n := range readings {
		s := &p.sites[i]
		q := s.point
		if q.Sigma = s.sd; q.Sigma == 0 {
			q.Sigma = 1
		}
		for range n {
			b.Data[s.data].Points = append(b.Data[s.data].Points, q)
		}
	}
	return &b
}

// new lists, in the order of with, which points of a model are the readings added:
// block, point in it, and site.
func (p *planner) added(m *model, readings []int) (all []addedPoint) {
	next := make([]int, len(p.a.Data))
	for i := range next {
		next[i] = len(p.a.Data[i].Points)
	}
	at := map[[2]int]int{}
	for i, n := range readings {
		d := p.sites[i].data
		for range n {
			at[[2]int{d, next[d]}] = i
			next[d]++
		}
	}
	for bi, b := range m.blocks {
		for k := range b.pts {
			if i, ok := at[[2]int{b.data, b.pts[k].index}]; ok {
				all = append(all, addedPoint{bi, k, i})
			}
		}
	}
	return all
}

type addedPoint struct{ block, point, site int }

// responses foretells the response at every site, by a model over the grid.
func (p *planner) responses(m *model, theta []float64) []float64 {
	out := make([]float64, len(p.sites))
	for _, b := range m.blocks {
		b.predict(theta, false)
	}
	for _, q := range p.added(m, p.everywhere()) {
		out[q.site] = m.blocks[q.block].predicted(q.point)
	}
	return out
}

// scatterOfSites is the leader's scatter law at the responses that it foretells.
func (p *planner) scatterOfSites() {
	m, err := newModel(p.unknownScatter(), p.right.m.c)
	if err != nil {
		return
	}
	theta := p.right.result.Theta
	for bi, b := range m.blocks {
		b.predict(theta, false)
		dev := make([]float64, len(b.pts))
		b.noise.deviations(b, dev, theta)
		sigma := p.right.blockSigma(bi)
		student, heavy := p.right.m.blocks[bi].noise.(*studentScatter)
		for _, q := range p.added(m, p.everywhere()) {
			if q.block != bi {
				continue
			}
			p.sites[q.site].sd = sigma * dev[q.point]
			if heavy {
				p.sites[q.site].sd = student.sigma
			}
		}
	}
}

// unknownScatter is the study's own data with a reading at every site; where standard
// deviations are given, a new reading has the median of them.
func (p *planner) unknownScatter() *Analysis {
	b := *p.right.m.a
	b.Data = slices.Clone(b.Data)
	for i := range b.Data {
		b.Data[i].Points = slices.Clone(b.Data[i].Points)
	}
	for i := range p.sites {
		s := &p.sites[i]
		q := s.point
		if b.Data[s.data].Noise == GivenSigma {
			q.Sigma = medianSigma(p.right.m.a.Data[s.data].Points)
		}
		b.Data[s.data].Points = append(b.Data[s.data].Points, q)
	}
	return &b
}

func medianSigma(points []Point) float64 {
	var all []float64
	for i := range points {
		if points[i].Sigma > 0 {
			all = append(all, points[i].Sigma)
		}
	}
	if len(all) == 0 {
		return 1
	}
	slices.Sort(all)
	return all[len(all)/2]
}

// drawConstants draws the leader's Θ from its covariance, kept within bounds; without a
// covariance there is the best alone.
func (p *planner) drawConstants(seed uint64) {
	r := p.right.result
	best := r.Theta[:len(p.grid.params)]
	p.draws = [][]float64{slices.Clone(best)}
	rng := rand.New(rand.NewPCG(seed, 8))
	root := covarianceRoot(r)
	for d := 1; d < planDraws && root != nil; d++ {
		p.draws = append(p.draws, drawn(p.grid, best, root, rng))
	}
}

// drawn is Θ + L z, within bounds.
func drawn(m *model, best []float64, root *mat.TriDense, rng *rand.Rand) []float64 {
	n, _ := root.Dims()
	z := make([]float64, n)
	for i := range z {
		z[i] = rng.NormFloat64()
	}
	theta := slices.Clone(best)
	for i := range theta {
		for j := 0; j <= i; j++ {
			theta[i] += root.At(i, j) * z[j]
		}
		q := &m.params[i].Parameter
		theta[i] = math.Min(math.Max(theta[i], q.Low), q.High)
	}
	return theta
}

// covarianceRoot is L with LLᵀ the covariance, rows of fixed numbers zero; nil where
// there is no covariance.
func covarianceRoot(r *fit.Result) *mat.TriDense {
	if r.Cov == nil {
		return nil
	}
	n := r.Cov.SymmetricDim()
	c := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			c.SetSym(i, j, r.Cov.At(i, j))
		}
		if c.At(i, i) == 0 {
			c.SetSym(i, i, 1e-300)
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(c) {
		return nil
	}
	root := mat.NewTriDense(n, mat.Lower, nil)
	chol.LTo(root)
	return root
}

// refit fits a mechanism to a model's data from given starts.
func refit(ctx context.Context, m *model, starts ...[]float64) (*fit.Result, error) {
	problem := m.problem()
	problem.Starts = starts
	r, err := fit.Solve(ctx, problem, fit.Settings{Starts: len(starts), Workers: 1})
	if err == nil && (r == nil || len(r.Theta) == 0) {
		err = errors.New("a refit found no answer")
	}
	return r, err
}
