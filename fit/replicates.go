package fit

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
)

// Replicate is one set of replicate data for a problem.
type Replicate struct {
	// Shift is added to the residuals of blocks that are not Observed: replicate
	// data differ from the data by a constant, and so do their residuals.
	Shift []float64
	// Data are replicate responses for blocks that are Observed, valid until the
	// next draw.
	Data []float64
	// Weight multiplies each residual: the root of how often its row was drawn.
	// nil leaves all as they are.
	Weight []float64
	// Within is the sum of squares within collapsed rows, per block; it takes the
	// place of what Pooled says.
	Within []float64
}

// Replicates make sets of replicate data. Draw fills rep with set number i: the
// same i gives the same data, whatever was drawn before and whoever asks. It is
// called from several goroutines, each with a rep of its own.
type Replicates interface {
	Draw(i int, rep *Replicate)
}

// Observed is a Block whose data can be replaced. It is needed where scatter
// depends on the curve; elsewhere the shift of the residuals will do. Residuals
// are (f(θ) − y)/sd(θ).
type Observed interface {
	Cloner
	// Predict writes f(θ) and sd(θ) of every row, in units of one σ.
	Predict(mean, sd, theta []float64)
	// Observe takes responses in place of the present ones.
	Observe(y []float64)
}

// source is what all kinds of replicates share.
type source struct {
	seed     uint64
	rows     []int // first row of each block, and N
	res      []float64
	sigma    []float64
	mean, sd []float64 // of rows of Observed blocks
	observed bool
	within   []float64 // residuals within collapsed rows, per block
}

func newSource(p *Problem, r *Result, seed uint64) (*source, error) {
	if r.N <= r.Constants {
		return nil, errors.New("fit: as many parameters as residuals: there is no scatter to draw from")
	}
	n := len(r.Residuals)
	s := &source{seed: seed, rows: make([]int, len(p.Blocks)+1), res: r.Residuals, sigma: r.Sigma,
		mean: make([]float64, n), sd: make([]float64, n), within: make([]float64, len(p.Blocks))}
	for b, block := range p.Blocks {
		from := s.rows[b]
		to := from + block.Len()
		s.rows[b+1] = to
		if to > n {
			return nil, errors.New("fit: the result is not one of this problem")
		}
		if o, ok := block.(Observed); ok {
			s.observed = true
			o.Clone().(Observed).Predict(s.mean[from:to], s.sd[from:to], r.Theta)
		}
		if q, ok := block.(Pooled); ok {
			_, more := q.Pooled()
			s.within[b] = float64(more)
		}
	}
	return s, nil
}

// rng is the generator of draw i.
func (s *source) rng(i int) rand.PCG { return *rand.NewPCG(s.seed, uint64(i)) }

// fill turns residuals e at the estimate, left in rep.Shift, into a replicate.
func (s *source) fill(rep *Replicate) {
	if s.observed {
		if rep.Data == nil {
			rep.Data = make([]float64, len(s.res))
		}
		for i, e := range rep.Shift {
			rep.Data[i] = s.mean[i] - s.sd[i]*e
		}
	}
	for i := range rep.Shift {
		rep.Shift[i] -= s.res[i]
	}
}

// parametric draws are normal with the estimated scatter about the fitted curve.
type parametric struct{ *source }

// Parametric makes replicate data that are normal about the fitted curve, with
// the estimated σ of each block (1 where it is known).
func Parametric(p *Problem, r *Result, seed uint64) (Replicates, error) {
	s, err := newSource(p, r, seed)
	return parametric{s}, err
}

func (d parametric) Draw(i int, rep *Replicate) {
	pcg := d.rng(i)
	rng := rand.New(&pcg)
	for b, sigma := range d.sigma {
		for k := d.rows[b]; k < d.rows[b+1]; k++ {
			rep.Shift[k] = sigma * rng.NormFloat64()
		}
	}
	for b, sigma := range d.sigma {
		rep.Within[b] = 0
		if m := d.within[b]; m > 0 {
			rep.Within[b] = sigma * sigma * chiSquare(rng, m)
		}
	}
	d.fill(rep)
}

