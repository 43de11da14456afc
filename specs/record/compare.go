package record

import (
	"math"
	"strconv"

	"ligancy/fit/saturation"
)

// Tolerances of a repeat. They are wide beside what other processors and orders
// of summation do, and narrow beside anything that a reader would conclude.
const (
	// MovedTolerance is of a value and of its ends, in half widths of the interval.
	MovedTolerance = 0.02
	relative       = 1e-4 // of a number without an interval, and of a sum of squares
	tiny           = 1e-6 // relative, of any number
	aiccTolerance  = 0.01
)

// Comparison is what differs between two records.
type Comparison struct {
	Files      []FileChange      `json:"files"`      // every file of either, changed or not
	Settings   []Change          `json:"settings"`   // that differ, the program's version among them
	Mechanisms []MechanismChange `json:"mechanisms"` // every mechanism of either
	Numbers    []Move            `json:"numbers"`    // every number of either
}

// Change is one thing that was and is; "" where it was not or is not.
type Change struct {
	What string `json:"what"`
	Old  string `json:"old"`
	New  string `json:"new"`
}

// FileChange is a file of the study, then and now.
type FileChange struct {
	File    string `json:"file"`
	Changed bool   `json:"changed"`
	Old     string `json:"old_sha256"` // "" where the record does not name the file
	New     string `json:"new_sha256"`
}

// MechanismChange is how one mechanism stood and stands. Old or New is nil where
// it was not or is not tried.
type MechanismChange struct {
	Name     string     `json:"mechanism"`
	Old, New *Mechanism `json:"-"`
	Differs  []Change   `json:"differs"` // beyond tolerance
}

// Move is one number, then and now; Old or New is nil where it does not exist.
type Move struct {
	Mechanism string  `json:"mechanism"`
	Old       *Number `json:"old"`
	New       *Number `json:"new"`
	// Moved is how far the value moved, and EndsMoved the end that moved most, in
	// half widths of the older interval; NaN where there is nothing to measure by.
	Moved     saturation.Real `json:"moved"`
	EndsMoved saturation.Real `json:"ends_moved"`
	// Within: neither moved beyond tolerance. Free: the data hold neither end, so
	// the number is not compared.
	Within bool `json:"within"`
	Free   bool `json:"free"`
}

// Number is the newer number, or the older where there is no newer.
func (m *Move) Number() *Number {
	if m.New != nil {
		return m.New
	}
	return m.Old
}

// Apart says whether both have an interval with two ends, and the two do not meet.
func (m *Move) Apart() bool {
	a, b := m.Old, m.New
	if a == nil || b == nil || a.Low == nil || a.High == nil || b.Low == nil || b.High == nil {
		return false
	}
	return *a.High < *b.Low || *b.High < *a.Low
}

// Compare finds what differs between two records.
func Compare(old, now *Record) *Comparison {
	c := &Comparison{Files: []FileChange{}, Settings: []Change{}, Mechanisms: []MechanismChange{},
		Numbers: []Move{}}
	c.files(old, now)
	c.settings(old, now)
	older, newer := byName(old), byName(now)
	for i := range old.Mechanisms {
		c.mechanism(&old.Mechanisms[i], newer[old.Mechanisms[i].Name])
	}
	for i := range now.Mechanisms {
		if m := &now.Mechanisms[i]; older[m.Name] == nil {
			c.mechanism(nil, m)
		}
	}
	return c
}

// Holds says whether nothing moved beyond tolerance. A file that changed without
// moving any number does not count.
func (c *Comparison) Holds() bool {
	for i := range c.Mechanisms {
		if len(c.Mechanisms[i].Differs) > 0 {
			return false
		}
	}
	for i := range c.Numbers {
		if !c.Numbers[i].Within {
			return false
		}
	}
	return true
}

func byName(r *Record) map[string]*Mechanism {
	all := map[string]*Mechanism{}
	for i := range r.Mechanisms {
		all[r.Mechanisms[i].Name] = &r.Mechanisms[i]
	}
	return all
}

