package specs

import (
	"math"
	"regexp"
	"slices"
	"strings"

	"ligancy/specs/table"
	"ligancy/specs/units"
)

// guess is what the columns of a table are taken for.
type guess struct {
	t                                            *table.Table
	all                                          []*columnGuess
	ligand, effector                             *columnGuess
	response                                     []*columnGuess
	sigma, sem, n, preparation, blocked, leftOut *columnGuess
	factors                                      []*columnGuess
	ignored                                      []string
	sheets                                       []string // of a workbook
	sheet                                        string
	apart                                        *columnGuess // nonspecific binding in a column of its own
	effectorName, blockedWord, kind, responseWhy string
	percent                                      bool
	left                                         []candidate // mechanisms that the points cannot hold
}

// columnGuess is one column and what is seen of it.
type columnGuess struct {
	index     int
	name, why string
	numeric   bool
	values    int // distinct ones
	low, high float64
	unit      units.Unit
	hasUnit   bool
	taken     bool
}

func newGuess(t *table.Table) *guess {
	g := &guess{t: t}
	every := make([]int, len(t.Columns))
	for i := range every {
		every[i] = i
	}
	t.FindDecimal(every)
	for i, c := range t.Columns {
		if c.Text != "" {
			g.all = append(g.all, look(t, i))
		}
	}
	g.preparation = g.take("^(prep|preparation|animal|donor|batch|expt|experiment|individual|präp|präparation|tier|spender|charge|préparation|lot)([_ .-]|s?$)", func(c *columnGuess) bool { return c.values > 1 })
	g.leftOut = g.take("^(left_out|why|excluded?|exclusion|reason|omit(ted)?)$", nil)
	g.sem = g.take("^(sem|s\\.?e\\.?m\\.?|std_?err|standard error)([_ .-]|$)|[_ .-](sem)$",
		isNumeric)
	g.sigma = g.take("^(sd|s\\.d\\.|sigma|std|stdev)([_ .-]|$)|[_ .-](sd|sigma)$", isNumeric)
	g.n = g.take("^(n|n_rep|replicates)$", isNumeric)
	g.findBlocked()
	g.findLigand()
	g.findResponse()
	if g.sem != nil && g.n == nil { // a standard error without n says nothing
		g.sem.taken = false
		g.sem = nil
	}
	g.findOthers()
	return g
}

func isNumeric(c *columnGuess) bool { return c.numeric }

// look sees what a column holds.
func look(t *table.Table, i int) *columnGuess {
	c := &columnGuess{index: i, name: t.Columns[i].Text, low: math.Inf(1), high: math.Inf(-1)}
	c.unit, c.hasUnit = unitInHeader(c.name)
	numbers, texts := 0, 0
	for _, r := range t.Rows {
		if r.Cells[i].IsEmpty() {
			continue
		}
		v, d := t.Number(r.Cells[i], c.name)
		if d != nil {
			texts++
			continue
		}
		numbers++
		c.low, c.high = min(c.low, v), max(c.high, v)
	}
	c.numeric = numbers > 0 && texts*10 <= numbers
	c.values = len(t.Values(i))
	return c
}

// take takes the first free column whose header fits.
func (g *guess) take(header string, also func(*columnGuess) bool) *columnGuess {
	re := regexp.MustCompile("(?i)" + header)
	for _, c := range g.all {
		if !c.taken && re.MatchString(c.name) && (also == nil || also(c)) {
			c.taken = true
			return c
		}
	}
	return nil
}

// findBlocked looks for a column of words that tell blocked tubes from open ones.
func (g *guess) findBlocked() {
	for _, c := range g.all {
		if c.taken || c.numeric || c.values != 2 {
			continue
		}
		for _, v := range g.t.Values(c.index) {
			switch strings.ToLower(v) {
			case "blocked", "nonspecific", "nsb", "cold", "excess":
				c.taken, g.blocked, g.blockedWord = true, c, v
				return
			}
		}
	}
}

var (
	ligandWord   = regexp.MustCompile(`(?i)^(p?o2|oxygen|lig(and)?|conc(entration)?|dose|added|free|total|x|substrate|pressure|log ?(10)?|frei|dosis)([_ .(\[-]|$)|conc|konz|pO2`)
	responseWord = regexp.MustCompile(`(?i)sat|sätt|so2|theta|bound|gebunden|bindung|geschw|aktivit|binding|veloc|rate|activity|absorb|fluor|signal|response|counts|cpm|^(y|v|f|od|a)([_ .(\[-]|$)|optical`)
)

