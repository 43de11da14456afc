package figure

// Ink is what a stroke or a letter means; each ground gives it a colour.
type Ink uint8

const (
	None   Ink = iota
	Text       // letters, ticks
	Muted      // what stands back: rivals, remarks
	Hair       // hairline horizontals
	Hatch      // field beyond what was tested
	Ground     // the page itself
	Curve1     // first of the curves; Curve1 + 1 is the second, and so on
	Label1 = Curve1 + Colours
	inks   = Label1 + Colours
)

// Colours is the number of curves that colours tell apart; more are drawn as
// small multiples.
const Colours = 5

// CurveInk is the ink of the i-th curve.
func CurveInk(i int) Ink { return Curve1 + Ink(i%Colours) }

// NameInk is the ink in which the i-th curve is named: dark enough for text.
func NameInk(i int) Ink { return Label1 + Ink(i%Colours) }

// class is the name of the ink in style sheets.
func (i Ink) class() string { return classes[i] }

var classes = [inks]string{
	None: "no", Text: "tx", Muted: "mu", Hair: "ha", Hatch: "hx", Ground: "gr",
	Curve1: "c1", Curve1 + 1: "c2", Curve1 + 2: "c3", Curve1 + 3: "c4", Curve1 + 4: "c5",
	Label1: "l1", Label1 + 1: "l2", Label1 + 2: "l3", Label1 + 3: "l4", Label1 + 4: "l5",
}

// light and dark are the colours on a white and on a dark ground. The curves'
// are Okabe and Ito's (Color Universal Design, 2008) that reach 3:1 against
// white; as letters three of them are darkened to 4.5:1.
var light = [inks]string{
	None: "none", Text: "#1B2A33", Muted: "#5B6770", Hair: "#E3E8EA", Hatch: "#C9D1D6", Ground: "#FFFFFF",
	Curve1: "#0072B2", Curve1 + 1: "#D55E00", Curve1 + 2: "#009E73", Curve1 + 3: "#CC79A7", Curve1 + 4: "#000000",
	Label1: "#0072B2", Label1 + 1: "#A84600", Label1 + 2: "#00714F", Label1 + 3: "#9A4F7C", Label1 + 4: "#000000",
}

var dark = [inks]string{
	None: "none", Text: "#E9EEF1", Muted: "#A3AFB7", Hair: "#2A333B", Hatch: "#3A4650", Ground: "#11161C",
	Curve1: "#56B4E9", Curve1 + 1: "#E69F00", Curve1 + 2: "#2FBF92", Curve1 + 3: "#CC79A7", Curve1 + 4: "#F0E442",
	Label1: "#56B4E9", Label1 + 1: "#E69F00", Label1 + 2: "#2FBF92", Label1 + 3: "#CC79A7", Label1 + 4: "#F0E442",
}
