package steam

import (
	"math"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam/release"
)

// SaturationPressure returns the pressure at which water boils at t: IAPWS
// R7-97(2012) Eq. 30, 273.15 K to 647.096 K, increasing in t.
func SaturationPressure(t quantity.Temperature) (quantity.Pressure, error) {
	if !(t >= coldest && t <= critical) {
		return 0, outsideSaturation(t)
	}
	return quantity.Pressure(saturationPressure(float64(t))), nil
}

// SaturationSlope returns the pressure at which water boils at t as
// SaturationPressure does, and dp/dT of the saturation line in Pa/K: the
// derivative of IAPWS R7-97(2012) Eq. 30.
func SaturationSlope(t quantity.Temperature) (p quantity.Pressure, slope float64, err error) {
	if !(t >= coldest && t <= critical) {
		return 0, 0, outsideSaturation(t)
	}
	at, slope := equation30(float64(t))
	return quantity.Pressure(at), slope, nil
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
	low, high := lineStart(), lineTop()
	if !(float64(p) >= low && float64(p) <= high) {
		return 0, &fault.Range{
			Quantity: "pressure", Unit: "Pa", Source: "IAPWS R7-97(2012) Eq. 31",
			Value: float64(p), Min: low, Max: high,
		}
	}
	return quantity.Temperature(onLineAt(float64(p))), nil
}

// Saturation returns both saturated phases at t, 273.15 K to 647.096 K: by
// regions 1 and 2 up to 623.15 K, above by region 3, at the pressure of Eq. 30.
// At the critical temperature both are the critical state.
func Saturation(t quantity.Temperature) (liquid, vapour State, err error) {
	if !(t >= coldest && t <= critical) {
		return liquid, vapour, outsideSaturation(t)
	}
	liquid, vapour = saturated(saturationPressure(float64(t)), float64(t))
	return liquid, vapour, nil
}

// SaturationAtPressure returns both saturated phases at p, 611.2 Pa to
// 22.064 MPa, as Saturation does.
func SaturationAtPressure(p quantity.Pressure) (liquid, vapour State, err error) {
	t, err := SaturationTemperature(p)
	if err != nil {
		return liquid, vapour, err
	}
	liquid, vapour = saturated(float64(p), float64(t))
	return liquid, vapour, nil
}

// saturated returns both phases at a p in Pa and a t in K of the line.
func saturated(p, t float64) (liquid, vapour State) {
	liquid = State{Phase: SaturatedLiquid, Pressure: quantity.Pressure(p), Temperature: quantity.Temperature(t), Saturated: true}
	vapour = liquid
	vapour.Phase, vapour.Dryness = SaturatedVapour, 1
	if t <= regionsEnd {
		fill1(&liquid, p, t)
		fill2(&vapour, p, t)
		return liquid, vapour
	}
	thick, thin := saturatedDensities(p, t)
	fill3(&liquid, thick, t)
	fill3(&vapour, thin, t)
	return liquid, vapour
}

// saturatedDensities returns the densities of both phases by region 3. At the
// critical point, where rounding of the pressure would tear them apart or swap
// them, both have its density.
func saturatedDensities(p, t float64) (liquid, vapour float64) {
	liquid, found := density3(p, t, true)
	vapour, also := density3(p, t, false)
	if t >= critical || !found || !also || liquid < vapour {
		return criticalDensity, criticalDensity
	}
	return liquid, vapour
}

// AtTemperatureDryness returns the state on the saturation line at t, 273.15 K
// to 647.096 K, with dryness 0 to 1.
func AtTemperatureDryness(t quantity.Temperature, dryness quantity.Fraction) (State, error) {
	if !(dryness >= 0 && dryness <= 1) {
		return State{}, outside("dryness", "", float64(dryness), 0, 1)
	}
	liquid, vapour, err := Saturation(t)
	if err != nil {
		return State{}, err
	}
	return mixture(liquid, vapour, float64(dryness)), nil
}

// AtPressureDryness returns the state on the saturation line at p, 611.2 Pa to
// 22.064 MPa, with dryness 0 to 1.
func AtPressureDryness(p quantity.Pressure, dryness quantity.Fraction) (State, error) {
	if !(dryness >= 0 && dryness <= 1) {
		return State{}, outside("dryness", "", float64(dryness), 0, 1)
	}
	liquid, vapour, err := SaturationAtPressure(p)
	if err != nil {
		return State{}, err
	}
	return mixture(liquid, vapour, float64(dryness)), nil
}

// mixture is what lies between two saturated phases.
func mixture(liquid, vapour State, x float64) State {
	switch x {
	case 0:
		return liquid
	case 1:
		return vapour
	}
	mix := func(l, v float64) float64 { return l + float64(x*(v-l)) }
	return State{
		Region: 4, Phase: WetSteam, Pressure: liquid.Pressure, Temperature: liquid.Temperature,
		Saturated: true, Dryness: quantity.Fraction(x),
		Volume:         mix(liquid.Volume, vapour.Volume),
		Enthalpy:       mix(liquid.Enthalpy, vapour.Enthalpy),
		InternalEnergy: mix(liquid.InternalEnergy, vapour.InternalEnergy),
		Entropy:        mix(liquid.Entropy, vapour.Entropy),
	}
}

