package mechtest

import "math/big"

// Precision of the reference arithmetic, in bits: differences over 2⁻⁸⁰ leave
// more digits than a float64 has even after three of them.
const Precision = 400

// number is v in extended precision.
func number(v float64) *big.Float { return new(big.Float).SetPrec(Precision).SetFloat64(v) }

func zero() *big.Float { return new(big.Float).SetPrec(Precision) }

func add(a, b *big.Float) *big.Float { return zero().Add(a, b) }
func sub(a, b *big.Float) *big.Float { return zero().Sub(a, b) }
func mul(a, b *big.Float) *big.Float { return zero().Mul(a, b) }
func quo(a, b *big.Float) *big.Float { return zero().Quo(a, b) }

// float is v to the nearest float64.
func float(v *big.Float) float64 {
	f, _ := v.Float64()
	return f
}

// exp is eˣ by Taylor's series of x/2^k, squared k times.
func exp(x *big.Float) *big.Float {
	const halvings = 40
	k := halvings
	if x.Sign() != 0 {
		k = max(0, x.MantExp(nil)+halvings)
	}
	r := zero().SetMantExp(x, -k)
	sum, term := number(1), number(1)
	for i := 1; ; i++ {
		term = quo(mul(term, r), number(float64(i)))
		if term.Sign() == 0 || term.MantExp(nil) < -Precision-10 {
			break
		}
		sum = add(sum, term)
	}
	for range k {
		sum = mul(sum, sum)
	}
	return sum
}

// power is vⁿ for a whole n of either sign.
func power(v *big.Float, n int) *big.Float {
	p := number(1)
	for range max(n, -n) {
		p = mul(p, v)
	}
	if n < 0 {
		return quo(number(1), p)
	}
	return p
}
