// Package steam holds the properties of water and steam by the IAPWS
// Industrial Formulation 1997, release R7-97(2012), with viscosity by R12-08,
// thermal conductivity by R15-11 and surface tension by R1-76(2014).
//
// Its sums are code that the command generate writes from the tables of
// package release.
package steam

import (
	"fmt"
	"math"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
)

//go:generate go run ./generate

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
	Region int // of R7-97; 4 between the saturated phases only
	// Neighbour is the region beyond a boundary at which the state lies inside
	// of the published jump, where both regions, or neither, have a state; 0
	// elsewhere.
	Neighbour   int
	Phase       Phase
	Pressure    quantity.Pressure
	Temperature quantity.Temperature
	Dryness     quantity.Fraction // meaningful if Saturated
	Saturated   bool              // on the saturation line

	Volume         float64 // m3/kg
	Enthalpy       float64 // J/kg
	InternalEnergy float64 // J/kg
	Entropy        float64 // J/(kg K)

	OnePhase            bool    // whether what follows exists; not in wet steam nor at the critical point
	Cp, Cv              float64 // J/(kg K)
	SpeedOfSound        float64 // m/s
	VolumeByTemperature float64 // (dv/dT)_p in m3/(kg K)
	VolumeByPressure    float64 // (dv/dp)_T in m3/(kg Pa)
}

// EnthalpyByPressure returns (dh/dp)_T = v - T (dv/dT)_p in J/(kg Pa).
func (s State) EnthalpyByPressure() float64 {
	return s.Volume - float64(s.Temperature)*s.VolumeByTemperature
}

// Advisories returns what a user of the state should know; nil for almost all.
func (s State) Advisories() []evidence.Advisory {
	if s.Neighbour == 0 {
		return nil
	}
	message := fmt.Sprintf("the equations of regions %d and %d differ a little where they meet; here region %d, extended, answers for both", s.Region, s.Neighbour, s.Region)
	if s.Region == 4 {
		message = "the saturated phases of regions 1 and 2 differ a little from those of region 3 where they meet; here regions 1 and 2, extended, answer for both"
	}
	return []evidence.Advisory{{Code: evidence.BoundaryJump, Message: message, Limit: "consistency at the boundaries of regions, IAPWS R7-97(2012)"}}
}

// Models returns what the package rests on.
func Models() []evidence.Model {
	return []evidence.Model{{
		ID: "iapws-r7-97", Revision: "R7-97(2012), regions 1 to 5",
		Source:     "IAPWS R7-97(2012), Industrial Formulation 1997 for the thermodynamic properties of water and steam",
		ValidRange: "0 to 800 degC up to 100 MPa, 800 to 2000 degC up to 50 MPa",
		Grade:      evidence.Confirmed, Inside: true,
	}}
}

// TransportModels returns what viscosity, conductivity and surface tension rest
// on.
func TransportModels() []evidence.Model {
	const transportRange = "0 to 800 degC up to 100 MPa, 800 to 900 degC up to 50 MPa"
	return []evidence.Model{{
		ID: "iapws-r12-08", Revision: "R12-08, industrial use: without critical enhancement",
		Source:     "IAPWS R12-08, Formulation 2008 for the viscosity of ordinary water substance",
		ValidRange: transportRange,
		Grade:      evidence.Confirmed, Inside: true,
	}, {
		ID: "iapws-r15-11", Revision: "R15-11, industrial use: with critical enhancement",
		Source:     "IAPWS R15-11, Formulation 2011 for the thermal conductivity of ordinary water substance",
		ValidRange: transportRange,
		Grade:      evidence.Confirmed, Inside: true,
	}, {
		ID: "iapws-r1-76", Revision: "R1-76(2014)",
		Source:     "IAPWS R1-76(2014), surface tension of ordinary water substance",
		ValidRange: "saturation line, 0 to 373.946 degC",
		Grade:      evidence.Confirmed, Inside: true,
	}}
}

