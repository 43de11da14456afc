package fittest

import (
	_ "embed"
	"fmt"
	"math"
	"strconv"
	"strings"
	"sync"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

//go:embed testdata/nist.txt
var nistText string

// Set is one certified regression problem.
type Set struct {
	Name       string
	Level      string // NIST's own grading: lower, average, higher
	Origin     string
	Formula    string
	Starts     [2][]float64
	Certified  []float64 // parameters, 11 digits
	Deviations []float64 // their certified standard deviations
	RSS        float64   // certified sum of squares
	Polished   []float64 // not certified: parameters from 60-digit arithmetic
	// PolishedDeviations and PolishedRSS go with Polished.
	PolishedDeviations []float64
	PolishedRSS        float64

	x [][]float64 // observations × predictors
	y []float64
	f model
}

// Sets returns the 27 problems of NIST's nonlinear regression collection, in
// its order.
func Sets() []*Set { return sets() }

var sets = sync.OnceValue(func() []*Set {
	all, err := readSets(nistText)
	if err != nil {
		panic("fittest: " + err.Error())
	}
	return all
})

// Len is the number of observations.
func (s *Set) Len() int { return len(s.y) }

// Eval is the block of the set: residuals f(x; b) − y and their derivatives.
func (s *Set) Eval(res []float64, jac *mat.Dense, b []float64) error {
	var g []float64
	for i, x := range s.x {
		if jac != nil {
			g = jac.RawRowView(i)
		}
		res[i] = s.f(x, b, g) - s.y[i]
	}
	return nil
}

// Clone returns s: it holds nothing that changes.
func (s *Set) Clone() fit.Block { return s }

// Problem is the set as a fitting problem without bounds.
func (s *Set) Problem(start []float64) *fit.Problem {
	p := &fit.Problem{Blocks: []fit.Block{s}, Starts: [][]float64{start}}
	for j := range s.Certified {
		p.Parameters = append(p.Parameters, fit.Parameter{
			Name: fmt.Sprintf("b%d", j+1), Low: math.Inf(-1), High: math.Inf(1),
			StartLow: math.NaN(), StartHigh: math.NaN(),
		})
	}
	return p
}

func readSets(text string) ([]*Set, error) {
	var all []*Set
	var s *Set
	for number, line := range strings.Split(text, "\n") {
		word, rest, _ := strings.Cut(line, " ")
		if line == "" || word == "#" {
			continue
		}
		if word == "set" {
			name, level, _ := strings.Cut(rest, " ")
			s = &Set{Name: name, Level: level, f: models[name]}
			if s.f == nil {
				return nil, fmt.Errorf("line %d: no model of the name %s", number+1, name)
			}
			all = append(all, s)
			continue
		}
		if err := s.read(word, rest); err != nil {
			return nil, fmt.Errorf("line %d: %w", number+1, err)
		}
	}
	return all, nil
}

// read takes in one line of a set.
func (s *Set) read(word, rest string) error {
	switch word {
	case "origin":
		s.Origin = rest
		return nil
	case "formula":
		s.Formula = rest
		return nil
	}
	v, err := numbers(rest)
	if err != nil {
		return err
	}
	switch word {
	case "start1":
		s.Starts[0] = v
	case "start2":
		s.Starts[1] = v
	case "certified":
		s.Certified = v
	case "deviations":
		s.Deviations = v
	case "rss":
		s.RSS = v[0]
	case "polished":
		s.Polished = v
	case "polished-deviations":
		s.PolishedDeviations = v
	case "polished-rss":
		s.PolishedRSS = v[0]
	case "data":
	default:
		if v, err = numbers(word + " " + rest); err != nil {
			return err
		}
		k := len(v) - 1
		if s.Name == "Nelson" {
			v[k] = math.Log(v[k])
		}
		s.x, s.y = append(s.x, v[:k]), append(s.y, v[k])
	}
	return nil
}

func numbers(text string) ([]float64, error) {
	var v []float64
	for _, w := range strings.Fields(text) {
		f, err := strconv.ParseFloat(w, 64)
		if err != nil {
			return nil, err
		}
		v = append(v, f)
	}
	return v, nil
}
