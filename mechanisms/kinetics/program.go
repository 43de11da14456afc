package kinetics

import (
	"errors"
	"fmt"
	"math"
)

// Action is what is done at the beginning of a phase.
type Action uint8

const (
	// Wait changes nothing.
	Wait Action = iota
	// Add brings the ligand to the total concentration Amount.
	Add
	// Dilute divides everything by the factor Amount.
	Dilute
	// Block adds unlabelled ligand of the concentration Amount, alike in all but its
	// label: what is seen of binding is the labelled alone.
	Block
	// Wash takes all free ligand away.
	Wash
)

// Phase is a stretch of time and what is done at its beginning.
type Phase struct {
	Action  Action
	Amount  float64
	Seconds float64
}

// Program is what is done with a sample.
type Program struct {
	// Loaded is the ligand, in total, with which the sample has come to rest before
	// the first phase; 0 for none.
	Loaded float64
	Phases []Phase
	// Sites is the concentration of all sites; 0 where ligand is not used up, so that
	// the free ligand is what is added.
	Sites float64
	// Tolerance of integrations; 0 means 1e-9.
	Tolerance float64
}

// Check says all that is wrong with a program and the times at which it is seen.
func (p *Program) Check(times []float64) error {
	var all []error
	bad := func(format string, args ...any) { all = append(all, fmt.Errorf(format, args...)) }
	if len(p.Phases) == 0 {
		bad("there is no phase")
	}
	if !(p.Loaded >= 0) || math.IsInf(p.Loaded, 0) {
		bad("a ligand of %g before the first phase cannot be", p.Loaded)
	}
	if !(p.Sites >= 0) || math.IsInf(p.Sites, 0) {
		bad("a concentration of sites of %g cannot be", p.Sites)
	}
	end := 0.0
	for i, ph := range p.Phases {
		all = append(all, ph.check(i, end))
		end += ph.Seconds
	}
	last := 0.0
	for i, t := range times {
		switch {
		case !(t >= 0):
			bad("time %d is %g s: before the first phase began", i+1, t)
		case t > end*(1+1e-12):
			bad("time %d is %g s: the last phase ends at %g s", i+1, t, end)
		case t < last:
			bad("time %d is %g s, before the one that precedes it, %g s", i+1, t, last)
		}
		last = t
	}
	return errors.Join(all...)
}

func (ph *Phase) check(i int, begin float64) error {
	if !(ph.Seconds > 0) || math.IsInf(ph.Seconds, 0) {
		return fmt.Errorf("phase %d, from %g s, lasts %g s: the next one would begin before it ends", i+1, begin, ph.Seconds)
	}
	ok := ph.Amount > 0 && !math.IsInf(ph.Amount, 0)
	switch ph.Action {
	case Add:
		if !(ph.Amount >= 0) || math.IsInf(ph.Amount, 0) {
			return fmt.Errorf("phase %d: %g of ligand cannot be added", i+1, ph.Amount)
		}
	case Block:
		if !ok {
			return fmt.Errorf("phase %d: %g of unlabelled ligand cannot be added", i+1, ph.Amount)
		}
	case Dilute:
		if !(ph.Amount >= 1) || !ok {
			return fmt.Errorf("phase %d: a dilution by %g cannot be: the factor is 1 or more", i+1, ph.Amount)
		}
	}
	return nil
}

// blocks says whether unlabelled ligand is ever there.
func (p *Program) blocks() bool {
	for _, ph := range p.Phases {
		if ph.Action == Block {
			return true
		}
	}
	return false
}

// usual is the time between points that occurs most often; 0 where none recurs.
func usual(times []float64) float64 {
	best, most := 0.0, 1
	run, last := 0, 0.0
	for i := 1; i < len(times); i++ {
		d := times[i] - times[i-1]
		if math.Abs(d-last) <= rounding(times[i]) {
			run++
		} else {
			run, last = 1, d
		}
		if run > most {
			most, best = run, last
		}
	}
	return best
}

// rounding is how far a difference of times may lie from what it means.
func rounding(t float64) float64 { return 4 * 0x1p-52 * math.Abs(t) }
