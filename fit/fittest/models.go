package fittest

import "math"

// model returns f(x; b) and, where g is not nil, writes ∂f/∂b.
type model func(x, b, g []float64) float64

// models of the certified sets by name. Each is the formula that NIST prints
// with the set, differentiated by hand.
var models = map[string]model{
	"Misra1a":  saturatingExponential,
	"Misra1b":  misra1b,
	"Misra1c":  misra1c,
	"Misra1d":  misra1d,
	"BoxBOD":   saturatingExponential,
	"Chwirut1": ultrasonic,
	"Chwirut2": ultrasonic,
	"Lanczos1": threeExponentials,
	"Lanczos2": threeExponentials,
	"Lanczos3": threeExponentials,
	"Gauss1":   twoPeaks,
	"Gauss2":   twoPeaks,
	"Gauss3":   twoPeaks,
	"DanWood":  power,
	"Kirby2":   quadraticRatio,
	"Hahn1":    cubicRatio,
	"Thurber":  cubicRatio,
	"Nelson":   degradation,
	"MGH09":    kowalikOsborne,
	"MGH10":    meyer,
	"MGH17":    osborne,
	"Roszman1": quantumDefects,
	"ENSO":     threeCycles,
	"Rat42":    sigmoid,
	"Rat43":    richards,
	"Eckerle4": peak,
	"Bennett5": magnetisation,
}

// saturatingExponential is b1·(1 − e^{−b2·x}).
func saturatingExponential(x, b, g []float64) float64 {
	e := math.Exp(-b[1] * x[0])
	if g != nil {
		g[0] = -math.Expm1(-b[1] * x[0])
		g[1] = b[0] * x[0] * e
	}
	return -b[0] * math.Expm1(-b[1]*x[0])
}

// misra1b is b1·(1 − (1 + b2·x/2)^{−2}).
func misra1b(x, b, g []float64) float64 {
	u := 1 + b[1]*x[0]/2
	w := 1 - 1/(u*u)
	if g != nil {
		g[0] = w
		g[1] = b[0] * x[0] / (u * u * u)
	}
	return b[0] * w
}

// misra1c is b1·(1 − (1 + 2·b2·x)^{−1/2}).
func misra1c(x, b, g []float64) float64 {
	u := 1 + 2*b[1]*x[0]
	w := 1 - 1/math.Sqrt(u)
	if g != nil {
		g[0] = w
		g[1] = b[0] * x[0] / (u * math.Sqrt(u))
	}
	return b[0] * w
}

// misra1d is b1·b2·x/(1 + b2·x).
func misra1d(x, b, g []float64) float64 {
	u := 1 + b[1]*x[0]
	w := b[1] * x[0] / u
	if g != nil {
		g[0] = w
		g[1] = b[0] * x[0] / (u * u)
	}
	return b[0] * w
}

// ultrasonic is e^{−b1·x}/(b2 + b3·x).
func ultrasonic(x, b, g []float64) float64 {
	d := b[1] + b[2]*x[0]
	f := math.Exp(-b[0]*x[0]) / d
	if g != nil {
		g[0] = -x[0] * f
		g[1] = -f / d
		g[2] = -x[0] * f / d
	}
	return f
}

// threeExponentials is b1·e^{−b2·x} + b3·e^{−b4·x} + b5·e^{−b6·x}.
func threeExponentials(x, b, g []float64) float64 {
	var f float64
	for k := 0; k < 6; k += 2 {
		e := math.Exp(-b[k+1] * x[0])
		f += b[k] * e
		if g != nil {
			g[k] = e
			g[k+1] = -b[k] * x[0] * e
		}
	}
	return f
}

// twoPeaks is b1·e^{−b2·x} + b3·e^{−(x−b4)²/b5²} + b6·e^{−(x−b7)²/b8²}.
func twoPeaks(x, b, g []float64) float64 {
	e := math.Exp(-b[1] * x[0])
	f := b[0] * e
	if g != nil {
		g[0] = e
		g[1] = -b[0] * x[0] * e
	}
	for k := 2; k < 8; k += 3 {
		u := (x[0] - b[k+1]) / b[k+2]
		e := math.Exp(-u * u)
		f += b[k] * e
		if g != nil {
			g[k] = e
			g[k+1] = 2 * b[k] * e * u / b[k+2]
			g[k+2] = 2 * b[k] * e * u * u / b[k+2]
		}
	}
	return f
}

// power is b1·x^{b2}.
func power(x, b, g []float64) float64 {
	w := math.Pow(x[0], b[1])
	if g != nil {
		g[0] = w
		g[1] = b[0] * w * math.Log(x[0])
	}
	return b[0] * w
}

// quadraticRatio is (b1 + b2·x + b3·x²)/(1 + b4·x + b5·x²).
func quadraticRatio(x, b, g []float64) float64 { return ratio(x[0], b[:3], b[3:], g) }

// cubicRatio is (b1 + b2·x + b3·x² + b4·x³)/(1 + b5·x + b6·x² + b7·x³).
func cubicRatio(x, b, g []float64) float64 { return ratio(x[0], b[:4], b[4:], g) }

