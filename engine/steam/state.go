// Package steam holds the properties of water and steam by the IAPWS
// Industrial Formulation 1997, release R7-97(2012).
package steam

import (
	"fmt"
	"math"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
)

// Phase names the phase of a state.
type Phase int

// The phases.
const (
	CompressedLiquid Phase = iota + 1
	SaturatedLiquid
	WetSteam
	SaturatedVapour
	SuperheatedVapour
	Supercritical
)

// State is one state of water or steam, in SI units.
type State struct {
	Region      int // of R7-97; 4 between the saturated phases only
	Phase       Phase
	Pressure    quantity.Pressure
	Temperature quantity.Temperature
	Dryness     quantity.Fraction // meaningful if Saturated
	Saturated   bool              // on the saturation line

	Volume         float64 // m3/kg
	Enthalpy       float64 // J/kg
	InternalEnergy float64 // J/kg
	Entropy        float64 // J/(kg K)

	OnePhase            bool    // whether what follows exists; not in wet steam
	Cp, Cv              float64 // J/(kg K)
	SpeedOfSound        float64 // m/s
	VolumeByTemperature float64 // (dv/dT)_p in m3/(kg K)
	VolumeByPressure    float64 // (dv/dp)_T in m3/(kg Pa)
}

// EnthalpyByPressure returns (dh/dp)_T = v - T (dv/dT)_p in J/(kg Pa).
func (s State) EnthalpyByPressure() float64 {
	return s.Volume - float64(s.Temperature)*s.VolumeByTemperature
}

// Limits of regions 1 and 2, IAPWS R7-97(2012) section 3.
const (
	highestPressure    = 100e6   // Pa
	highestTemperature = 1073.15 // K
)

// onLine is how near to the saturation line, relative in pressure, a pressure
// and a temperature do not tell the phases apart.
const onLine = 1e-9

// Models returns what the package rests on.
func Models() []evidence.Model {
	return []evidence.Model{{
		ID: "iapws-r7-97", Revision: "R7-97(2012), regions 1, 2 and 4",
		Source:     "IAPWS R7-97(2012), Industrial Formulation 1997 for the thermodynamic properties of water and steam",
		ValidRange: "0 to 800 degC up to 100 MPa, without region 3 (denser than the line from 350 degC and 16.53 MPa to 590 degC and 100 MPa)",
		Grade:      evidence.Confirmed, Inside: true,
	}}
}

// AtPressureTemperature returns the state at p and t, in regions 1 and 2 of
// IAPWS R7-97(2012). On the saturation line, where both phases have the same
// p and t, it refuses with *fault.Invalid; elsewhere outside of the regions
// with *fault.Range.
func AtPressureTemperature(p quantity.Pressure, t quantity.Temperature) (State, error) {
	s := State{Pressure: p, Temperature: t}
	if !(t >= coldest && t <= highestTemperature) {
		return s, outside("temperature", "K", float64(t), coldest, highestTemperature)
	}
	if !(p > 0 && p <= highestPressure) {
		return s, outside("pressure", "Pa", float64(p), 0, highestPressure)
	}
	if t > regionsEnd {
		if limit := boundary23(float64(t)); float64(p) > limit {
			return s, &fault.Range{
				Quantity: "pressure", Unit: "Pa", Source: "IAPWS R7-97(2012) Eq. 5, boundary between regions 2 and 3",
				Value: float64(p), Min: 0, Max: limit,
			}
		}
		region2(float64(p), float64(t)).fill(&s, float64(p), float64(t))
		s.Region, s.Phase = 2, SuperheatedVapour
		return s, nil
	}
	saturation, _ := equation30(float64(t))
	switch ratio := float64(p)/saturation - 1; {
	case math.Abs(ratio) <= onLine:
		return s, &fault.Invalid{
			Field:  "dryness_fraction",
			Value:  "missing",
			Limit:  "needed on the saturation line",
			WayOut: fmt.Sprintf("at %.6g kPa water boils at %.6g degC, where liquid and vapour have the same pressure and temperature: give dryness_fraction with one of the two", p.Kilopascals(), t.Celsius()),
		}
	case ratio > 0:
		region1(float64(p), float64(t)).fill(&s, float64(p), float64(t))
		s.Region, s.Phase = 1, CompressedLiquid
	default:
		region2(float64(p), float64(t)).fill(&s, float64(p), float64(t))
		s.Region, s.Phase = 2, SuperheatedVapour
	}
	return s, nil
}

// boundary23 is IAPWS R7-97(2012) Eq. 5: the pressure in Pa at t in K that
// divides region 2 from region 3, with the coefficients of Table 1.
func boundary23(t float64) float64 {
	return (0.34805185628969e3 - 0.11671859879975e1*t + 0.10192970039326e-2*t*t) * 1e6
}

