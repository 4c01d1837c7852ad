// Package release holds the coefficients that the IAPWS releases print and
// their sums in the plainest form. Code is generated from the tables; the plain
// form is what the generated code is held to.
package release

import "math"

// Term is one term N x^I y^J of a printed sum.
type Term struct {
	I, J int
	N    float64
}

// Sum is a sum of terms and its derivatives.
type Sum struct {
	Value, ByX, ByXX, ByY, ByYY, ByXY float64
}

// At adds up terms at x and y, each power on its own.
func At(terms []Term, x, y float64) Sum {
	var s Sum
	for _, c := range terms {
		i, j := float64(c.I), float64(c.J)
		xi, yj := Power(x, c.I), Power(y, c.J)
		s.Value += c.N * xi * yj
		s.ByX += c.N * i * Power(x, c.I-1) * yj
		s.ByXX += c.N * i * (i - 1) * Power(x, c.I-2) * yj
		s.ByY += c.N * xi * j * Power(y, c.J-1)
		s.ByYY += c.N * xi * j * (j - 1) * Power(y, c.J-2)
		s.ByXY += c.N * i * Power(x, c.I-1) * j * Power(y, c.J-1)
	}
	return s
}

// Power is x to a whole power, by repeated squaring.
func Power(x float64, n int) float64 {
	if n < 0 {
		x, n = 1/x, -n
	}
	result := 1.0
	for ; n > 0; n >>= 1 {
		if n&1 == 1 {
			result *= x
		}
		x *= x
	}
	return result
}

// Backward is a printed equation for a temperature or a volume from pressure
// and one more coordinate:
//
//	Scale * sum N (p/Pressure + PressureShift)^I (y/Coordinate + CoordinateShift)^J
//
// with p in MPa, y in kJ/kg or kJ/(kg K), and the result in K or m3/kg. Of the
// first base Roots square roots are taken.
type Backward struct {
	Pressure, Coordinate           float64
	PressureShift, CoordinateShift float64
	Scale                          float64
	Roots                          int
	Terms                          []Term
}

// At evaluates the equation.
func (b Backward) At(p, y float64) float64 {
	x := p/b.Pressure + b.PressureShift
	for range b.Roots {
		x = math.Sqrt(x)
	}
	return b.Scale * At(b.Terms, x, y/b.Coordinate+b.CoordinateShift).Value
}

// Saturation is Table 34 of IAPWS R7-97(2012), from n1: Eqs. 30 and 31, in MPa
// and K.
var Saturation = [10]float64{
	0.11670521452767e4, -0.72421316703206e6, -0.17073846940092e2,
	0.12020824702470e5, -0.32325550322333e7, 0.14915108613530e2,
	-0.48232657361591e4, 0.40511340542057e6, -0.23855557567849,
	0.65017534844798e3,
}

// Boundary23 is n1 to n3 of Table 1 of IAPWS R7-97(2012): Eq. 5, the pressure in
// MPa that divides region 2 from region 3.
var Boundary23 = [3]float64{0.34805185628969e3, -0.11671859879975e1, 0.10192970039326e-2}

// Boundary2bc is Eq. 20 of IAPWS R7-97(2012): the pressure in MPa that divides
// regions 2b and 2c of the backward equations at h in kJ/kg.
func Boundary2bc(h float64) float64 {
	return 905.84278514723 + h*(-0.67955786399241+h*1.2809002730136e-4)
}

// Boundary3ab is Eq. 1 of IAPWS SR3-03(2014): the enthalpy in kJ/kg that divides
// regions 3a and 3b of the backward equations at p in MPa.
func Boundary3ab(p float64) float64 {
	return 0.201464004206875e4 + p*(0.374696550136983e1+p*(-0.219921901054187e-1+p*0.875131686009950e-4))
}
