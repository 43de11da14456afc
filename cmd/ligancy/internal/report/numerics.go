package report

import (
	"fmt"
	"io"
	"runtime"
	"strconv"
	"strings"

	"ligancy/cmd/ligancy/internal/numerics"
	"ligancy/fit/fittest"
)

// NumericsFormat names the layout of documents about the numerics.
const NumericsFormat = "ligancy-numerics/1"

// Numerics is what a test of the numerics found on this machine.
type Numerics struct {
	Format  string  `json:"format"`
	Program Program `json:"program"`
	Machine Machine `json:"machine"`
	Test    string  `json:"test"` // "identities", "regression"
	Held    bool    `json:"held"`
	Rows    any     `json:"rows"`
}

// Machine is what digits depend on.
type Machine struct {
	System    string `json:"system"`
	Processor string `json:"processor"`
	Compiler  string `json:"compiler"`
}

// ThisMachine describes the machine that the program runs on.
func ThisMachine() Machine {
	return Machine{System: runtime.GOOS, Processor: runtime.GOARCH, Compiler: runtime.Version()}
}

// NewNumerics assembles a document.
func NewNumerics(version, test string, held bool, rows any) *Numerics {
	return &Numerics{Format: NumericsFormat, Program: Program{Version: version}, Machine: ThisMachine(), Test: test, Held: held, Rows: rows}
}

// CertifiedRow is one run on a certified regression problem.
type CertifiedRow struct {
	Dataset    string    `json:"dataset"`
	Level      string    `json:"level"`
	Start      int       `json:"start"`
	Status     string    `json:"status"`
	Digits     float64   `json:"digits"`
	RSSDigits  float64   `json:"rss_digits"`
	RSS        float64   `json:"rss"`
	Parameters []float64 `json:"parameters"`
	Evals      int       `json:"evaluations"`
	Millis     float64   `json:"ms"`
	Held       bool      `json:"held"`
}

// CertifiedRows turns certification runs into rows.
func CertifiedRows(runs []fittest.Row) []CertifiedRow {
	rows := make([]CertifiedRow, len(runs))
	for i := range runs {
		r := &runs[i]
		rows[i] = CertifiedRow{Dataset: r.Dataset, Level: r.Level, Start: r.Start, Status: r.Status, Digits: r.Digits,
			RSSDigits: r.RSSDigits, RSS: r.RSS, Parameters: list(r.Parameters), Evals: r.Evals, Millis: r.Millis, Held: r.Right()}
	}
	return rows
}

// WriteIdentities prints exact statements beside what the program reaches.
func WriteIdentities(w io.Writer, rows []numerics.Row, colour bool) error {
	i := ink{colour}
	g := &grid{gap: 2, right: []bool{false, false, true, true, false}}
	g.add("", "at", "exact", "off by", "")
	held, worst := 0, 0.0
	for _, r := range rows {
		word := "NOT HELD"
		if r.Held {
			word = ""
			held++
		}
		worst = max(worst, r.Relative)
		g.add(r.Check, r.At, strconv.FormatFloat(r.Exact, 'g', 9, 64), offBy(r.Relative), word)
	}
	var b strings.Builder
	b.WriteString(i.bold("EXACT STATEMENTS ABOUT BINDING CURVES") + "\n")
	for _, l := range g.lines(Width - 2) {
		b.WriteString("  " + l + "\n")
	}
	fmt.Fprintf(&b, "\n%d of %d held to %s relative; the worst is off by %s. %s.\n",
		held, len(rows), shortExponent(strconv.FormatFloat(numerics.Tolerance, 'e', 0, 64)), offBy(worst), machineWords())
	_, err := io.WriteString(w, b.String())
	return err
}

// WriteCertified prints how many digits of certified regression problems are reached.
func WriteCertified(w io.Writer, runs []fittest.Row, colour bool) error {
	i := ink{colour}
	g := &grid{gap: 2, right: []bool{false, false, true, true, true, true, true, false}}
	g.add("", "graded", "start", "digits", "of the sum of squares", "evaluations", "ms", "")
	for k := range runs {
		r := &runs[k]
		word := ""
		if !r.Right() {
			word = cut(r.Status, 30)
			if r.Status == "ok" {
				word = "WRONG"
			}
		}
		g.add(r.Dataset, r.Level, strconv.Itoa(r.Start), strconv.FormatFloat(r.Digits, 'f', 1, 64),
			strconv.FormatFloat(r.RSSDigits, 'f', 1, 64), strconv.Itoa(r.Evals), strconv.FormatFloat(r.Millis, 'f', 1, 64), word)
	}
	s := fittest.Summarise(runs)
	var b strings.Builder
	b.WriteString(i.bold("CERTIFIED NONLINEAR REGRESSION (NIST StRD)") + "\n")
	for _, l := range g.lines(Width - 2) {
		b.WriteString("  " + l + "\n")
	}
	fmt.Fprintf(&b, "\n%d of %d runs right to 4 digits or more; least %.1f, mean %.1f digits of 11. %s.\n",
		s.Right, s.Runs, s.Least, s.Mean, machineWords())
	_, err := io.WriteString(w, b.String())
	return err
}

// offBy writes a relative deviation; rounding alone can make it zero.
func offBy(x float64) string {
	if x == 0 {
		return "0"
	}
	return shortExponent(strconv.FormatFloat(x, 'e', 1, 64))
}

func machineWords() string {
	m := ThisMachine()
	return m.System + ", " + m.Processor + ", " + m.Compiler
}
