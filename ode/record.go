package ode

import (
	"errors"
	"fmt"
	"sort"

	"gonum.org/v1/gonum/mat"
)

// record keeps the polynomial of every step, for Solution.At.
type record struct {
	n, p   int
	pieces []piece
	data   []float64
}

// piece is one step: its end, its size, and where in data its end state and the
// coefficients of its polynomial are.
type piece struct {
	end, h float64
	b      *tableau // nil: explicit
	at     int
}

func (r *record) reset(n, p int) {
	r.n, r.p = n, p
	r.pieces, r.data = r.pieces[:0], r.data[:0]
}

func (r *record) add(p *point, h float64, b *tableau, coefs [][]float64) {
	r.pieces = append(r.pieces, piece{p.t, h, b, len(r.data)})
	r.data = append(r.data, p.y...)
	for _, c := range coefs {
		r.data = append(r.data, c...)
	}
}

// locate finds the step that t is in.
func (s *Solution) locate(t float64) (piece, error) {
	all := s.kept.pieces
	if len(all) == 0 {
		return piece{}, errors.New("ode: the steps were not kept")
	}
	start := s.Times[0]
	if !(min(start, s.EndTime) <= t && t <= max(start, s.EndTime)) {
		return piece{}, fmt.Errorf("ode: t = %g was not reached", t)
	}
	forward := all[0].h > 0
	i := sort.Search(len(all), func(i int) bool {
		return all[i].end == t || all[i].end > t == forward
	})
	return all[min(i, len(all)-1)], nil
}

// read evaluates entries from … of the whole state.
func (r *record) read(dst []float64, q piece, t float64, from int) {
	all := r.n * (1 + r.p)
	x := 1 - (q.end-t)/q.h
	block := func(i int) []float64 { return r.data[q.at+i*all+from:][:len(dst)] }
	if q.b != nil {
		var z [maxStages][]float64
		for i := range q.b.s {
			z[i] = block(1 + i)
		}
		extrapolate(dst, q.b, &z, 0, x)
	} else {
		c := nest(x)
		clear(dst)
		for i, v := range c {
			plus(dst, v, block(1+i))
		}
	}
	plus(dst, 1, block(0))
}

// At is the state at any time reached, where Options.Keep was set. dst nil allocates.
func (s *Solution) At(dst []float64, t float64) ([]float64, error) {
	q, err := s.locate(t)
	if err != nil {
		return nil, err
	}
	dst = grown(dst, s.n)
	s.kept.read(dst, q, t, 0)
	return dst, nil
}

// SensitivityAt is ∂y/∂θ at any time reached. dst nil allocates.
func (s *Solution) SensitivityAt(dst *mat.Dense, t float64) (*mat.Dense, error) {
	if s.p == 0 {
		return nil, errors.New("ode: no sensitivities were asked for")
	}
	q, err := s.locate(t)
	if err != nil {
		return nil, err
	}
	if dst == nil || dst.RawMatrix().Rows != s.n || dst.RawMatrix().Cols != s.p {
		dst = mat.NewDense(s.n, s.p, nil)
	}
	s.kept.read(dst.RawMatrix().Data, q, t, s.n)
	return dst, nil
}
