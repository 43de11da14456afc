package report

// ink paints text for a terminal, or leaves it plain.
type ink struct{ colour bool }

func (i ink) paint(code, s string) string {
	if !i.colour || s == "" {
		return s
	}
	return "\x1b[" + code + "m" + s + "\x1b[0m"
}

func (i ink) bold(s string) string { return i.paint("1", s) }
func (i ink) dim(s string) string  { return i.paint("2", s) }

// curve paints in the colour of the n-th curve: blue, orange, green, purple of
// a palette that colour-blind readers can tell apart, then the terminal's own.
func (i ink) curve(n int, s string) string {
	palette := []string{"38;5;32", "38;5;166", "38;5;35", "38;5;175"}
	if n >= len(palette) {
		return s
	}
	return i.paint(palette[n], s)
}