// chiSquare draws from χ² with m degrees of freedom, as a gamma variate of shape
// m/2 and scale 2 (Marsaglia & Tsang 2000, ACM Trans Math Softw 26, 363–372).
func chiSquare(rng *rand.Rand, m float64) float64 {
	a, boost := m/2, 1.0
	if a < 1 {
		boost = math.Pow(1-rng.Float64(), 1/a)
		a++
	}
	d := a - 1.0/3
	c := 1 / math.Sqrt(9*d)
	for {
		x := rng.NormFloat64()
		v := 1 + c*x
		if v <= 0 {
			continue
		}
		v = v * v * v
		u := 1 - rng.Float64()
		if math.Log(u) < x*x/2+d-d*v+d*math.Log(v) {
			return 2 * d * v * boost
		}
	}
}

// residual draws put residuals of the same block in one another's place.
type residual struct {
	*source
	pool []float64 // centred, stretched to the estimated scatter
}

// Residual makes replicate data from the residuals themselves, centred within
// their block and stretched by √(N/(N−p)), drawn with replacement.
//
// Collapsed rows have no residuals of their own to draw: use Parametric.
//
// Efron B & Tibshirani RJ (1993) An Introduction to the Bootstrap, ch. 9.
func Residual(p *Problem, r *Result, seed uint64) (Replicates, error) {
	s, err := newSource(p, r, seed)
	if err != nil {
		return nil, err
	}
	if sum(s.within) > 0 {
		return nil, errors.New("fit: residuals of collapsed replicates cannot be drawn")
	}
	d := residual{source: s, pool: make([]float64, len(s.res))}
	stretch := math.Sqrt(float64(r.N) / float64(r.N-r.Constants))
	for b := range s.sigma {
		block := s.res[s.rows[b]:s.rows[b+1]]
		mean := sum(block) / float64(max(len(block), 1))
		for k := range block {
			d.pool[s.rows[b]+k] = stretch * (block[k] - mean)
		}
	}
	return d, nil
}

func (d residual) Draw(i int, rep *Replicate) {
	pcg := d.rng(i)
	rng := rand.New(&pcg)
	for b := range d.sigma {
		from, to := d.rows[b], d.rows[b+1]
		for k := from; k < to; k++ {
			rep.Shift[k] = d.pool[from+rng.IntN(to-from)]
		}
		rep.Within[b] = 0
	}
	d.fill(rep)
}

// grouped draws whole groups with replacement.
type grouped struct {
	seed   uint64
	group  []int // of each row, from 0
	groups int
}

// ByGroup draws whole groups of rows (preparations) with replacement, as many
// as there are: the group, not the row, is the unit of replication. group holds
// the number of each row's group.
//
// A parameter that only one group informs is not determined in draws without
// that group; it then stays where it started.
func ByGroup(p *Problem, group []int, seed uint64) (Replicates, error) {
	n := 0
	for _, b := range p.Blocks {
		n += b.Len()
	}
	if len(group) != n {
		return nil, fmt.Errorf("fit: groups are given for %d of %d rows", len(group), n)
	}
	number := map[int]int{}
	d := grouped{seed: seed, group: make([]int, n)}
	for i, g := range group {
		k, ok := number[g]
		if !ok {
			k = len(number)
			number[g] = k
		}
		d.group[i] = k
	}
	d.groups = len(number)
	if d.groups < 2 {
		return nil, errors.New("fit: one group alone says nothing of the scatter between groups")
	}
	for _, b := range p.Blocks {
		if q, ok := b.(Pooled); ok {
			if _, more := q.Pooled(); more > 0 {
				return nil, errors.New("fit: collapsed replicates cannot be drawn by group")
			}
		}
	}
	return d, nil
}

func (d grouped) Draw(i int, rep *Replicate) {
	rng := rand.New(rand.NewPCG(d.seed, uint64(i)))
	times := make([]float64, d.groups)
	for range times {
		times[rng.IntN(d.groups)]++
	}
	for k := range times {
		times[k] = math.Sqrt(times[k])
	}
	if rep.Weight == nil {
		rep.Weight = make([]float64, len(d.group))
	}
	for k, g := range d.group {
		rep.Weight[k] = times[g]
	}
	clear(rep.Shift)
}
