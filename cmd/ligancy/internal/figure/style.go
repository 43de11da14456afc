package figure

// Style is the format of a figure.
type Style struct {
	Width float64 // in units of 1/96 inch
	Size  float64 // of letters
}

// The formats: two of the page, whose figures are laid out anew for small
// screens, and the two widths at which journals print, with letters of 8 pt.
var (
	Wide         = Style{Width: 736, Size: 12.5}
	Narrow       = Style{Width: 344, Size: 11.5}
	SingleColumn = Style{Width: 85*perMM - 2*rim, Size: 8 / pt}
	DoubleColumn = Style{Width: 174*perMM - 2*rim, Size: 8 / pt}
)

// rim is the white around the drawing of a file, so that no letter touches its edge.
const rim = 3

// narrow says whether labels have to stand inside the field for want of margins.
func (s Style) narrow() bool { return s.Width < 45*s.Size }

// title is the size of axis titles, a little larger than numerals: the serif's
// letters are smaller than the sans's.
func (s Style) title() float64 { return s.Size * 1.1 }

// lead is the distance of lines of text.
func (s Style) lead() float64 { return s.Size * 1.45 }
