package record

import (
	"bytes"
	"encoding/json"
	"fmt"
	"regexp"
	"slices"
	"strconv"
	"strings"
)

// Bytes writes a record as YAML: one number a line, so that a diff shows what moved.
func (r *Record) Bytes() []byte {
	var b bytes.Buffer
	line := func(format string, args ...any) { fmt.Fprintf(&b, format+"\n", args...) }
	line("# What a fit found, kept beside the study. Compare with   ligancy repeat %s", oneLine(r.Study.File))
	line("format: %s", r.Format)
	line("version: %s", text(r.Version))
	line("title: %s", text(r.Title))
	line("origin: %s", text(r.Origin))
	line("study: {file: %s, sha256: %s}", text(r.Study.File), text(r.Study.SHA256))
	if len(r.Data) == 0 {
		line("data: []")
	} else {
		line("data:")
	}
	for _, d := range r.Data {
		line("  - {name: %s, file: %s, points: %d, left_out: %d,", text(d.Name), text(d.File), d.Points, d.LeftOut)
		line("     sha256: %s}", text(d.SHA256))
	}
	s := r.Settings
	settings := fmt.Sprintf("seed: %d, starts: %d, level: %s, method: %s, draws: %d",
		s.Seed, s.Starts, number(&s.Level), text(s.Method), s.Draws)
	if s.BootstrapDraws > 0 {
		settings += fmt.Sprintf(", bootstrap_draws: %d, bootstrap_by: %s", s.BootstrapDraws, text(s.BootstrapBy))
	}
	line("settings: {%s}", settings)
	line("slope: %s", text(r.Slope))
	line("mechanisms:")
	for i := range r.Mechanisms {
		r.Mechanisms[i].write(line)
	}
	return b.Bytes()
}

func (m *Mechanism) write(line func(string, ...any)) {
	line("")
	line("  - name: %s", text(m.Name))
	line("    family: %s", text(m.Family))
	line("    sites: %d", m.Sites)
	line("    status: %s", text(m.Status))
	line("    standing: %s", text(m.Standing))
	line("    constants: %d", m.Constants)
	line("    points: %d", m.Points)
	line("    sum_of_squares: %s", number(m.SumOfSquares))
	line("    aicc: %s", number(m.AICc))
	if len(m.Numbers) == 0 {
		line("    numbers: []")
		return
	}
	line("    numbers:")
	for i := range m.Numbers {
		line("      - {%s}", m.Numbers[i].entries())
	}
}

func (n *Number) entries() string {
	all := []string{"of: " + text(n.Of), "name: " + text(n.Name), "curve: " + text(n.Curve)}
	add := func(key, value string) { all = append(all, key+": "+value) }
	if n.Ligand != "" {
		add("ligand", text(n.Ligand))
	}
	if n.Site != "" {
		add("site", text(n.Site))
	}
	add("value", number(n.Value))
	if n.Low != nil {
		add("low", number(n.Low))
	}
	if n.High != nil {
		add("high", number(n.High))
	}
	add("unit", text(n.Unit))
	add("held", text(n.Held))
	return strings.Join(all, ", ")
}

// number writes a number in the fewest digits that read back as it, or null.
func number(p *float64) string {
	if p == nil {
		return "null"
	}
	return strconv.FormatFloat(*p, 'g', -1, 64)
}

// plain texts need no quotation marks anywhere in YAML.
var plain = regexp.MustCompile(`^[A-Za-z][A-Za-z0-9_./-]*( [A-Za-z0-9_./-]+)*$`)

// reserved words mean something else to some readers of YAML.
var reserved = []string{"true", "false", "null", "yes", "no", "on", "off", "y", "n"}

// text writes a text so that YAML reads it as it is. A JSON string is one of YAML.
func text(s string) string {
	if plain.MatchString(s) && !slices.Contains(reserved, strings.ToLower(s)) {
		return s
	}
	var b bytes.Buffer
	e := json.NewEncoder(&b)
	e.SetEscapeHTML(false)
	if err := e.Encode(strings.ToValidUTF8(s, "\uFFFD")); err != nil {
		panic("record: a text that cannot be written")
	}
	return strings.NewReplacer("\u007f", `\u007f`, "\u0085", `\u0085`, "\ufeff", `\ufeff`).Replace(
		strings.TrimSuffix(b.String(), "\n"))
}

// oneLine keeps a name within its remark.
func oneLine(s string) string {
	return strings.Map(func(r rune) rune {
		if r < ' ' || r == 0x7f || r == 0x85 || r == 0x2028 || r == 0x2029 {
			return '?'
		}
		return r
	}, s)
}