// files compares the digests of the study and of its tables.
func (c *Comparison) files(old, now *Record) {
	c.Files = append(c.Files, FileChange{File: now.Study.File, Old: old.Study.SHA256,
		New: now.Study.SHA256, Changed: old.Study.SHA256 != now.Study.SHA256})
	seen := map[string]bool{}
	add := func(file string) {
		if seen[file] {
			return
		}
		seen[file] = true
		f := FileChange{File: file, Old: digest(old, file), New: digest(now, file)}
		f.Changed = f.Old != f.New
		c.Files = append(c.Files, f)
	}
	for _, d := range now.Data {
		add(d.File)
	}
	for _, d := range old.Data {
		add(d.File)
	}
}

func digest(r *Record, file string) string {
	for _, d := range r.Data {
		if d.File == file {
			return d.SHA256
		}
	}
	return ""
}

// settings compares what the numbers were found under.
func (c *Comparison) settings(old, now *Record) {
	differ := func(what, was, is string) {
		if was != is {
			c.Settings = append(c.Settings, Change{what, was, is})
		}
	}
	differ("program version", old.Version, now.Version)
	a, b := old.Settings, now.Settings
	differ("seed", strconv.FormatUint(a.Seed, 10), strconv.FormatUint(b.Seed, 10))
	differ("starts", strconv.Itoa(a.Starts), strconv.Itoa(b.Starts))
	differ("interval level", number(&a.Level), number(&b.Level))
	differ("interval method", a.Method, b.Method)
	differ("draws of decide", strconv.Itoa(a.Draws), strconv.Itoa(b.Draws))
	differ("draws of bootstrap", strconv.Itoa(a.BootstrapDraws), strconv.Itoa(b.BootstrapDraws))
	differ("bootstrap by", a.BootstrapBy, b.BootstrapBy)
}

// mechanism compares one mechanism; either may be nil, not both.
func (c *Comparison) mechanism(old, now *Mechanism) {
	m := MechanismChange{Old: old, New: now, Differs: []Change{}}
	none := Mechanism{}
	a, b := old, now
	switch {
	case old == nil:
		m.Name, a = now.Name, &none
		m.Differs = append(m.Differs, Change{"mechanism", "", "tried"})
	case now == nil:
		m.Name, b = old.Name, &none
		m.Differs = append(m.Differs, Change{"mechanism", "tried", ""})
	default:
		m.Name = now.Name
		m.Differs = append(m.Differs, standings(a, b)...)
	}
	c.Mechanisms = append(c.Mechanisms, m)
	c.numbers(m.Name, a.Numbers, b.Numbers)
}

// standings lists what differs in how a mechanism stands.
func standings(a, b *Mechanism) []Change {
	var all []Change
	word := func(what, was, is string) {
		if was != is {
			all = append(all, Change{what, was, is})
		}
	}
	word("family", a.Family, b.Family)
	word("sites", strconv.Itoa(a.Sites), strconv.Itoa(b.Sites))
	word("points", strconv.Itoa(a.Points), strconv.Itoa(b.Points))
	word("fitted numbers", strconv.Itoa(a.Constants), strconv.Itoa(b.Constants))
	word("status", a.Status, b.Status)
	word("standing", a.Standing, b.Standing)
	if s, t := valueOf(a.SumOfSquares), valueOf(b.SumOfSquares); !near(s, t, relative*math.Abs(s)) {
		word("sum of squares", number(a.SumOfSquares), number(b.SumOfSquares))
	}
	// N·ln(SS) moves by N times the relative change of SS.
	within := aiccTolerance + relative*float64(a.Points)
	if s, t := valueOf(a.AICc), valueOf(b.AICc); !near(s, t, within) {
		word("AICc", number(a.AICc), number(b.AICc))
	}
	return all
}

// near says whether two numbers differ by at most tolerance, or both do not exist.
func near(a, b, tolerance float64) bool {
	if !finite(a) || !finite(b) {
		return finite(a) == finite(b)
	}
	return math.Abs(a-b) <= tolerance
}

