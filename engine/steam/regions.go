package steam

import (
	"math"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/steam/release"
)

// gasConstant is the specific gas constant of water in J/(kg K), IAPWS
// R7-97(2012) Eq. 1.
const gasConstant = 461.526

// Limits of the regions, IAPWS R7-97(2012) sections 2 and 3, in K and Pa.
const (
	coldest         = 273.15
	regionsEnd      = 623.15 // of region 1, and of region 2 on the saturation line
	critical        = 647.096
	hottest3        = 863.15 // where region 3 ends at the highest pressure
	hottest2        = 1073.15
	hottest5        = 2273.15
	highestPressure = 100e6
	highest5        = 50e6
	// lowestPressure is the engine's own limit: the equations are those of an
	// ideal gas long before, and no apparatus holds less.
	lowestPressure = 1e-3
)

// onLine is how near to the saturation line, relative in pressure, a pressure
// and a temperature do not tell the phases apart.
const onLine = 1e-9

// boundary23 is IAPWS R7-97(2012) Eq. 5: the pressure in Pa at t in K that
// divides region 2 from region 3. From 863.15 K up it lies above 100 MPa.
func boundary23(t float64) float64 {
	n := &release.Boundary23
	return (float64((float64(n[2]*t)+n[1])*t) + n[0]) * 1e6
}

// boundary23Temperature inverts Eq. 5 itself; the printed Eq. 6 does so to its
// own rounding only.
func boundary23Temperature(p float64) float64 {
	n := &release.Boundary23
	root := math.Sqrt(float64(n[1]*n[1]) - float64(4*n[2]*(n[0]-p/1e6)))
	return (root - n[1]) / (2 * n[2])
}

// place is where a pressure and a temperature lie.
type place struct {
	region int
	dense  bool // of region 3: on the side of the liquid
}

// placeOf finds the region of p and t. On the saturation line, where they do
// not tell the phases apart, it refuses.
func placeOf(p, t float64) (place, error) {
	if !(t >= coldest && t <= hottest5) {
		return place{}, outside("temperature", "K", t, coldest, hottest5)
	}
	if !(p >= lowestPressure && p <= highestPressure) {
		return place{}, outside("pressure", "Pa", p, lowestPressure, highestPressure)
	}
	if t > hottest2 {
		if p > highest5 {
			return place{}, &fault.Range{
				Quantity: "pressure", Unit: "Pa", Source: "IAPWS R7-97(2012) region 5, above 1073.15 K",
				Value: p, Min: lowestPressure, Max: highest5,
			}
		}
		return place{region: 5}, nil
	}
	if t >= regionsEnd {
		switch {
		case p <= boundary23(t) && !(t == regionsEnd && p >= saturationPressure(t)):
			return place{region: 2}, nil
		case t > critical:
			return place{region: 3, dense: p > lineAbove(t)}, nil
		}
	} else if region := clearRegion(p, t); region != 0 {
		return place{region: region}, nil
	}
	line := saturationPressure(t)
	liquid := p > line
	if math.Abs(p-line) <= onLine*line {
		return place{}, onTheLine(p, t)
	}
	switch {
	case t > regionsEnd:
		return place{region: 3, dense: liquid}, nil
	case liquid:
		return place{region: 1}, nil
	}
	return place{region: 2}, nil
}

// clearRegion tells region 1 or 2 where no look at the saturation line itself is
// needed, and 0 elsewhere.
func clearRegion(p, t float64) int {
	const apart = 1e-8 // relative: more than onLine and rounding
	if !(t >= coldest && t <= hottest2 && p >= lowestPressure && p <= highestPressure) {
		return 0
	}
	if t >= regionsEnd {
		if p <= boundary23(t) {
			return 2
		}
		return 0
	}
	below := int(t - coldest)
	switch {
	case p > linePressure[below+1]*(1+apart):
		return 1
	case p < linePressure[below]*(1-apart):
		return 2
	}
	return 0
}

// lineAbove goes on from the saturation line, in its direction.
func lineAbove(t float64) float64 { return float64(lineSlope*(t-critical)) + lineEnd }

// gibbs is the Gibbs energy over R T and its derivatives, times pi and tau as
// often as derived by them.
type gibbs struct {
	value, byPi, byPiPi, byTau, byTauTau, byPiTau float64
}

// fill1, fill2 and fill5 set the properties of s at p in Pa and t in K.
func fill1(s *State, p, t float64) {
	var g gibbs
	g.value, g.byPi, g.byPiPi, g.byTau, g.byTauTau, g.byPiTau = region1Gibbs(p, t)
	g.fill(s, p, t)
	s.Region = 1
}

func fill2(s *State, p, t float64) {
	var g gibbs
	g.value, g.byPi, g.byPiPi, g.byTau, g.byTauTau, g.byPiTau = region2Gibbs(p, t)
	g.value += math.Log(p * 1e-6)
	g.fill(s, p, t)
	s.Region = 2
}

