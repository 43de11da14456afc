package saturation

// goldenSteps narrow a bracket to where doubles end.
const goldenSteps = 60

// goldenSection finds where f is least between a and b, in so many steps, each
// of which calls f once.
func goldenSection(f func(float64) float64, a, b float64, steps int) float64 {
	const ratio = 0.6180339887498949
	c, d := b-ratio*(b-a), a+ratio*(b-a)
	fc, fd := f(c), f(d)
	for range steps {
		if fc < fd {
			b, d, fd = d, c, fc
			c = b - ratio*(b-a)
			fc = f(c)
		} else {
			a, c, fc = c, d, fd
			d = a + ratio*(b-a)
			fd = f(d)
		}
	}
	return (a + b) / 2
}