// numbers compares the numbers of one mechanism, in the order of the newer.
func (c *Comparison) numbers(mechanism string, old, now []Number) {
	older := map[string]*Number{}
	for i := range old {
		older[old[i].key()] = &old[i]
	}
	for i := range now {
		n := &now[i]
		c.Numbers = append(c.Numbers, move(mechanism, older[n.key()], n))
		delete(older, n.key())
	}
	for i := range old {
		if n := &old[i]; older[n.key()] != nil {
			c.Numbers = append(c.Numbers, move(mechanism, n, nil))
		}
	}
}

// move measures how far a number moved.
func move(mechanism string, old, now *Number) Move {
	nothing := saturation.Real(math.NaN())
	m := Move{Mechanism: mechanism, Old: old, New: now, Moved: nothing, EndsMoved: nothing}
	if old == nil || now == nil {
		return m
	}
	if m.Free = old.Held == "neither" && now.Held == "neither"; m.Free {
		m.Within = true
		return m
	}
	s := scaleOf(old)
	m.Moved = saturation.Real(s.between(old.Value, now.Value))
	low, high := math.Abs(s.between(old.Low, now.Low)), math.Abs(s.between(old.High, now.High))
	m.EndsMoved = saturation.Real(larger(low, high))
	m.Within = old.Held == now.Held && s.same(old.Value, now.Value) && s.same(old.Low, now.Low) &&
		s.same(old.High, now.High)
	return m
}

// larger of two numbers, of which either may not exist.
func larger(a, b float64) float64 {
	if math.IsNaN(a) || b > a {
		return b
	}
	return a
}

// scale is what a move is measured by: half the interval, as a difference, or as
// the logarithm of a ratio where the ends lie more than a factor 1.5 apart.
type scale struct {
	half float64 // NaN without an interval
	log  bool
}

func scaleOf(n *Number) scale {
	v, low, high := valueOf(n.Value), valueOf(n.Low), valueOf(n.High)
	if low > 0 && v > 0 && high > 1.5*low {
		return scale{half: math.Log(high/low) / 2, log: true}
	}
	if half := halfWidth(v, low, high); half > 0 {
		return scale{half: half}
	}
	return scale{half: math.NaN()}
}

// between is the way from one number to another in half widths.
func (s scale) between(old, now *float64) float64 {
	a, b := valueOf(old), valueOf(now)
	if s.log {
		return math.Log(b/a) / s.half
	}
	return (b - a) / s.half
}

// same says whether two numbers agree within tolerance, or both do not exist.
func (s scale) same(old, now *float64) bool {
	a, b := valueOf(old), valueOf(now)
	if !finite(a) || !finite(b) {
		return finite(a) == finite(b)
	}
	if math.Abs(b-a) <= tiny*math.Abs(a) {
		return true
	}
	if math.IsNaN(s.half) {
		return math.Abs(b-a) <= relative*math.Abs(a)
	}
	return math.Abs(s.between(old, now)) <= MovedTolerance
}

// Moved is what of a comparison differs: every file and setting, and the
// mechanisms and numbers beyond tolerance.
type Moved struct {
	Files      []FileChange      `json:"files"`
	Settings   []Change          `json:"settings"`
	Mechanisms []MechanismChange `json:"mechanisms"`
	Numbers    []Move            `json:"moved"`
}

// Moved leaves out what stayed.
func (c *Comparison) Moved() *Moved {
	m := &Moved{Files: c.Files, Settings: c.Settings, Mechanisms: []MechanismChange{}, Numbers: []Move{}}
	for i := range c.Mechanisms {
		if len(c.Mechanisms[i].Differs) > 0 {
			m.Mechanisms = append(m.Mechanisms, c.Mechanisms[i])
		}
	}
	for i := range c.Numbers {
		if !c.Numbers[i].Within {
			m.Numbers = append(m.Numbers, c.Numbers[i])
		}
	}
	return m
}