func fill5(s *State, p, t float64) {
	var g gibbs
	g.value, g.byPi, g.byPiPi, g.byTau, g.byTauTau, g.byPiTau = region5Gibbs(p, t)
	g.value += math.Log(p * 1e-6)
	g.fill(s, p, t)
	s.Region = 5
}

// fill sets the properties of s from g: the relations of IAPWS R7-97(2012)
// Table 3, which hold for the whole Gibbs energy of any region.
func (g gibbs) fill(s *State, p, t float64) {
	rt := gasConstant * t
	mixed := g.byPi - g.byPiTau
	s.Volume = rt / p * g.byPi
	s.Enthalpy = rt * g.byTau
	s.InternalEnergy = rt * (g.byTau - g.byPi)
	s.Entropy = gasConstant * (g.byTau - g.value)
	s.Cp = -gasConstant * g.byTauTau
	s.Cv = s.Cp + gasConstant*mixed*mixed/g.byPiPi
	s.SpeedOfSound = g.byPi * math.Sqrt(rt/(mixed*mixed/g.byTauTau-g.byPiPi))
	s.VolumeByTemperature = gasConstant / p * mixed
	s.VolumeByPressure = rt / (p * p) * g.byPiPi
	s.OnePhase = true
}

// helmholtz is the state of region 3 at a density and a temperature, with the
// derivatives of its pressure, enthalpy and entropy.
type helmholtz struct {
	p, pByRho, pByT float64 // Pa, Pa m3/kg, Pa/K
	h, hByRho, hByT float64 // J/kg, J m3/kg2, J/(kg K)
	s, sByRho, sByT float64 // J/(kg K), J m3/(kg2 K), J/(kg K2)
	u, cv           float64 // J/kg, J/(kg K)
}

// region3 evaluates Eq. 28 at rho in kg/m3 and t in K, by the relations of
// IAPWS R7-97(2012) Table 31.
func region3(rho, t float64) helmholtz {
	value, byDelta, byDeltaDelta, byTau, byTauTau, byDeltaTau := region3Helmholtz(rho, t)
	value += release.Region3Log * math.Log(rho/criticalDensity)
	return helmholtzOf(rho, t, value, byDelta, byDeltaDelta, byTau, byTauTau, byDeltaTau)
}

// helmholtzOf joins the derivatives; without the value the entropy is of no
// use.
func helmholtzOf(rho, t, value, byDelta, byDeltaDelta, byTau, byTauTau, byDeltaTau float64) helmholtz {
	first := release.Region3Log + byDelta
	twice := byDeltaDelta - release.Region3Log
	mixed := first - byDeltaTau
	rt := gasConstant * t
	a := helmholtz{
		p: rho * rt * first, pByRho: rt * (2*first + twice), pByT: gasConstant * rho * mixed,
		u: rt * byTau, s: gasConstant * (byTau - value),
		cv: -gasConstant * byTauTau,
	}
	a.h = a.u + rt*first
	// dh = T ds + v dp, and (ds/drho)_T = -(dp/dT)_rho / rho^2 by Maxwell.
	a.sByRho, a.sByT = -a.pByT/(rho*rho), a.cv/t
	a.hByRho, a.hByT = t*a.sByRho+a.pByRho/rho, a.cv+a.pByT/rho
	return a
}

// fill3 sets the properties of s at rho in kg/m3 and t in K. At the critical
// point cp, and what hangs on it, do not exist.
func fill3(s *State, rho, t float64) {
	a := region3(rho, t)
	s.Region, s.Volume = 3, 1/rho
	s.Enthalpy, s.InternalEnergy, s.Entropy = a.h, a.u, a.s
	if !(a.pByRho > leastStiffness*gasConstant*t) {
		return
	}
	s.OnePhase = true
	s.Cv = a.cv
	s.Cp = a.cv + t*a.pByT*a.pByT/(rho*rho*a.pByRho)
	s.SpeedOfSound = math.Sqrt(a.pByRho * s.Cp / s.Cv)
	s.VolumeByTemperature = a.pByT / (rho * rho * a.pByRho)
	s.VolumeByPressure = -1 / (rho * rho * a.pByRho)
}

// leastStiffness is (dp/drho)_T over R T below which rounding, not the
// equation, decides on cp: within some 1e-4 K of the critical point.
const leastStiffness = 1e-9

func outside(what, unit string, value, low, high float64) error {
	return outsideBy(what, unit, "IAPWS R7-97(2012)", value, low, high)
}

func outsideBy(what, unit, source string, value, low, high float64) error {
	return &fault.Range{Quantity: what, Unit: unit, Source: source, Value: value, Min: low, Max: high}
}
