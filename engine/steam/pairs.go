package steam

import (
	"math"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam/release"
)

// AtPressureEnthalpy returns the state with h at p, over the range of
// AtPressureTemperature and through the wet steam between. The answer
// reproduces p and h by the equation of its own region. Outside of the range it
// refuses with *fault.Range, whose limits are those of h at this p.
func AtPressureEnthalpy(p quantity.Pressure, h quantity.Enthalpy) (State, error) {
	return alongIsobar(&enthalpy, float64(p), float64(h))
}

// AtPressureEntropy returns the state with s at p, as AtPressureEnthalpy does
// with h.
func AtPressureEntropy(p quantity.Pressure, s quantity.Entropy) (State, error) {
	return alongIsobar(&entropy, float64(p), float64(s))
}

// Temperature returns the temperature with h at p as AtPressureEnthalpy does,
// and nothing else, for those who need many.
func Temperature(p quantity.Pressure, h quantity.Enthalpy) (quantity.Temperature, error) {
	// Most questions lie in the midst of region 1, 2 or 3. Enthalpy rises with t
	// in each: a temperature of its equation that lies clear of its ends is the one.
	dense := float64(p) > lineEnd*(1+1e-6) && p <= highestPressure
	likely := h > denseLowest && float64(h) < denseHighest+denseRise*max(float64(p)-denseKnee, 0)
	if dense && likely {
		if t, ok := denseTemperature(float64(p), float64(h)); ok {
			return quantity.Temperature(t), nil
		}
	} else if p > fastLowest && p <= highestPressure {
		end := regionsEnd
		if p < fastHighest {
			end = saturationTemperature(float64(p))
		}
		if h < halfway {
			t := backwardTemperature1ByEnthalpy(float64(p), float64(h))
			if t > coldest+margin && t < end-margin {
				at, cp := region1EnthalpyHeat(float64(p), t)
				t -= (at - float64(h)) / cp
				miss := region1Enthalpy(float64(p), t) - float64(h)
				if t -= miss / cp; math.Abs(miss) < near && t < end-margin {
					return quantity.Temperature(t), nil
				}
			}
		} else {
			if p >= fastHighest {
				end = boundary23Temperature(float64(p))
			}
			t := vapourStart(float64(p), float64(h))
			if t > end+margin && t < hottest2-margin {
				at, cp := region2EnthalpyHeat(float64(p), t)
				t -= (at - float64(h)) / cp
				miss := region2Enthalpy(float64(p), t) - float64(h)
				if t -= miss / cp; math.Abs(miss) < near && t > end+margin {
					return quantity.Temperature(t), nil
				}
			}
		}
	}
	if dense && !likely {
		if t, ok := denseTemperature(float64(p), float64(h)); ok {
			return quantity.Temperature(t), nil
		}
	}
	s, err := AtPressureEnthalpy(p, h)
	return s.Temperature, err
}

// denseTemperature solves for the temperature of region 3 above the critical
// pressure, clear of its ends, by two steps of Newton's method; ok is false
// where they do not do.
func denseTemperature(p, h float64) (t float64, ok bool) {
	const enough = 1e-6 // relative: a miss that the second step squares
	rho, t := denseStart(p, h)
	for step := 0; ; step++ {
		byDelta, byDeltaDelta, byTau, byTauTau, byDeltaTau := region3Slopes(rho, t)
		a := helmholtzOf(rho, t, 0, byDelta, byDeltaDelta, byTau, byTauTau, byDeltaTau)
		missP, miss := a.p-p, a.h-h
		determinant := a.pByRho*a.hByT - a.pByT*a.hByRho
		rho -= (missP*a.hByT - miss*a.pByT) / determinant
		t -= (a.pByRho*miss - a.hByRho*missP) / determinant
		if math.Abs(missP) <= enough*p && math.Abs(miss) <= enough*math.Abs(h) {
			return t, t > regionsEnd+margin && p > boundary23(t+margin) && rho > thinnest && rho < densest
		}
		if step > 1 || !(rho > thinnest && rho < densest && t > regionsEnd && t < hottest3) {
			return 0, false
		}
	}
}

