package numeric

import (
	"math"
	"sort"
)

// Curve is a smooth curve through points, once continuously differentiable:
// cubic Hermite pieces whose slopes keep the data's own rises and falls
// (Fritsch and Butland, SIAM J. Sci. Stat. Comput. 5 (1984) 300). Beyond its
// ends it goes on as a straight line; a single point makes a level line.
type Curve struct {
	x, y, slope []float64
}

// NewCurve makes the curve through (x[i], y[i]); x must rise strictly and
// hold at least one finite value.
func NewCurve(x, y []float64) Curve {
	n := len(x)
	slope := make([]float64, n)
	if n > 1 {
		secant := make([]float64, n-1)
		for i := range secant {
			secant[i] = (y[i+1] - y[i]) / (x[i+1] - x[i])
		}
		slope[0], slope[n-1] = secant[0], secant[n-2]
		for i := 1; i < n-1; i++ {
			a, b := secant[i-1], secant[i]
			if a*b > 0 {
				// Weighted harmonic mean: never overshoots its neighbours.
				ha, hb := x[i]-x[i-1], x[i+1]-x[i]
				wa, wb := ha+2*hb, 2*ha+hb
				slope[i] = (wa + wb) / (wa/b + wb/a)
			}
		}
	}
	return Curve{x: x, y: y, slope: slope}
}

// First is the lower end of the data.
func (c Curve) First() float64 { return c.x[0] }

// Last is the upper end of the data.
func (c Curve) Last() float64 { return c.x[len(c.x)-1] }

// At returns the curve's height and slope at x.
func (c Curve) At(x float64) (y, dy float64) {
	n := len(c.x)
	if n == 1 {
		return c.y[0], 0
	}
	if x <= c.x[0] {
		return c.y[0] + c.slope[0]*(x-c.x[0]), c.slope[0]
	}
	if x >= c.x[n-1] {
		return c.y[n-1] + c.slope[n-1]*(x-c.x[n-1]), c.slope[n-1]
	}
	i := sort.SearchFloat64s(c.x, x) - 1
	if i < 0 {
		i = 0
	}
	return Hermite(x, c.x[i], c.x[i+1], c.y[i], c.y[i+1], c.slope[i], c.slope[i+1])
}

// Hermite returns height and slope at x of the cubic that has heights y0, y1 and
// slopes s0, s1 at x0 and x1.
func Hermite(x, x0, x1, y0, y1, s0, s1 float64) (y, dy float64) {
	h := x1 - x0
	t := (x - x0) / h
	t2, t3 := t*t, t*t*t
	y = (2*t3-3*t2+1)*y0 + (t3-2*t2+t)*h*s0 + (3*t2-2*t3)*y1 + (t3-t2)*h*s1
	dy = ((6*t2-6*t)*(y0-y1))/h + (3*t2-4*t+1)*s0 + (3*t2-2*t)*s1
	return y, dy
}

// Polynomial returns c[0] + c[1] x + ... and its derivative; c holds at least
// one coefficient.
func Polynomial(c []float64, x float64) (y, dy float64) {
	y = c[len(c)-1]
	for i := len(c) - 2; i >= 0; i-- {
		dy = dy*x + y
		y = y*x + c[i]
	}
	return y, dy
}

// Rising reports whether x is finite and strictly rising, and if not, the
// first index that breaks it.
func Rising(x []float64) (at int, ok bool) {
	for i, v := range x {
		if math.IsNaN(v) || math.IsInf(v, 0) || i > 0 && !(v > x[i-1]) {
			return i, false
		}
	}
	return 0, true
}
