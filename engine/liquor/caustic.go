package liquor

import (
	"fmt"
	"math"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/numeric"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
)

// Coefficients of Olsson, Jernqvist and Aly, Int. J. Thermophysics 18 (1997)
// 779: vapour pressure, enthalpy and density of aqueous sodium hydroxide.
var (
	causticA1 = []float64{-113.93947, 209.82305, 494.77153, 6860.833, 2676.6433, -21740.328, -34750.872, -20122.157, -4102.989}
	causticA2 = []float64{16.240074, -11.864008, -223.47305, -1650.3997, -5997.3118, -12318.744, -15303.153, -11707.48, -5364.9554, -1338.5412, -137.96889}
	causticA3 = []float64{-226.80157, 293.17155, 5081.8791, 36752.126, 131262.0, 259399.54, 301696.22, 208617.9, 81774.024, 15648.526, 906.29769}
	causticK  = []float64{1288.4485, -0.49649131, -4387.8908, -4.0915144, 4938.2298, 7.2887292, -1841.189, -3.0202651}
	causticC2 = []float64{2.3087919, -9.0004252, 167.59914, -1051.6368, 3394.3378, -6115.0986, 6220.8249, -3348.8098, 743.87432}
	causticC3 = []float64{0.0230286, -0.37866056, 2.4529593, -8.2693542, 15.728833, -16.944427, 9.6254192, -2.2410628}
	causticC4 = []float64{-8.5131313e-05, 0.0013652823, -0.0087568741, 0.029200398, -0.054882983, 0.058418034, -0.032787483, 0.0075445993}
	causticB1 = []float64{5007.2279636, -25131.164248, 74107.692582, -104657.48684, 69821.773186, -18145.91181}
	causticB2 = []float64{-64.786269079, 525.34360564, -1608.4471903, 2350.9753235, -1660.9035108, 457.6437435}
	causticB3 = []float64{0.24436776978, -1.9737722344, 6.04601497138, -8.9090614947, 6.37146769397, -1.7816083111}
)

// causticStrongest is how strong, in kg/kg, the correlations for caustic go at
// the temperatures of evaporators.
const causticStrongest = 0.7

// causticBoiling is the boiling temperature in degC of caustic with water
// fraction x at the logarithm of a pressure in kPa: ln p = (a1 + a2 t)/(t - a3).
func causticBoiling(x, logarithm float64) (t, byX, byLogarithm float64) {
	lx := math.Log(x)
	a1, a1ByL := numeric.Polynomial(causticA1, lx)
	a2, a2ByL := numeric.Polynomial(causticA2, lx)
	a3, a3ByL := numeric.Polynomial(causticA3, lx)
	below := logarithm - a2
	t = (a1 + a3*logarithm) / below
	byL := (a1ByL + a3ByL*logarithm + t*a2ByL) / below
	return t, byL / x, (a3 - t) / below
}

// causticRise is the boiling temperature by Olsson less that of water by the
// same equation, so that water has none.
type causticRise struct{}

func (causticRise) at(w, tw float64) (rise, byW, byTw float64) {
	p, slope, err := steam.SaturationSlope(quantity.Temperature(min(max(tw, quantity.Zero), lineEnd)))
	if err != nil {
		return 0, 0, 0
	}
	held := min(max(w, 0), causticStrongest+0.05)
	logarithm := math.Log(float64(p) / 1e3)
	t, byX, byLogarithm := causticBoiling(1-held, logarithm)
	t0, _, byLogarithm0 := causticBoiling(1, logarithm)
	byW = -byX
	if held != w {
		byW = 0
	}
	return t - t0, byW, (byLogarithm - byLogarithm0) * slope / float64(p)
}

func (causticRise) dependsOnSolids() bool { return true }

func (causticRise) check(w float64) []evidence.Advisory {
	const agreed = 0.42 // kg/kg, to which the sources agree within 1 K
	if w <= agreed {
		return nil
	}
	return []evidence.Advisory{{
		Code: evidence.OutsideRange, Warning: true, Field: "product.solids_fraction",
		Message: fmt.Sprintf("At solids of %.4g kg/kg the published boiling temperatures of caustic differ by several kelvin (6 K at 0.5 kg/kg).", w),
		Limit:   "0.42 kg/kg",
	}}
}

func (causticRise) model() evidence.Model { return evidence.Model{} }

