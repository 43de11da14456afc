package report

import (
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"

	"ligancy/ode/odetest"
)

// StiffRow is one integration of a problem with a known solution.
type StiffRow struct {
	Problem     string    `json:"problem"`
	Method      string    `json:"method"`
	Rtol        float64   `json:"rtol"`
	Atol        float64   `json:"atol"`
	Digits      *float64  `json:"digits"` // the fewest over all reference times
	Steps       int       `json:"steps"`
	Evaluations int       `json:"evaluations"`
	Millis      float64   `json:"ms"` // of processor time
	Final       []float64 `json:"final"`
	Why         *string   `json:"why"` // why the end was not reached
}

// StiffRows turns integrations into rows.
func StiffRows(all []odetest.Row) []StiffRow {
	rows := make([]StiffRow, len(all))
	for i := range all {
		r := &all[i]
		rows[i] = StiffRow{Problem: r.Problem, Method: r.Solver, Rtol: r.Rtol, Atol: r.Atol,
			Steps: r.Stats.Steps, Evaluations: r.Stats.Evaluations + r.Stats.Differences, Millis: r.Milliseconds, Final: list(r.Final)}
		if r.Err != nil {
			why := r.Err.Error()
			rows[i].Why = &why
		} else if finite(r.MescdMin) {
			rows[i].Digits = &r.MescdMin
		}
	}
	return rows
}

// judged are the problems, and the tolerance, at which nine digits are asked for.
var judged = []string{"rober", "hires", "orego", "pollu", "vdpol", "tetramer"}

const (
	judgedRtol   = 1e-10
	judgedDigits = 9
)

// StiffHeld says whether every judged problem reaches its digits.
func StiffHeld(rows []odetest.Row) bool {
	reached := 0
	for i := range rows {
		if isJudged(&rows[i]) && reaches(&rows[i]) {
			reached++
		}
	}
	return reached == len(judged)
}

func isJudged(r *odetest.Row) bool {
	return r.Rtol == judgedRtol && r.Solver == "radau" && slices.Contains(judged, r.Problem)
}

func reaches(r *odetest.Row) bool { return r.Err == nil && r.MescdMin >= judgedDigits }

// WriteStiff prints digits, steps and processor time of every integration.
func WriteStiff(w io.Writer, rows []odetest.Row, colour bool) error {
	i := ink{colour}
	g := &grid{gap: 2, right: []bool{false, false, true, true, true, true, true, false}}
	g.add("", "method", "rtol", "digits", "steps", "evaluations", "ms", "")
	held := 0
	for k := range rows {
		r := &rows[k]
		digits, word := strconv.FormatFloat(r.MescdMin, 'f', 1, 64), ""
		if r.Err != nil {
			digits, word = "–", cut(r.Err.Error(), 40)
		}
		if isJudged(r) {
			if reaches(r) {
				held++
			} else {
				word = "NOT HELD"
			}
		}
		g.add(r.Problem, r.Solver, shortExponent(strconv.FormatFloat(r.Rtol, 'e', 0, 64)), digits, strconv.Itoa(r.Stats.Steps),
			strconv.Itoa(r.Stats.Evaluations+r.Stats.Differences), significant(r.Milliseconds, 3), word)
	}
	var b strings.Builder
	b.WriteString(i.bold("INITIAL-VALUE PROBLEMS WITH KNOWN SOLUTIONS") + "\n")
	for _, l := range g.lines(Width - 2) {
		b.WriteString("  " + l + "\n")
	}
	fmt.Fprintf(&b, "\n%d of %d stiff problems reach %d digits at all times with rtol 1e-10. %s.\n",
		held, len(judged), judgedDigits, machineWords())
	_, err := io.WriteString(w, b.String())
	return err
}