const (
	// Between these pressures, in Pa, the saturation line ends regions 1 and 2.
	fastLowest, fastHighest = 700.0, 16.53e6
	// halfway lies between the enthalpies of liquid of region 1 and of vapour of
	// region 2 at any pressure, in J/kg.
	halfway = 2e6
	// Between these, in J/kg, lies most of region 3 above the critical pressure,
	// and little else; from the knee, in Pa, the upper one rises.
	denseLowest, denseHighest = 1.635e6, 2.607e6
	denseKnee, denseRise      = 40e6, 3.4e-3
	// margin is more than the backward equations of regions 1 and 2 are off by,
	// in K: 25 mK by IAPWS R7-97(2012) section 5.2.
	margin = 0.1
	// near is a miss in J/kg after one step that another one takes to rounding.
	near = 1.0
)

// coordinate is what an isobar is walked along by: enthalpy or entropy.
type coordinate struct {
	name, unit string
	scale      float64 // below which an error counts absolutely
	// jump is more than any two regions differ by where they meet.
	jump float64
	// In regions 1, 2 and 5 at p and t: the value and its cp.
	in1, in2, in5 func(p, t float64) (value, cp float64)
	// perT tells entropy, ds = cp dT/T, from enthalpy, dh = cp dT.
	perT bool
	// Starting values.
	start1, start2 func(p, value float64) (t float64)
	start3         func(p, value float64) (rho, t float64)
}

// of reads the value of a state.
func (c *coordinate) of(s *State) float64 {
	if c.perT {
		return s.Entropy
	}
	return s.Enthalpy
}

// in3 reads the value of region 3 and its derivatives.
func (c *coordinate) in3(a *helmholtz) (value, byRho, byT float64) {
	if c.perT {
		return a.s, a.sByRho, a.sByT
	}
	return a.h, a.hByRho, a.hByT
}

var enthalpy = coordinate{
	name: "enthalpy", unit: "J/kg", scale: 1e3, jump: 400,
	in1: region1EnthalpyHeat, in2: region2EnthalpyHeat, in5: region5EnthalpyHeat,
	start1: backwardTemperature1ByEnthalpy, start2: vapourStart, start3: denseStart,
}

var entropy = coordinate{
	name: "entropy", unit: "J/(kg K)", scale: 1, jump: 0.5,
	in1: region1EntropyHeat, in2: entropy2, in5: entropy5, perT: true,
	start1: backwardTemperature1ByEntropy, start2: vapourStartByEntropy, start3: denseStartByEntropy,
}

func entropy2(p, t float64) (s, cp float64) {
	s, cp = region2EntropyHeat(p, t)
	return s - gasConstant*math.Log(p*1e-6), cp
}

func entropy5(p, t float64) (s, cp float64) {
	s, cp = region5EntropyHeat(p, t)
	return s - gasConstant*math.Log(p*1e-6), cp
}

// vapourStart picks among Eqs. 22 to 24 of IAPWS R7-97(2012), with the bound of
// Eq. 20 between the last two.
func vapourStart(p, h float64) float64 {
	if p <= 4e6 {
		return backwardTemperature2aByEnthalpy(p, h)
	}
	if p*1e-6 <= release.Boundary2bc(h*1e-3) {
		return backwardTemperature2bByEnthalpy(p, h)
	}
	return backwardTemperature2cByEnthalpy(p, h)
}

