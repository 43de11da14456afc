package ode

import (
	"fmt"
	"math"
	"sort"

	"gonum.org/v1/gonum/mat"
)

// Event is a zero of G(t, y(t)) to be found along the way.
//
// Each step is looked at in four parts, so that two zeros closer than a quarter
// of a step can be passed over. A zero of G at the start is no hit.
type Event struct {
	Name string
	G    func(t float64, y []float64) float64
	// Direction is 0 for any crossing, +1 where G rises, −1 where it falls.
	Direction int
	// Terminal ends the integration at the hit.
	Terminal bool
}

// Hit is an event met.
type Hit struct {
	Event       int // index in Options.Events
	Time        float64
	State       []float64
	Sensitivity *mat.Dense // ∂y/∂θ at fixed time; nil where not asked for
	Rising      bool
}

// watcher follows the events through a step.
type watcher struct {
	events []Event
	g      []float64 // at the last place looked at; 0 where no sign is known
	y      []float64
	found  []crossing
}

// crossing is a hit by its place x within the step.
type crossing struct {
	event  int
	x      float64
	rising bool
}

func (w *watcher) begin(events []Event, t float64, y []float64) error {
	w.events = events
	w.g, w.y = grown(w.g, len(events)), grown(w.y, len(y))
	for i := range events {
		v, err := w.value(i, t, y)
		if err != nil {
			return err
		}
		w.g[i] = v
	}
	return nil
}

func (w *watcher) value(i int, t float64, y []float64) (float64, error) {
	v := w.events[i].G(t, y)
	if math.IsNaN(v) {
		name := w.events[i].Name
		if name == "" {
			name = fmt.Sprint(i + 1)
		}
		return 0, fmt.Errorf("the function of event %s is no number", name)
	}
	return v, nil
}

// looks is the number of places at which a step is looked at.
const looks = 4

// step finds the crossings of the step from t0 of size h, in order of time; at
// evaluates the state at its place x.
func (w *watcher) step(t0, h float64, at func(dst []float64, x float64)) ([]crossing, error) {
	w.found = w.found[:0]
	for q := 1; q <= looks; q++ {
		x := float64(q) / looks
		at(w.y, x)
		for i := range w.events {
			v, err := w.value(i, t0+x*h, w.y)
			if err != nil {
				return nil, err
			}
			before := w.g[i]
			w.g[i] = v
			if before == 0 || v != 0 && (v > 0) == (before > 0) {
				continue
			}
			rising := before < 0
			if d := w.events[i].Direction; d != 0 && (d > 0) != rising {
				continue
			}
			root, err := w.root(bracket{i, t0, h, x - 1.0/looks, x, before, v}, at)
			if err != nil {
				return nil, err
			}
			w.found = append(w.found, crossing{i, root, rising})
			at(w.y, x)
		}
	}
	sort.SliceStable(w.found, func(a, b int) bool { return w.found[a].x < w.found[b].x })
	return w.found, nil
}

// bracket holds a sign change of an event within a step: g is ga at place a and gb
// at place b.
type bracket struct {
	event        int
	t0, h        float64
	a, b, ga, gb float64
}

// root narrows a sign change down to the last places of t: regula falsi with the
// Illinois weights, and halving every third time.
func (w *watcher) root(k bracket, at func(dst []float64, x float64)) (float64, error) {
	tol := 2 * ulp * max(1, math.Abs(k.t0/k.h))
	side := 0
	for n := 0; k.gb != 0 && k.b-k.a > tol; n++ {
		x := k.b - k.gb*(k.b-k.a)/(k.gb-k.ga)
		if n%3 == 2 || !(x > k.a && x < k.b) {
			x = k.a + (k.b-k.a)/2
		}
		if x == k.a || x == k.b {
			break
		}
		at(w.y, x)
		v, err := w.value(k.event, k.t0+x*k.h, w.y)
		if err != nil {
			return 0, err
		}
		switch {
		case v == 0:
			return x, nil
		case (v > 0) == (k.gb > 0):
			k.b, k.gb = x, v
			if side == 1 {
				k.ga /= 2
			}
			side = 1
		default:
			k.a, k.ga = x, v
			if side == -1 {
				k.gb /= 2
			}
			side = -1
		}
	}
	return k.b, nil
}
