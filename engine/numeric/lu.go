// Package numeric holds the linear algebra, the structural analysis of
// equation systems and the interpolation that the plant's solver needs.
package numeric

import "math"

// Solve solves a x = b in place by Gaussian elimination with scaled partial
// pivoting. a is square, row by row, and is destroyed; b becomes x. It
// returns the smallest ratio of a pivot to the largest entry that its row had
// at the start: near 0 for a system whose equations depend on each other. A
// ratio of 0 or NaN means that b holds no answer.
func Solve(a [][]float64, b []float64) (worst float64) {
	n := len(b)
	worst = math.Inf(1)
	if n == 0 {
		return worst
	}
	for i := range n {
		largest := 0.0
		for _, v := range a[i] {
			if w := math.Abs(v); w > largest || math.IsNaN(w) {
				largest = w
			}
		}
		if !(largest > 0) || math.IsInf(largest, 0) {
			return 0
		}
		for j := range n {
			a[i][j] /= largest
		}
		b[i] /= largest
	}
	for k := range n {
		pivot := k
		for i := k + 1; i < n; i++ {
			if math.Abs(a[i][k]) > math.Abs(a[pivot][k]) {
				pivot = i
			}
		}
		a[k], a[pivot] = a[pivot], a[k]
		b[k], b[pivot] = b[pivot], b[k]
		size := math.Abs(a[k][k])
		if !(size < worst) {
			if math.IsNaN(size) {
				return 0
			}
		} else {
			worst = size
		}
		if size == 0 {
			return 0
		}
		for i := k + 1; i < n; i++ {
			f := a[i][k] / a[k][k]
			if f == 0 {
				continue
			}
			for j := k + 1; j < n; j++ {
				a[i][j] -= f * a[k][j]
			}
			b[i] -= f * b[k]
		}
	}
	for i := n - 1; i >= 0; i-- {
		sum := b[i]
		for j := i + 1; j < n; j++ {
			sum -= a[i][j] * b[j]
		}
		b[i] = sum / a[i][i]
	}
	return worst
}