// vapourStartByEntropy picks among Eqs. 25 to 27. Below the pressures of the
// first one vapour is an ideal gas, whose entropy falls with the logarithm of
// the pressure.
func vapourStartByEntropy(p, s float64) float64 {
	const lowest = 1e3 // Pa
	if p < lowest {
		s += gasConstant * math.Log(p/lowest)
		p = lowest
	}
	switch {
	case p <= 4e6:
		return backwardTemperature2aByEntropy(math.Sqrt(math.Sqrt(p*1e-6)), s)
	case s >= 5850:
		return backwardTemperature2bByEntropy(p, s)
	}
	return backwardTemperature2cByEntropy(p, s)
}

// denseStart picks between regions 3a and 3b of IAPWS SR3-03(2014) by its Eq. 1.
func denseStart(p, h float64) (rho, t float64) {
	if h*1e-3 <= release.Boundary3ab(p*1e-6) {
		return 1 / backwardVolume3aByEnthalpy(p, h), backwardTemperature3aByEnthalpy(p, h)
	}
	return 1 / backwardVolume3bByEnthalpy(p, h), backwardTemperature3bByEnthalpy(p, h)
}

// denseStartByEntropy picks by the critical entropy.
func denseStartByEntropy(p, s float64) (rho, t float64) {
	if s <= 4412.02148223476 {
		return 1 / backwardVolume3aByEntropy(p, s), backwardTemperature3aByEntropy(p, s)
	}
	return 1 / backwardVolume3bByEntropy(p, s), backwardTemperature3bByEntropy(p, s)
}

// settle polishes a temperature in K on the equation of a region by Newton's
// method: value rises with t at constant p, nearly straight.
func settle(in func(p, t float64) (value, cp float64), c *coordinate, p, value, t float64) float64 {
	// A miss below quadratic leaves less than rounding after its own step.
	const quadratic = 1e-7
	enough := quadratic * max(math.Abs(value), c.scale)
	for range mostSteps {
		at, cp := in(p, t)
		miss := at - value
		if c.perT {
			cp /= t
		}
		t -= miss / cp
		if math.Abs(miss) <= enough {
			break
		}
	}
	return t
}

// alongIsobar finds the state at p with a value of c. Where two regions meet
// and differ a little, the one with the lower number answers for what both, or
// neither, have.
func alongIsobar(c *coordinate, p, value float64) (State, error) {
	if !(p >= lowestPressure && p <= highestPressure) {
		return State{}, outside("pressure", "Pa", p, lowestPressure, highestPressure)
	}
	if math.IsNaN(value) || math.IsInf(value, 0) {
		return State{}, c.outsideAt(p, value)
	}
	switch {
	case p < lineStart():
		return vapourOrHotter(c, p, value, coldest)
	case p <= lineJoint():
		line := onLineAt(p)
		if wettest, _ := c.in1(p, line); value < wettest {
			return liquidState(c, p, value, 0)
		}
		if driest, _ := c.in2(p, line); value > driest {
			return vapourOrHotter(c, p, value, line)
		}
		liquid, vapour := saturated(p, line)
		return between(c, liquid, vapour, value), nil
	}
	if edge, _ := c.in1(p, regionsEnd); value <= edge {
		neighbour := 0
		if value > edge-c.jump && value >= c.dense(p, regionsEnd) {
			neighbour = 3
		}
		return liquidState(c, p, value, neighbour)
	} else if value < edge+c.jump && value < c.dense(p, regionsEnd) {
		return liquidState(c, p, value, 3)
	}
	end := boundary23Temperature(p)
	edge, _ := c.in2(p, end)
	if value >= edge {
		s, err := vapourOrHotter(c, p, value, end)
		if err == nil && value < edge+c.jump && value <= c.dense(p, end) {
			s.Neighbour = 3
		}
		return s, err
	}
	if value > edge-c.jump && value > c.dense(p, end) {
		return vapourState(c, p, value, 3)
	}
	return denseState(c, p, value, end)
}

// dense is the value of region 3 at an end of an isobar.
func (c *coordinate) dense(p, t float64) float64 {
	rho, _ := density3(p, t, t <= critical && p > saturationPressure(t) || t > critical && p > lineAbove(t))
	a := region3(rho, t)
	value, _, _ := c.in3(&a)
	return value
}

