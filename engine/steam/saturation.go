package steam

import (
	"math"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
)

// Limits of the saturation line, IAPWS R7-97(2012) section 8. The limits of
// its inverse follow from the equation itself, not from rounded print.
const (
	coldest  = 273.15  // K
	critical = 647.096 // K
	// regionsEnd is where region 3 begins on the saturation line.
	regionsEnd = 623.15 // K
)

// saturationCoefficients is Table 34 of IAPWS R7-97(2012), from n1.
var saturationCoefficients = [...]float64{
	0.11670521452767e4, -0.72421316703206e6, -0.17073846940092e2,
	0.12020824702470e5, -0.32325550322333e7, 0.14915108613530e2,
	-0.48232657361591e4, 0.40511340542057e6, -0.23855557567849,
	0.65017534844798e3,
}

// SaturationPressure returns the pressure at which water boils at t: IAPWS
// R7-97(2012) Eq. 30, 273.15 K to 647.096 K, increasing in t.
func SaturationPressure(t quantity.Temperature) (quantity.Pressure, error) {
	if !(t >= coldest && t <= critical) {
		return 0, outsideSaturation(t)
	}
	p, _ := equation30(float64(t))
	return quantity.Pressure(p), nil
}

// SaturationSlope returns dp/dT in Pa/K of the saturation line at t: the
// derivative of IAPWS R7-97(2012) Eq. 30, 273.15 K to 647.096 K.
func SaturationSlope(t quantity.Temperature) (float64, error) {
	if !(t >= coldest && t <= critical) {
		return 0, outsideSaturation(t)
	}
	_, slope := equation30(float64(t))
	return slope, nil
}

func outsideSaturation(t quantity.Temperature) error {
	return &fault.Range{
		Quantity: "temperature", Unit: "K", Source: "IAPWS R7-97(2012) Eq. 30",
		Value: float64(t), Min: coldest, Max: critical,
	}
}

// SaturationTemperature returns the temperature at which water boils at p:
// IAPWS R7-97(2012) Eq. 31, for the pressures that Eq. 30 reaches, 611.2 Pa to
// 22.064 MPa.
func SaturationTemperature(p quantity.Pressure) (quantity.Temperature, error) {
	low, _ := equation30(coldest)
	high, _ := equation30(critical)
	if !(float64(p) >= low && float64(p) <= high) {
		return 0, &fault.Range{
			Quantity: "pressure", Unit: "Pa", Source: "IAPWS R7-97(2012) Eq. 31",
			Value: float64(p), Min: low, Max: high,
		}
	}
	// Rounding may lead a hair beyond the ends.
	return quantity.Temperature(min(max(equation31(float64(p)), coldest), critical)), nil
}

// equation30 returns p in Pa and dp/dT in Pa/K at t in K.
func equation30(t float64) (p, slope float64) {
	n := &saturationCoefficients
	apart := t - n[9]
	theta := t + n[8]/apart
	thetaByT := 1 - n[8]/(apart*apart)
	a := theta*theta + n[0]*theta + n[1]
	b := n[2]*theta*theta + n[3]*theta + n[4]
	c := n[5]*theta*theta + n[6]*theta + n[7]
	root := math.Sqrt(b*b - 4*a*c)
	x := 2 * c / (-b + root)
	// x is the root of a x^2 + b x + c = 0, whose coefficients move with theta.
	aByTheta, bByTheta, cByTheta := 2*theta+n[0], 2*n[2]*theta+n[3], 2*n[5]*theta+n[6]
	xByTheta := -(aByTheta*x*x + bByTheta*x + cByTheta) / (2*a*x + b)
	x3 := x * x * x
	return x3 * x * 1e6, 4 * x3 * xByTheta * thetaByT * 1e6
}

// equation31 returns t in K at p in Pa.
func equation31(p float64) float64 {
	n := &saturationCoefficients
	root := math.Sqrt(p / 1e6)
	beta := math.Sqrt(root)
	e := root + n[2]*beta + n[5]
	f := n[0]*root + n[3]*beta + n[6]
	g := n[1]*root + n[4]*beta + n[7]
	d := 2 * g / (-f - math.Sqrt(f*f-4*e*g))
	sum := n[9] + d
	return (sum - math.Sqrt(sum*sum-4*(n[8]+n[9]*d))) / 2
}
