// Package fittest holds problems with certified answers, and what a
// least-squares solver has to reach on them.
package fittest

import (
	"context"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"slices"
	"strconv"
	"strings"
	"time"

	"ligancy/fit"
)

// Solver is what is put to the test.
type Solver func(ctx context.Context, p *fit.Problem) (*fit.Result, error)

// Default is fit.Solve with its default settings.
func Default(ctx context.Context, p *fit.Problem) (*fit.Result, error) {
	return fit.Solve(ctx, p, fit.Settings{})
}

// Row is one run of a solver on a certified problem.
type Row struct {
	Method     string
	Dataset    string
	Level      string
	Start      int    // 1 or 2
	Status     string // "ok" or "fail: " and why
	Evals      int    // evaluations of residuals with derivatives
	Millis     float64
	RSS        float64
	Parameters []float64
	Deviations []float64
	Offset     float64 // relative offset at the end

	// Digits that are right: the log relative error −log10(|q−c|/|c|) against
	// the certified value, of the worst parameter, at most 11.
	Digits          float64
	DeviationDigits float64
	RSSDigits       float64
	// PolishedDigits are those against the values from 60-digit arithmetic, at
	// most 15.
	PolishedDigits float64
}

// Right says whether the run claims success and has at least four digits.
func (r *Row) Right() bool { return r.Status == "ok" && r.Digits >= 4 }

// Certify runs a solver on every set from both starts.
func Certify(ctx context.Context, method string, solve Solver) []Row {
	var rows []Row
	for _, set := range Sets() {
		for k, start := range set.Starts {
			row := set.Run(ctx, solve, start)
			row.Method, row.Start = method, k+1
			rows = append(rows, row)
		}
	}
	return rows
}

// Run runs a solver on the set from one start.
func (s *Set) Run(ctx context.Context, solve Solver, start []float64) Row {
	row := Row{Dataset: s.Name, Level: s.Level, Status: "ok", RSS: math.Inf(1)}
	began := time.Now()
	res, err := solve(ctx, s.Problem(start))
	row.Millis = float64(time.Since(began).Nanoseconds()) / 1e6
	if err != nil {
		row.Status = "fail: " + err.Error()
		return row
	}
	if res.Status != fit.Converged {
		row.Status = fmt.Sprintf("fail: %v", res.Status)
	}
	row.Evals, row.RSS, row.Offset = res.Evals, res.Objective, res.Offset
	row.Parameters = res.Theta
	if res.Cov != nil {
		for j := range res.Theta {
			row.Deviations = append(row.Deviations, math.Sqrt(res.Cov.At(j, j)))
		}
	}
	row.Digits = worst(res.Theta, s.Certified, 11)
	row.DeviationDigits = worst(row.Deviations, s.Deviations, 11)
	row.RSSDigits = Digits(res.Objective, s.RSS, 11)
	row.PolishedDigits = worst(res.Theta, s.Polished, 15)
	return row
}

// Digits is −log10(|q−c|/|c|), between 0 and most.
func Digits(q, c, most float64) float64 {
	if q == c {
		return most
	}
	d := -math.Log10(math.Abs(q-c) / math.Abs(c))
	if math.IsNaN(d) {
		return 0
	}
	return min(max(d, 0), most)
}

func worst(q, c []float64, most float64) float64 {
	if len(q) != len(c) {
		return 0
	}
	d := most
	for i := range q {
		d = min(d, Digits(q[i], c[i], most))
	}
	return d
}

// Conform runs a solver on every set from both starts and returns what is wrong
// with it: runs that fail, or claim success elsewhere, and parameters or their
// standard deviations with fewer than eight digits. Lanczos1 leaves residuals of
// 1e-13, which are rounding: its deviations are not asked for.
func Conform(ctx context.Context, solve Solver) error {
	var errs []error
	for _, r := range Certify(ctx, "", solve) {
		switch {
		case !r.Right():
			errs = append(errs, fmt.Errorf("%s from start %d: %s, %.1f digits",
				r.Dataset, r.Start, r.Status, r.Digits))
		case r.Digits < 8 || r.DeviationDigits < 8 && r.Dataset != "Lanczos1":
			errs = append(errs, fmt.Errorf("%s from start %d: %.1f digits, deviations %.1f",
				r.Dataset, r.Start, r.Digits, r.DeviationDigits))
		}
	}
	return errors.Join(errs...)
}

// Columns are the headings of Record.
var Columns = []string{"method", "dataset", "start", "status", "nfev", "cpu_ms", "rss", "params", "sds",
	"level", "digits", "deviation_digits", "rss_digits", "polished_digits", "relative_offset"}

// Record is the row as text, one cell per entry of Columns.
func (r *Row) Record() []string {
	g := func(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
	d := func(v float64) string { return strconv.FormatFloat(v, 'f', 2, 64) }
	list := func(v []float64) string {
		w := make([]string, len(v))
		for i := range v {
			w[i] = g(v[i])
		}
		return strings.Join(w, " ")
	}
	return []string{r.Method, r.Dataset, strconv.Itoa(r.Start), r.Status, strconv.Itoa(r.Evals),
		strconv.FormatFloat(r.Millis, 'f', 3, 64), g(r.RSS), list(r.Parameters), list(r.Deviations),
		r.Level, d(r.Digits), d(r.DeviationDigits), d(r.RSSDigits), d(r.PolishedDigits), g(r.Offset)}
}

// Summary is what a certification comes to.
type Summary struct {
	Runs, Right         int
	Least, Mean, Median float64 // digits over all runs; what failed counts as attained
	LeastRight          float64 // least digits of the right runs
}

// Summarise counts the rows.
func Summarise(rows []Row) Summary {
	s := Summary{Runs: len(rows), Least: math.Inf(1), LeastRight: math.Inf(1)}
	var all []float64
	for i := range rows {
		d := rows[i].Digits
		all = append(all, d)
		s.Mean += d / float64(len(rows))
		s.Least = min(s.Least, d)
		if rows[i].Right() {
			s.Right++
			s.LeastRight = min(s.LeastRight, d)
		}
	}
	s.Median = median(all)
	return s
}

func median(v []float64) float64 {
	v = slices.Sorted(slices.Values(v))
	n := len(v)
	if n == 0 {
		return 0
	}
	return (v[(n-1)/2] + v[n/2]) / 2
}

// Moved runs a solver from every certified start moved by up to ±5 %, draws
// times each, and returns how many of the runs are right, and those that are not.
func Moved(ctx context.Context, solve Solver, draws int) (right int, wrong []Row) {
	rng := rand.New(rand.NewPCG(1, 0))
	for _, set := range Sets() {
		for k, start := range set.Starts {
			for range draws {
				moved := slices.Clone(start)
				for j := range moved {
					moved[j] *= 1 + 0.05*(2*rng.Float64()-1)
				}
				row := set.Run(ctx, solve, moved)
				row.Start = k + 1
				if row.Right() {
					right++
				} else {
					wrong = append(wrong, row)
				}
			}
		}
	}
	return right, wrong
}

// WriteCSV writes the rows as a table with the headings Columns.
func WriteCSV(w io.Writer, rows []Row) error {
	c := csv.NewWriter(w)
	if err := c.Write(Columns); err != nil {
		return err
	}
	for i := range rows {
		if err := c.Write(rows[i].Record()); err != nil {
			return err
		}
	}
	c.Flush()
	return c.Error()
}