// AtPressureTemperature returns the state at p and t: up to 100 MPa from
// 273.15 K to 1073.15 K, and up to 50 MPa to 2273.15 K. On the saturation line,
// where both phases have the same p and t, it refuses with *fault.Invalid;
// outside of the range with *fault.Range.
func AtPressureTemperature(p quantity.Pressure, t quantity.Temperature) (State, error) {
	s := State{Pressure: p, Temperature: t}
	at, err := placeOf(float64(p), float64(t))
	if err != nil {
		return State{}, err
	}
	switch at.region {
	case 1:
		fill1(&s, float64(p), float64(t))
	case 2:
		fill2(&s, float64(p), float64(t))
	case 5:
		fill5(&s, float64(p), float64(t))
	default:
		rho, err := densityAt(float64(p), float64(t), at.dense)
		if err != nil {
			return State{}, err
		}
		fill3(&s, rho, float64(t))
	}
	s.Phase = phaseOf(float64(p), float64(t), at.region == 1 || at.dense)
	return s, nil
}

// phaseOf names the phase of a state off the saturation line.
func phaseOf(p, t float64, dense bool) Phase {
	switch {
	case t > critical && p > lineTop():
		return Supercritical
	case t <= critical && dense:
		return CompressedLiquid
	}
	return SuperheatedVapour
}

// Enthalpy returns the specific enthalpy at p and t as AtPressureTemperature
// does, and nothing else, for those who need many.
func Enthalpy(p quantity.Pressure, t quantity.Temperature) (quantity.Enthalpy, error) {
	switch clearRegion(float64(p), float64(t)) {
	case 1:
		return quantity.Enthalpy(region1Enthalpy(float64(p), float64(t))), nil
	case 2:
		return quantity.Enthalpy(region2Enthalpy(float64(p), float64(t))), nil
	}
	at, err := placeOf(float64(p), float64(t))
	if err != nil {
		return 0, err
	}
	switch at.region {
	case 1:
		return quantity.Enthalpy(region1Enthalpy(float64(p), float64(t))), nil
	case 2:
		return quantity.Enthalpy(region2Enthalpy(float64(p), float64(t))), nil
	case 5:
		return quantity.Enthalpy(region5Enthalpy(float64(p), float64(t))), nil
	}
	rho, err := densityAt(float64(p), float64(t), at.dense)
	if err != nil {
		return 0, err
	}
	return quantity.Enthalpy(region3(rho, float64(t)).h), nil
}

// Density returns the density in kg/m3 at p and t as AtPressureTemperature
// does, and nothing else.
func Density(p quantity.Pressure, t quantity.Temperature) (float64, error) {
	at, err := placeOf(float64(p), float64(t))
	if err != nil {
		return 0, err
	}
	switch at.region {
	case 1:
		return 1 / region1Volume(float64(p), float64(t)), nil
	case 2:
		return 1 / region2Volume(float64(p), float64(t)), nil
	case 5:
		return 1 / region5Volume(float64(p), float64(t)), nil
	}
	return densityAt(float64(p), float64(t), at.dense)
}

// densityAt is density3 with words for a density that is not found.
func densityAt(p, t float64, dense bool) (float64, error) {
	rho, ok := density3(p, t, dense)
	if !ok {
		is, _ := region3Pressure(rho, t)
		return 0, unfound(is/p-1, "pressure of region 3")
	}
	return rho, nil
}

func onTheLine(p, t float64) error {
	return &fault.Invalid{
		Field:  "dryness_fraction",
		Value:  "missing",
		Limit:  "needed on the saturation line",
		WayOut: fmt.Sprintf("at %.6g kPa water boils at %.6g degC, where liquid and vapour have the same pressure and temperature: give dryness_fraction with one of the two", quantity.Pressure(p).Kilopascals(), quantity.Temperature(t).Celsius()),
	}
}

