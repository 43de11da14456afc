package report

import (
	"strconv"
	"strings"
)

// table of a page.
type table struct {
	Caption string
	Head    []string
	Rows    [][]entry
	Foot    string
	Class   string
}

// entry of a table.
type entry struct {
	Text     string
	Interval string // set back behind the text
	After    string
	Marks    []int  // cautions
	Say      string // what pointing at it says
	Head     bool   // heads its row
	Quantity bool   // begins with a symbol
	Name     string // a mechanism that can be shown over the leader: its place in the result
	Number   bool   // set against the right edge
	Colour   int    // 1-based place of the curve whose colour it has; 0 for none
}

// longText is the number of letters from which an entry may take several lines.
const longText = 30

// Class is the entry's class in the style sheet.
func (c entry) Class() string {
	class := ""
	switch {
	case c.Colour > 0:
		class = "f-l" + strconv.Itoa(c.Colour)
	case c.Colour < 0:
		class = "blank"
	case c.Number:
		class = "num"
	}
	if len([]rune(c.Text+c.After)) > longText {
		class = strings.TrimSpace(class + " wrap")
	}
	return class
}

// empty says whether a cell has nothing to show.
func (c entry) empty() bool { return c.Text == "" || c.Text == "–" && c.Say == "" }

// dropEmpty takes out columns without anything in them.
func (t *table) dropEmpty() *table {
	for k := len(t.Head) - 1; k > 0; k-- {
		full := false
		for _, r := range t.Rows {
			full = full || k < len(r) && !r[k].empty()
		}
		if full {
			continue
		}
		t.Head = append(t.Head[:k:k], t.Head[k+1:]...)
		for i, r := range t.Rows {
			if k < len(r) {
				t.Rows[i] = append(r[:k:k], r[k+1:]...)
			}
		}
	}
	return t
}

// dropColumn takes out one column.
func (t *table) dropColumn(k int) {
	t.Head = append(t.Head[:k:k], t.Head[k+1:]...)
	for i, r := range t.Rows {
		t.Rows[i] = append(r[:k:k], r[k+1:]...)
	}
}
