package figure

import (
	"math"
	"strconv"
	"testing"
)

// luminance of a colour and contrast of two, as WCAG 2.2 defines them
// ("relative luminance", "contrast ratio").
func luminance(t *testing.T, hex string) float64 {
	v, err := strconv.ParseUint(hex[1:], 16, 32)
	if err != nil {
		t.Fatal(err)
	}
	part := func(shift uint) float64 {
		c := float64(v>>shift&255) / 255
		if c <= 0.04045 {
			return c / 12.92
		}
		return math.Pow((c+0.055)/1.055, 2.4)
	}
	return 0.2126*part(16) + 0.7152*part(8) + 0.0722*part(0)
}

func contrast(t *testing.T, a, b string) float64 {
	x, y := luminance(t, a), luminance(t, b)
	return (max(x, y) + 0.05) / (min(x, y) + 0.05)
}

// Lines reach 3:1 against their ground (WCAG 2.2, 1.4.11), letters 4.5:1 (1.4.3).
func TestInksCanBeSeen(t *testing.T) {
	if c := contrast(t, "#000000", "#FFFFFF"); math.Abs(c-21) > 1e-9 { // WCAG: black on white is 21:1
		t.Fatalf("black on white is %v", c)
	}
	for ground, colours := range map[string][inks]string{"white": light, "dark": dark} {
		for i := range Colours {
			if c := contrast(t, colours[CurveInk(i)], colours[Ground]); c < 3 {
				t.Errorf("%s ground: curve %d has %.2f", ground, i+1, c)
			}
			if c := contrast(t, colours[NameInk(i)], colours[Ground]); c < 4.5 {
				t.Errorf("%s ground: the name of curve %d has %.2f", ground, i+1, c)
			}
		}
		for _, i := range []Ink{Text, Muted} {
			if c := contrast(t, colours[i], colours[Ground]); c < 4.5 {
				t.Errorf("%s ground: %s has %.2f", ground, i.class(), c)
			}
		}
	}
}