// between is wet steam with a value of c.
func between(c *coordinate, liquid, vapour State, value float64) State {
	from, to := c.of(&liquid), c.of(&vapour)
	x := 0.0
	if to > from {
		x = min(max((value-from)/(to-from), 0), 1)
	}
	return mixture(liquid, vapour, x)
}

func liquidState(c *coordinate, p, value float64, neighbour int) (State, error) {
	lowest, _ := c.in1(p, coldest)
	if value < lowest-roundingOf(c, value) {
		return State{}, c.outsideAt(p, value)
	}
	s := liquidAt(c, p, value)
	s.Neighbour = neighbour
	return s, nil
}

// liquidAt solves for liquid of region 1, wherever its equation leads.
func liquidAt(c *coordinate, p, value float64) State {
	t := settle(c.in1, c, p, value, c.start1(p, value))
	s := State{Pressure: quantity.Pressure(p), Temperature: quantity.Temperature(t), Phase: CompressedLiquid}
	fill1(&s, p, t)
	return s
}

// roundingOf is how far beyond a limit a value still counts as the limit.
func roundingOf(c *coordinate, value float64) float64 {
	return 1e-12 * max(math.Abs(value), c.scale)
}

func vapourState(c *coordinate, p, value float64, neighbour int) (State, error) {
	t := settle(c.in2, c, p, value, c.start2(p, value))
	s := State{Pressure: quantity.Pressure(p), Temperature: quantity.Temperature(t), Neighbour: neighbour}
	fill2(&s, p, t)
	s.Phase = phaseOf(p, t, false)
	return s, nil
}

// vapourOrHotter answers from region 2, which begins at lowest in K, or from
// region 5.
func vapourOrHotter(c *coordinate, p, value, lowest float64) (State, error) {
	if coolest, _ := c.in2(p, lowest); value < coolest-roundingOf(c, value) {
		return State{}, c.outsideAt(p, value)
	}
	edge, _ := c.in2(p, hottest2)
	beyond := edge
	if p <= highest5 {
		beyond, _ = c.in5(p, hottest2)
	}
	switch {
	case value <= edge:
		neighbour := 0
		if value >= beyond && p <= highest5 {
			neighbour = 5
		}
		return vapourState(c, p, value, neighbour)
	case p > highest5:
		if value > edge+roundingOf(c, value) {
			return State{}, c.outsideAt(p, value)
		}
		return vapourState(c, p, value, 0)
	case value < beyond:
		return vapourState(c, p, value, 5)
	}
	top, _ := c.in5(p, hottest5)
	if value > top+roundingOf(c, value) {
		return State{}, c.outsideAt(p, value)
	}
	// Between its ends the value is nearly straight in t.
	t := hottest2 + (hottest5-hottest2)*(value-beyond)/(top-beyond)
	t = min(settle(c.in5, c, p, value, t), hottest5)
	s := State{Pressure: quantity.Pressure(p), Temperature: quantity.Temperature(t)}
	fill5(&s, p, t)
	s.Phase = phaseOf(p, t, false)
	return s, nil
}

// outsideAt refuses a value that no state at p has.
func (c *coordinate) outsideAt(p, value float64) error {
	var low, high float64
	if p < lineStart() {
		low, _ = c.in2(p, coldest)
	} else {
		low, _ = c.in1(p, coldest)
	}
	if p <= highest5 {
		high, _ = c.in5(p, hottest5)
	} else {
		high, _ = c.in2(p, hottest2)
	}
	return &fault.Range{Quantity: c.name, Unit: c.unit, Source: "IAPWS R7-97(2012) at this pressure", Value: value, Min: low, Max: high}
}