// Saturation returns both saturated phases at t, 273.15 K to 623.15 K, by
// regions 1 and 2 at the saturation pressure.
func Saturation(t quantity.Temperature) (liquid, vapour State, err error) {
	if !(t >= coldest && t <= regionsEnd) {
		return liquid, vapour, outside("temperature", "K", float64(t), coldest, regionsEnd)
	}
	p, _ := equation30(float64(t))
	liquid = State{Region: 1, Phase: SaturatedLiquid, Pressure: quantity.Pressure(p), Temperature: t, Saturated: true}
	vapour = State{Region: 2, Phase: SaturatedVapour, Pressure: quantity.Pressure(p), Temperature: t, Saturated: true, Dryness: 1}
	region1(p, float64(t)).fill(&liquid, p, float64(t))
	region2(p, float64(t)).fill(&vapour, p, float64(t))
	return liquid, vapour, nil
}

// AtTemperatureDryness returns the state on the saturation line at t, 273.15 K
// to 623.15 K, with dryness 0 to 1.
func AtTemperatureDryness(t quantity.Temperature, dryness quantity.Fraction) (State, error) {
	if !(dryness >= 0 && dryness <= 1) {
		return State{}, outside("dryness", "", float64(dryness), 0, 1)
	}
	liquid, vapour, err := Saturation(t)
	if err != nil {
		return State{}, err
	}
	switch dryness {
	case 0:
		return liquid, nil
	case 1:
		return vapour, nil
	}
	x := float64(dryness)
	mix := func(l, v float64) float64 { return l + x*(v-l) }
	return State{
		Region: 4, Phase: WetSteam, Pressure: liquid.Pressure, Temperature: t, Saturated: true, Dryness: dryness,
		Volume:         mix(liquid.Volume, vapour.Volume),
		Enthalpy:       mix(liquid.Enthalpy, vapour.Enthalpy),
		InternalEnergy: mix(liquid.InternalEnergy, vapour.InternalEnergy),
		Entropy:        mix(liquid.Entropy, vapour.Entropy),
	}, nil
}

// AtPressureDryness returns the state on the saturation line at p, 611.2 Pa to
// 16.53 MPa, with dryness 0 to 1.
func AtPressureDryness(p quantity.Pressure, dryness quantity.Fraction) (State, error) {
	low, _ := equation30(coldest)
	high, _ := equation30(regionsEnd)
	if !(float64(p) >= low && float64(p) <= high) {
		return State{}, outside("pressure", "Pa", float64(p), low, high)
	}
	t := quantity.Temperature(min(max(equation31(float64(p)), coldest), regionsEnd))
	s, err := AtTemperatureDryness(t, dryness)
	// Eqs. 30 and 31 invert each other to rounding; keep what was asked.
	s.Pressure = p
	return s, err
}

// LiquidEnthalpy returns the enthalpy in J/kg of saturated liquid at t,
// 273.15 K to 623.15 K, by region 1, and its derivative along the saturation
// line.
func LiquidEnthalpy(t quantity.Temperature) (h, byT float64, err error) {
	if !(t >= coldest && t <= regionsEnd) {
		return 0, 0, outside("temperature", "K", float64(t), coldest, regionsEnd)
	}
	var s State
	p, slope := equation30(float64(t))
	region1(p, float64(t)).fill(&s, p, float64(t))
	s.Temperature = t
	return s.Enthalpy, s.Cp + s.EnthalpyByPressure()*slope, nil
}

// VapourEnthalpy returns the enthalpy in J/kg of vapour at p and t by region
// 2, 273.15 K to 1073.15 K, and its derivatives by p and t. For the sake of
// solvers it goes on smoothly a little below the condensing temperature.
func VapourEnthalpy(p quantity.Pressure, t quantity.Temperature) (h, byP, byT float64, err error) {
	if !(t >= coldest && t <= highestTemperature) {
		return 0, 0, 0, outside("temperature", "K", float64(t), coldest, highestTemperature)
	}
	limit := highestPressure
	if t < 863.15 {
		limit = boundary23(max(float64(t), regionsEnd))
	}
	if !(p > 0 && float64(p) <= limit) {
		return 0, 0, 0, outside("pressure", "Pa", float64(p), 0, limit)
	}
	var s State
	region2(float64(p), float64(t)).fill(&s, float64(p), float64(t))
	s.Temperature = t
	return s.Enthalpy, s.EnthalpyByPressure(), s.Cp, nil
}

func outside(what, unit string, value, low, high float64) error {
	return &fault.Range{Quantity: what, Unit: unit, Source: "IAPWS R7-97(2012) regions 1, 2 and 4", Value: value, Min: low, Max: high}
}