// LiquidEnthalpy returns the enthalpy in J/kg of saturated liquid at t,
// 273.15 K to 623.15 K, by region 1, and its derivative along the saturation
// line.
func LiquidEnthalpy(t quantity.Temperature) (h, byT float64, err error) {
	if !(t >= coldest && t <= regionsEnd) {
		return 0, 0, outside("temperature", "K", float64(t), coldest, regionsEnd)
	}
	p, slope := equation30(float64(t))
	h, byP, cp := region1EnthalpySlopes(p, float64(t))
	return h, cp + byP*slope, nil
}

// LiquidDensity returns the density in kg/m3 of saturated liquid at t, 273.15 K
// to 623.15 K, by region 1, and its derivative along the saturation line.
func LiquidDensity(t quantity.Temperature) (rho, byT float64, err error) {
	if !(t >= coldest && t <= regionsEnd) {
		return 0, 0, outside("temperature", "K", float64(t), coldest, regionsEnd)
	}
	p, slope := equation30(float64(t))
	byPi, byPiPi, _, byPiTau := region1Response(p, float64(t))
	v := gasConstant * float64(t) / p * byPi
	vByT, vByP := gasConstant/p*(byPi-byPiTau), gasConstant*float64(t)/(p*p)*byPiPi
	return 1 / v, -(vByT + vByP*slope) / (v * v), nil
}

// VapourEnthalpy returns the enthalpy in J/kg of vapour at p and t by region
// 2, 273.15 K to 1073.15 K, and its derivatives by p and t. For the sake of
// solvers it goes on smoothly a little below the condensing temperature.
func VapourEnthalpy(p quantity.Pressure, t quantity.Temperature) (h, byP, byT float64, err error) {
	if !(t >= coldest && t <= hottest2) {
		return 0, 0, 0, outside("temperature", "K", float64(t), coldest, hottest2)
	}
	limit := min(highestPressure, boundary23(max(float64(t), regionsEnd)))
	if !(p >= lowestPressure && float64(p) <= limit) {
		return 0, 0, 0, outside("pressure", "Pa", float64(p), lowestPressure, limit)
	}
	h, byP, byT = region2EnthalpySlopes(float64(p), float64(t))
	return h, byP, byT, nil
}

// equation30 returns p in Pa and dp/dT in Pa/K at t in K.
func equation30(t float64) (p, slope float64) {
	n := &release.Saturation
	apart := t - n[9]
	theta := t + n[8]/apart
	thetaByT := 1 - n[8]/(apart*apart)
	a, b, x := root30(theta)
	// x is the root of a x^2 + b x + c = 0, whose coefficients move with theta.
	aByTheta, bByTheta, cByTheta := 2*theta+n[0], 2*n[2]*theta+n[3], 2*n[5]*theta+n[6]
	xByTheta := -(aByTheta*x*x + bByTheta*x + cByTheta) / (2*a*x + b)
	x3 := x * x * x
	return x3 * x * 1e6, 4 * x3 * xByTheta * thetaByT * 1e6
}

// saturationPressure returns p of Eq. 30 in Pa at t in K.
func saturationPressure(t float64) float64 {
	n := &release.Saturation
	_, _, x := root30(t + n[8]/(t-n[9]))
	square := x * x
	return square * square * 1e6
}

// root30 solves the quadratic equation in the fourth root of p that Eqs. 30 and
// 31 share. The conversions keep a compiler
// from fusing, so that every machine gives the same digits.
func root30(theta float64) (a, b, x float64) {
	n := &release.Saturation
	a = float64((theta+n[0])*theta) + n[1]
	b = float64((float64(n[2]*theta)+n[3])*theta) + n[4]
	c := float64((float64(n[5]*theta)+n[6])*theta) + n[7]
	root := math.Sqrt(float64(b*b) - float64(4*a*c))
	return a, b, 2 * c / (root - b)
}

// saturationTemperature returns t of Eq. 31 in K at p in Pa.
func saturationTemperature(p float64) float64 {
	n := &release.Saturation
	root := math.Sqrt(p * 1e-6)
	beta := math.Sqrt(root)
	e := root + float64(n[2]*beta) + n[5]
	f := float64(n[0]*root) + float64(n[3]*beta) + n[6]
	g := float64(n[1]*root) + float64(n[4]*beta) + n[7]
	d := 2 * g / (-f - math.Sqrt(float64(f*f)-float64(4*e*g)))
	sum := n[9] + d
	return (sum - math.Sqrt(float64(sum*sum)-4*(float64(n[9]*d)+n[8]))) / 2
}

// lineStart, lineJoint and lineTop are the pressures of Eq. 30 in Pa at the
// triple end of the line, where region 3 begins, and at the critical
// temperature.
func lineStart() float64 { return saturationPressure(coldest) }
func lineJoint() float64 { return saturationPressure(regionsEnd) }
func lineTop() float64   { return saturationPressure(critical) }

// onLineAt returns the temperature of the saturation line at p in Pa within the
// line; rounding may lead a hair beyond its ends, or not quite to the critical
// point, where a hair is much.
func onLineAt(p float64) float64 {
	if p >= lineTop() {
		return critical
	}
	return min(max(saturationTemperature(p), coldest), critical)
}
