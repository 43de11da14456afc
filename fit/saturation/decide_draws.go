package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"sync"

	"ligancy/fit"
)

// simulation is studies simulated from one candidate at its own fit: its
// predictions with its own scatter about them.
type simulation struct {
	f    *fitted
	seed uint64
	mean [][]float64 // per block
	sd   [][]float64
}

func newSimulation(f *fitted, seed uint64) *simulation {
	s := &simulation{f: f, seed: seed}
	for bi, b := range f.m.blocks {
		dev := f.deviations(b)
		sigma := f.blockSigma(bi)
		if t, ok := b.noise.(*studentScatter); ok {
			sigma = t.sigma
			for k := range dev {
				dev[k] = 1
			}
		}
		mean := make([]float64, len(b.pts))
		for k := range mean {
			mean[k] = b.predicted(k)
			dev[k] *= sigma
		}
		s.mean, s.sd = append(s.mean, mean), append(s.sd, dev)
	}
	return s
}

// blockSigma is the scatter of one block as draws need it: absolute σ for
// relative deviations, 1 where the deviations are the data's own.
func (f *fitted) blockSigma(bi int) float64 {
	b := f.m.blocks[bi]
	if b.noise.scatter() == fit.Known {
		return 1
	}
	n := len(b.pts)
	dof := n - f.m.free()*n/max(f.row.Points, 1)
	return math.Sqrt(f.relativeSS(b) / float64(max(dof, 1)))
}

// draw writes study number k of the simulation into y.
func (s *simulation) draw(k int, y [][]float64) {
	rng := rand.New(rand.NewPCG(s.seed, uint64(k)))
	for bi, mean := range s.mean {
		_, heavy := s.f.m.blocks[bi].noise.(*studentScatter)
		for i, m := range mean {
			e := rng.NormFloat64()
			if heavy {
				e *= math.Sqrt(studentFreedom / chiSquare(rng, studentFreedom))
			}
			y[bi][i] = m + s.sd[bi][i]*e
		}
	}
}

// chiSquare draws from χ² with an even number of degrees of freedom.
func chiSquare(rng *rand.Rand, freedom int) float64 {
	sum := 0.0
	for range freedom / 2 {
		sum += 2 * rng.ExpFloat64()
	}
	return sum
}

// values are slices for one simulated study.
func (s *simulation) values() [][]float64 {
	y := make([][]float64, len(s.mean))
	for bi := range y {
		y[bi] = make([]float64, len(s.mean[bi]))
	}
	return y
}

// crew is one goroutine's workspaces: it is called with the values of every
// draw that it takes. What it finds has to be kept by the draw's number alone.
type crew func(k int, y [][]float64)

// draws runs draws [from, to) side by side, one goroutine a crew.
func (s *simulation) draws(ctx context.Context, from, to int, crews []crew) {
	var wg sync.WaitGroup
	next := make(chan int)
	for _, each := range crews {
		wg.Go(func() {
			y := s.values()
			for k := range next {
				if ctx.Err() == nil {
					s.draw(k, y)
					each(k, y)
				}
			}
		})
	}
	for k := from; k < to; k++ {
		next <- k
	}
	close(next)
	wg.Wait()
}