// unfound says that an equation could not be met, with the relative miss left.
func unfound(miss float64, where string) error {
	return &fault.NotConverged{Iterations: mostSteps, Residual: math.Abs(miss), Where: where}
}

// AtDensityTemperature returns the state of region 3 at a density in kg/m3 and
// t, for those who know the density: the equation's own inputs. Elsewhere than
// in region 3 it refuses with *fault.Range, between the saturated phases too.
func AtDensityTemperature(rho float64, t quantity.Temperature) (State, error) {
	if !(t >= regionsEnd && t <= hottest3) {
		return State{}, outsideBy("temperature", "K", "IAPWS R7-97(2012) region 3", float64(t), regionsEnd, hottest3)
	}
	if !(rho >= thinnest && rho <= densest) {
		return State{}, outsideBy("density", "kg/m3", "IAPWS R7-97(2012) region 3", rho, thinnest, densest)
	}
	if t < critical {
		line := saturationPressure(float64(t))
		if liquid, vapour := saturatedDensities(line, float64(t)); rho < liquid && rho > vapour {
			return State{}, outsideBy("density", "kg/m3", "IAPWS R7-97(2012) region 3, thinner than liquid", rho, liquid, densest)
		}
	}
	s := State{Temperature: t}
	p := region3(rho, float64(t)).p
	if low := boundary23(float64(t)); !(p >= low && p <= highestPressure) {
		return State{}, outsideBy("pressure", "Pa", "IAPWS R7-97(2012) region 3", p, low, highestPressure)
	}
	s.Pressure = quantity.Pressure(p)
	fill3(&s, rho, float64(t))
	s.Phase = phaseOf(p, float64(t), rho > criticalDensity)
	return s, nil
}

// MetastableVapour returns the state of vapour that has not begun to condense
// below its condensing temperature, as in a nozzle: IAPWS R7-97(2012) Eqs. 18
// and 19, from the saturation line down to where equilibrium would have 5 % of
// moisture, 611.2 Pa to 10 MPa.
func MetastableVapour(p quantity.Pressure, t quantity.Temperature) (State, error) {
	const highest, driest = 10e6, 0.95
	const source = "IAPWS R7-97(2012) section 6.2"
	if low := lineStart(); !(float64(p) >= low && p <= highest) {
		return State{}, outsideBy("pressure", "Pa", source, float64(p), low, highest)
	}
	liquid, vapour, err := SaturationAtPressure(p)
	if err != nil {
		return State{}, err
	}
	if !(t >= coldest && t <= vapour.Temperature) {
		return State{}, outsideBy("temperature", "K", source, float64(t), coldest, float64(vapour.Temperature))
	}
	var g gibbs
	g.value, g.byPi, g.byPiPi, g.byTau, g.byTauTau, g.byPiTau = regionMetastableGibbs(float64(p), float64(t))
	g.value += math.Log(float64(p) * 1e-6)
	s := State{Region: 2, Phase: SuperheatedVapour, Pressure: p, Temperature: t}
	g.fill(&s, float64(p), float64(t))
	if least := liquid.Enthalpy + driest*(vapour.Enthalpy-liquid.Enthalpy); s.Enthalpy < least {
		return State{}, outsideBy("enthalpy", "J/kg", source, s.Enthalpy, least, vapour.Enthalpy)
	}
	return s, nil
}

// Boundary23Pressure returns the pressure that divides region 2 from region 3 at
// t: IAPWS R7-97(2012) Eq. 5, 623.15 K to 863.15 K.
func Boundary23Pressure(t quantity.Temperature) quantity.Pressure {
	return quantity.Pressure(boundary23(float64(t)))
}

// Boundary23Temperature inverts Boundary23Pressure: 16.5292 MPa to 100 MPa.
func Boundary23Temperature(p quantity.Pressure) quantity.Temperature {
	return quantity.Temperature(boundary23Temperature(float64(p)))
}
