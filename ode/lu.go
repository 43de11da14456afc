package ode

import "math"

// number is what the matrices of a step are made of.
type number interface{ float64 | complex128 }

// size is |x|, for complex x |re| + |im|.
func size[T number](x T) float64 {
	switch v := any(x).(type) {
	case float64:
		return math.Abs(v)
	case complex128:
		return math.Abs(real(v)) + math.Abs(imag(v))
	}
	return 0
}

// denseLU is the factorisation PA = LU with partial pivoting of a small dense
// matrix. Columns are contiguous; reciprocal pivots stand on the diagonal.
type denseLU[T number] struct {
	n    int
	a    []T
	swap []int
}

func (f *denseLU[T]) resize(n int) {
	f.n, f.a, f.swap = n, grown(f.a, n*n), grown(f.swap, n)
}

// factor overwrites the matrix; false where a pivot is zero or not finite.
func (f *denseLU[T]) factor() bool {
	n := f.n
	for k := range n {
		col := f.a[k*n : k*n+n]
		p, big := k, size(col[k])
		for i := k + 1; i < n; i++ {
			if v := size(col[i]); v > big {
				p, big = i, v
			}
		}
		f.swap[k] = p
		if !(big > 0 && big <= math.MaxFloat64) {
			return false
		}
		if p != k {
			for o := 0; o < n*n; o += n {
				f.a[o+k], f.a[o+p] = f.a[o+p], f.a[o+k]
			}
		}
		inv := 1 / col[k]
		col[k] = inv
		low := col[k+1:]
		for i := range low {
			low[i] *= inv
		}
		for j := k + 1; j < n; j++ {
			u := f.a[j*n+k]
			if u == 0 {
				continue
			}
			right := f.a[j*n+k+1 : j*n+n]
			for i, l := range low {
				right[i] -= u * l
			}
		}
	}
	return true
}

// solve overwrites b with A⁻¹b.
func (f *denseLU[T]) solve(b []T) {
	n := f.n
	b = b[:n]
	for k, p := range f.swap[:n] {
		b[k], b[p] = b[p], b[k]
	}
	for k := range n {
		v := b[k]
		rest := b[k+1:]
		for i, l := range f.a[k*n+k+1 : k*n+n] {
			rest[i] -= v * l
		}
	}
	for k := n - 1; k >= 0; k-- {
		col := f.a[k*n : k*n+k+1]
		v := b[k] * col[k]
		b[k] = v
		top := b[:k]
		for i, u := range col[:k] {
			top[i] -= v * u
		}
	}
}

// solveMany overwrites B (n×p, row-major) with A⁻¹B.
func (f *denseLU[T]) solveMany(b []T, p int) {
	n := f.n
	for k, q := range f.swap[:n] {
		if q != k {
			x, y := b[k*p:k*p+p], b[q*p:q*p+p]
			for j := range x {
				x[j], y[j] = y[j], x[j]
			}
		}
	}
	for k := range n {
		x := b[k*p : k*p+p]
		for i := k + 1; i < n; i++ {
			minus(b[i*p:i*p+p], f.a[k*n+i], x)
		}
	}
	for k := n - 1; k >= 0; k-- {
		x := b[k*p : k*p+p]
		inv := f.a[k*n+k]
		for j := range x {
			x[j] *= inv
		}
		for i := range k {
			minus(b[i*p:i*p+p], f.a[k*n+i], x)
		}
	}
}

// minus subtracts l·x from y.
func minus[T number](y []T, l T, x []T) {
	if l == 0 {
		return
	}
	y = y[:len(x)]
	for j, v := range x {
		y[j] -= l * v
	}
}

// grown returns a slice of length n, the old one where it is long enough.
func grown[T any](old []T, n int) []T {
	if cap(old) >= n {
		return old[:n]
	}
	return make([]T, n)
}