// denseState answers from region 3, or from the wet steam between its phases,
// on an isobar that ends at end in K.
func denseState(c *coordinate, p, value, end float64) (State, error) {
	low, high := regionsEnd, end
	dense, one := true, true
	if p < lineTop() {
		line := onLineAt(p)
		liquid, vapour := saturated(p, line)
		from, to := c.of(&liquid), c.of(&vapour)
		if value >= from && value <= to {
			return between(c, liquid, vapour, value), nil
		}
		dense, one = value < from, false
		if dense {
			high = line
		} else {
			low = line
		}
	}
	rho, t, ok := c.polish3(p, value, low, high)
	if !ok || !one && dense != (rho > criticalDensity) {
		rho, t, ok = c.bracket3(p, value, low, high, dense)
	}
	s := State{Pressure: quantity.Pressure(p), Temperature: quantity.Temperature(t)}
	fill3(&s, rho, t)
	if !ok {
		return State{}, unfound((c.of(&s)-value)/max(math.Abs(value), c.scale), c.name+" at this pressure")
	}
	s.Phase = phaseOf(p, t, dense)
	return s, nil
}

// polish3 solves both p and the value for density and temperature by Newton's
// method, which stays regular at the critical point, from the start that the
// backward equations give. low and high bound the temperature.
func (c *coordinate) polish3(p, value, low, high float64) (rho, t float64, ok bool) {
	const steps, beyond, tolerance = 20, 1e-6, 1e-12
	rho, t = c.start3(p, value)
	for range steps {
		a := region3(rho, t)
		at, byRho, byT := c.in3(&a)
		missP, miss := a.p-p, at-value
		if math.Abs(missP) <= tolerance*p && math.Abs(miss) <= tolerance*max(math.Abs(value), c.scale) {
			return rho, t, t >= low-beyond && t <= high+beyond && a.pByRho >= 0
		}
		determinant := a.pByRho*byT - a.pByT*byRho
		rho -= (missP*byT - miss*a.pByT) / determinant
		t -= (a.pByRho*miss - byRho*missP) / determinant
		if !(rho > thinnest && rho < densest && t > regionsEnd-10 && t < hottest3+10) {
			return rho, t, false
		}
	}
	return rho, t, false
}

// bracket3 solves for the temperature between low and high, with the density at
// each one found apart: slower, but it can not leave its side.
func (c *coordinate) bracket3(p, value, low, high float64, dense bool) (rho, t float64, ok bool) {
	const tolerance = 1e-11
	bound := [2]float64{low, high}
	for range 2 * mostSteps {
		t = (bound[0] + bound[1]) / 2
		rho, _ = density3(p, t, dense)
		a := region3(rho, t)
		at, _, _ := c.in3(&a)
		miss := at - value
		if math.Abs(miss) <= tolerance*max(math.Abs(value), c.scale) {
			return rho, t, math.Abs(a.p-p) <= 1e-9*p
		}
		if miss > 0 {
			bound[1] = t
		} else {
			bound[0] = t
		}
		if bound[1]-bound[0] <= 1e-13*t {
			break
		}
	}
	// So close to the critical point a temperature is too coarse to tell states
	// apart: the density tells them.
	return c.bracketDensity(p, value, t)
}

// bracketDensity halves in density at a temperature, close to the critical
// point, where the value falls as density rises and pressure hardly moves.
func (c *coordinate) bracketDensity(p, value, t float64) (rho, at float64, ok bool) {
	const reach, tolerance = 0.1, 1e-9
	low, high := criticalDensity*(1-reach), criticalDensity*(1+reach)
	for range mostSteps {
		rho = (low + high) / 2
		a := region3(rho, t)
		is, _, _ := c.in3(&a)
		if is > value {
			low = rho
		} else {
			high = rho
		}
	}
	a := region3(rho, t)
	is, _, _ := c.in3(&a)
	return rho, t, math.Abs(a.p-p) <= tolerance*p && math.Abs(is-value) <= tolerance*max(math.Abs(value), c.scale)
}