// causticHeat is the enthalpy by Olsson, heat of dilution in it, moved by what
// its water differs from IAPWS water, in the share that the liquor has of water.
type causticHeat struct{}

func (causticHeat) at(w, t float64) (h, byW, byT float64) {
	held := min(max(w, 0), causticStrongest+0.05)
	h, byX, byT := olsson(1-held, t-quantity.Zero)
	h0, _, byT0 := olsson(1, t-quantity.Zero)
	real, realByT := water(t)
	byW = -byX - (real - h0)
	if held != w {
		byW = 0
	}
	return h + (1-held)*(real-h0), byW, byT + (1-held)*(realByT-byT0)
}

// olsson is the enthalpy in J/kg at water fraction x and t in degC.
func olsson(x, t float64) (h, byX, byT float64) {
	k := causticK
	over, overByX := numeric.Polynomial([]float64{k[0], k[2], k[4], k[6]}, x)
	under, underByX := numeric.Polynomial([]float64{1, k[1], k[3], k[5], k[7]}, x)
	c1, c1ByX := over/under, (overByX-over/under*underByX)/under
	c2, c2ByX := numeric.Polynomial(causticC2, x)
	c3, c3ByX := numeric.Polynomial(causticC3, x)
	c4, c4ByX := numeric.Polynomial(causticC4, x)
	h = c1 + t*(c2+t*(c3+t*c4))
	byX = c1ByX + t*(c2ByX+t*(c3ByX+t*c4ByX))
	byT = c2 + t*(2*c3+t*3*c4)
	return 1e3 * h, 1e3 * byX, 1e3 * byT
}

func (causticHeat) dependsOnSolids() bool { return true }

// causticReach is how strong, in kg/kg, the enthalpy goes below each temperature
// in degC: the release's own bands.
var causticReach = [...]struct{ below, strongest float64 }{
	{4, 0.22}, {10, 0.32}, {15, 0.42}, {26, 0.46}, {37, 0.56}, {48, 0.60}, {60, 0.66}, {71, 0.70}, {204, 0.70},
}

func (causticHeat) check(w, t float64) ([]evidence.Advisory, error) {
	c := t - quantity.Zero
	for _, band := range causticReach {
		if c <= band.below {
			if !(w >= 0 && w <= band.strongest) {
				return nil, &fault.Range{Quantity: "solids of sodium hydroxide", Source: fmt.Sprintf("liquor sodium-hydroxide at %.4g degC", c), Value: w, Min: 0, Max: band.strongest}
			}
			return nil, nil
		}
	}
	return nil, &fault.Range{Quantity: "temperature of sodium hydroxide", Unit: "K", Source: "liquor sodium-hydroxide", Value: t, Min: quantity.Zero, Max: quantity.Zero + 204}
}

func (causticHeat) model() evidence.Model { return evidence.Model{} }

type causticDensity struct{}

func (causticDensity) at(w, t float64) (rho, byW, byT float64) {
	held := min(max(w, 0), causticStrongest+0.05)
	root := math.Sqrt(1 - held)
	c := t - quantity.Zero
	b1, b1ByR := numeric.Polynomial(causticB1, root)
	b2, b2ByR := numeric.Polynomial(causticB2, root)
	b3, b3ByR := numeric.Polynomial(causticB3, root)
	byW = -(b1ByR + c*(b2ByR+c*b3ByR)) / (2 * root)
	if held != w {
		byW = 0
	}
	return b1 + c*(b2+c*b3), byW, b2 + 2*c*b3
}

func (causticDensity) dependsOnSolids() bool { return true }

func causticModels() []evidence.Model {
	const source = "Olsson, Jernqvist and Aly, Int. J. Thermophysics 18 (1997) 779"
	return []evidence.Model{
		{ID: "sodium-hydroxide-rise", Revision: "1997", Source: source + ", vapour pressure", ValidRange: "solids to 0.7 kg/kg, 0 to 200 degC; sources agree within 1 K to 0.42 kg/kg", Grade: evidence.Confirmed, Inside: true},
		{ID: "sodium-hydroxide-heat", Revision: "1997", Source: source + ", enthalpy, moved to IAPWS water, and density", ValidRange: "solids to 0.22 kg/kg at 0 degC, 0.7 kg/kg from 60 to 204 degC", Grade: evidence.Confirmed, Inside: true},
	}
}