// findLigand chooses the column that is most like a ligand axis.
func (g *guess) findLigand() {
	best := 0
	for i, c := range g.all {
		if c.taken || !c.numeric || c.values < 3 {
			continue
		}
		score := 1
		if c.hasUnit && (c.unit.IsConcentration() || c.unit.IsPressure() ||
			c.unit.Kind() == "a mass per volume" || c.unit.String() == "ppm") {
			score += 4
		}
		if ligandWord.MatchString(c.name) {
			score += 3
		}
		if responseWord.MatchString(c.name) {
			score -= 3
		}
		if c.low < 0 && !(c.hasUnit && c.unit.IsLogarithm()) {
			score -= 4
		}
		score += min(c.values, 8) / 2
		if i == 0 {
			score++
		}
		if score > best {
			best, g.ligand = score, c
		}
	}
	if g.ligand == nil {
		return
	}
	g.ligand.taken = true
	g.ligand.why = "taken for the ligand because nothing else looks more like it: check this"
	switch {
	case ligandWord.MatchString(g.ligand.name):
		g.ligand.why = "taken for the ligand by its header"
	case g.ligand.hasUnit:
		g.ligand.why = "taken for the ligand by its unit"
	}
}

var numbered = regexp.MustCompile(`(?i)^(.*?)[_ .-]?([0-9]{1,2}|[a-f])$`)

// findResponse chooses the response, and its replicates where columns share a stem.
func (g *guess) findResponse() {
	var best *columnGuess
	most := 0
	for i, c := range g.all {
		if c.taken || !c.numeric || c.values < 2 {
			continue
		}
		score := 1 + min(c.values, 8)/2
		if responseWord.MatchString(c.name) {
			score += 4
		}
		if i > 0 {
			score++
		}
		if c.hasUnit && (c.unit.IsConcentration() || c.unit.IsPressure()) {
			score -= 2
		}
		if score > most {
			most, best = score, c
		}
	}
	if best == nil {
		return
	}
	best.taken = true
	best.why = "taken for the response because nothing else looks more like it: check this"
	if responseWord.MatchString(best.name) {
		best.why = "taken for the response by its header"
	}
	g.response = []*columnGuess{best}
	g.kind, g.percent = kindOf(best)
	stem, ok := replicateStem(best)
	if !ok {
		return
	}
	for _, c := range g.all {
		if other, ok := replicateStem(c); !c.taken && c.numeric && ok && other == stem {
			c.taken = true
			g.response = append(g.response, c)
			g.percent = g.percent || c.high > 2 && g.kind == "saturation"
		}
	}
	slices.SortFunc(g.response, func(a, b *columnGuess) int { return a.index - b.index })
}

// replicateStem is what numbered columns share: v of v 1 (nkat/mg) and v 2 (nkat/mg).
func replicateStem(c *columnGuess) (string, bool) {
	name, u, _ := splitHeader(c.name)
	if m := numbered.FindStringSubmatch(name); m != nil && m[1] != "" {
		return m[1] + " in " + u.String(), true
	}
	return "", false
}

var plainWord = regexp.MustCompile(`^[A-Za-z][A-Za-z0-9]*`)

var nonspecificWord = regexp.MustCompile(`(?i)^(nsb|non-? ?specific|unspecific|unspezifisch)`)

// findOthers sorts what is left into an effector, factors, and what is not used.
func (g *guess) findOthers() {
	for _, c := range g.all {
		if c.taken {
			continue
		}
		if g.apart == nil && c.numeric && nonspecificWord.MatchString(c.name) {
			g.apart = c
			continue
		}
		few := c.values > 1 && c.values <= 12 && c.values*3 <= len(g.t.Rows)
		switch {
		case g.effector == nil && c.numeric && few && c.hasUnit && c.unit.IsConcentration() &&
			!c.unit.IsLogarithm() && c.low >= 0:
			g.effector = c
			g.effectorName = plainWord.FindString(c.name)
			if g.effectorName == "" || slices.Contains(keyNames(columnKeys()), g.effectorName) {
				g.effectorName = "effector"
			}
		case few && !slices.Contains([]string{byData, byPreparation, "all"}, c.name):
			g.factors = append(g.factors, c)
		default:
			g.ignored = append(g.ignored, oneLine(c.name))
		}
	}
}

// oneLine makes a header safe to stand in a comment.
func oneLine(s string) string {
	return strings.Map(func(r rune) rune {
		if r < ' ' || r == 0x7f || isOddBlank(r) {
			return ' '
		}
		return r
	}, s)
}