// ratio is Σ a_k x^k / (1 + Σ c_k x^{k+1}).
func ratio(x float64, a, c, g []float64) float64 {
	p, q := 0.0, 0.0
	for k := len(a) - 1; k >= 0; k-- {
		p = p*x + a[k]
	}
	for k := len(c) - 1; k >= 0; k-- {
		q = (q + c[k]) * x
	}
	q++
	f := p / q
	if g != nil {
		w := 1 / q
		for k := range a {
			g[k] = w
			w *= x
		}
		w = -f * x / q
		for k := range c {
			g[len(a)+k] = w
			w *= x
		}
	}
	return f
}

// degradation is b1 − b2·x1·e^{−b3·x2}.
func degradation(x, b, g []float64) float64 {
	e := x[0] * math.Exp(-b[2]*x[1])
	if g != nil {
		g[0] = 1
		g[1] = -e
		g[2] = b[1] * x[1] * e
	}
	return b[0] - b[1]*e
}

// kowalikOsborne is b1·(x² + b2·x)/(x² + b3·x + b4).
func kowalikOsborne(x, b, g []float64) float64 {
	p := x[0] * (x[0] + b[1])
	q := x[0]*(x[0]+b[2]) + b[3]
	if g != nil {
		g[0] = p / q
		g[1] = b[0] * x[0] / q
		g[3] = -b[0] * p / (q * q)
		g[2] = g[3] * x[0]
	}
	return b[0] * p / q
}

// meyer is b1·e^{b2/(x+b3)}.
func meyer(x, b, g []float64) float64 {
	d := x[0] + b[2]
	e := math.Exp(b[1] / d)
	if g != nil {
		g[0] = e
		g[1] = b[0] * e / d
		g[2] = -b[0] * e * b[1] / (d * d)
	}
	return b[0] * e
}

// osborne is b1 + b2·e^{−b4·x} + b3·e^{−b5·x}.
func osborne(x, b, g []float64) float64 {
	e, h := math.Exp(-x[0]*b[3]), math.Exp(-x[0]*b[4])
	if g != nil {
		g[0], g[1], g[2] = 1, e, h
		g[3] = -b[1] * x[0] * e
		g[4] = -b[2] * x[0] * h
	}
	return b[0] + b[1]*e + b[2]*h
}

// quantumDefects is b1 − b2·x − arctan(b3/(x−b4))/π.
func quantumDefects(x, b, g []float64) float64 {
	d := x[0] - b[3]
	if g != nil {
		q := math.Pi * (d*d + b[2]*b[2])
		g[0], g[1] = 1, -x[0]
		g[2] = -d / q
		g[3] = -b[2] / q
	}
	return b[0] - b[1]*x[0] - math.Atan(b[2]/d)/math.Pi
}

// threeCycles is b1 + b2·cos(2πx/12) + b3·sin(2πx/12) + b5·cos(2πx/b4) +
// b6·sin(2πx/b4) + b8·cos(2πx/b7) + b9·sin(2πx/b7).
func threeCycles(x, b, g []float64) float64 {
	t := 2 * math.Pi * x[0]
	s, c := math.Sincos(t / 12)
	f := b[0] + b[1]*c + b[2]*s
	if g != nil {
		g[0], g[1], g[2] = 1, c, s
	}
	for k := 3; k < 9; k += 3 {
		s, c := math.Sincos(t / b[k])
		f += b[k+1]*c + b[k+2]*s
		if g != nil {
			g[k] = (b[k+1]*s - b[k+2]*c) * t / (b[k] * b[k])
			g[k+1], g[k+2] = c, s
		}
	}
	return f
}

// sigmoid is b1/(1 + e^{b2−b3·x}).
func sigmoid(x, b, g []float64) float64 {
	e := math.Exp(b[1] - b[2]*x[0])
	u := 1 / (1 + e)
	if g != nil {
		v := e / (1 + e) // not e·u·u later: e may be large
		g[0] = u
		g[1] = -b[0] * u * v
		g[2] = b[0] * u * v * x[0]
	}
	return b[0] * u
}

// richards is b1/(1 + e^{b2−b3·x})^{1/b4}.
func richards(x, b, g []float64) float64 {
	e := math.Exp(b[1] - b[2]*x[0])
	l := math.Log1p(e)
	w := math.Exp(-l / b[3])
	if g != nil {
		v := e / (1 + e) / b[3]
		g[0] = w
		g[1] = -b[0] * w * v
		g[2] = b[0] * w * v * x[0]
		g[3] = b[0] * w * l / (b[3] * b[3])
	}
	return b[0] * w
}

// peak is (b1/b2)·e^{−((x−b3)/b2)²/2}.
func peak(x, b, g []float64) float64 {
	u := (x[0] - b[2]) / b[1]
	e := math.Exp(-u*u/2) / b[1]
	if g != nil {
		g[0] = e
		g[1] = b[0] * e * (u*u - 1) / b[1]
		g[2] = b[0] * e * u / b[1]
	}
	return b[0] * e
}

// magnetisation is b1·(b2 + x)^{−1/b3}.
func magnetisation(x, b, g []float64) float64 {
	d := b[1] + x[0]
	w := math.Pow(d, -1/b[2])
	if g != nil {
		g[0] = w
		g[1] = -b[0] * w / (b[2] * d)
		g[2] = b[0] * w * math.Log(d) / (b[2] * b[2])
	}
	return b[0] * w
}
