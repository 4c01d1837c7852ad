package steam

import (
	"errors"
	"math"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
)

// AtEnthalpyEntropy returns the state with h and s, over the range of
// AtPressureTemperature and through the wet steam between. Along an isentrope
// enthalpy rises with pressure, dh = v dp, so that there is one such state at
// most. Where none is it refuses with *fault.Range.
func AtEnthalpyEntropy(h quantity.Enthalpy, s quantity.Entropy) (State, error) {
	low, high, err := isentropeEnds(float64(s))
	if err != nil {
		return State{}, err
	}
	bottom, err := alongIsobar(&entropy, low, float64(s))
	if err != nil {
		return State{}, err
	}
	top, err := alongIsobar(&entropy, high, float64(s))
	if err != nil {
		return State{}, err
	}
	tolerance := roundingOf(&enthalpy, max(math.Abs(bottom.Enthalpy), math.Abs(top.Enthalpy)))
	if !(float64(h) >= bottom.Enthalpy-tolerance && float64(h) <= top.Enthalpy+tolerance) {
		return State{}, &fault.Range{
			Quantity: "enthalpy", Unit: "J/kg", Source: "IAPWS R7-97(2012) at this entropy",
			Value: float64(h), Min: bottom.Enthalpy, Max: top.Enthalpy,
		}
	}
	return climb(float64(h), float64(s), bottom, top)
}

// isentropeEnds returns the lowest and the highest pressure in Pa at which
// there is a state with s. The entropy along the cold end of the range falls
// as pressure rises, but for a little below 1 J/(kg K) that water gains below
// 4 degC, and along the hot end it falls too.
func isentropeEnds(s float64) (low, high float64, err error) {
	vapourLow, _ := entropy2(lowestPressure, coldest)
	hot, _ := entropy5(lowestPressure, hottest5)
	coldHigh, _ := region1EntropyHeat(highestPressure, coldest)
	if !(s >= coldHigh && s <= hot) {
		return 0, 0, outside("entropy", "J/(kg K)", s, coldHigh, hot)
	}
	enough := roundingOf(&entropy, s) / 10
	// The cold end: superheated vapour, wet steam, liquid.
	start := lineStart()
	liquid, _ := region1EntropyHeat(start, coldest)
	vapour, _ := entropy2(start, coldest)
	switch {
	case s >= vapourLow:
		low = lowestPressure
	case s > vapour:
		_, low = falling(func(p float64) float64 { v, _ := entropy2(p, coldest); return v - s }, lowestPressure, start, enough)
	case s >= liquid:
		low = start
	default:
		_, low = falling(func(p float64) float64 { v, _ := region1EntropyHeat(p, coldest); return v - s }, start, highestPressure, enough)
	}
	// The hot end: region 2 above 50 MPa, region 5 below.
	most, _ := entropy2(highestPressure, hottest2)
	step, _ := entropy2(highest5, hottest2)
	hotStep, _ := entropy5(highest5, hottest5)
	switch {
	case s <= most:
		high = highestPressure
	case s <= step:
		high, _ = falling(func(p float64) float64 { v, _ := entropy2(p, hottest2); return v - s }, highest5, highestPressure, enough)
	case s <= hotStep:
		high = highest5
	default:
		high, _ = falling(func(p float64) float64 { v, _ := entropy5(p, hottest5); return v - s }, lowestPressure, highest5, enough)
	}
	return low, high, nil
}

// falling closes in, between low and high, on the place where f passes from
// above 0 to below: it returns both sides, or twice where f counts as 0. It is
// the false-position method in the logarithm, with the Illinois rule.
func falling(f func(p float64) float64, low, high, enough float64) (above, below float64) {
	left, right := f(low), f(high)
	if left <= enough {
		return low, low
	}
	if right >= -enough {
		return high, high
	}
	from, to := math.Log(low), math.Log(high)
	side := 0
	for range mostSteps {
		middle := (from*right - to*left) / (right - left)
		if !(middle > from && middle < to) {
			middle = (from + to) / 2
		}
		switch at := f(math.Exp(middle)); {
		case math.Abs(at) <= enough:
			p := math.Exp(middle)
			return p, p
		case at > 0:
			from, left = middle, at
			if side == 1 {
				right /= 2
			}
			side = 1
		default:
			to, right = middle, at
			if side == -1 {
				left /= 2
			}
			side = -1
		}
	}
	return math.Exp(from), math.Exp(to)
}

// climb walks an isentrope from bottom to top until it has h: Newton's method in
// the pressure for liquid and in its logarithm else, within a bracket.
func climb(h, s float64, bottom, top State) (State, error) {
	tolerance := 1e-12 * max(math.Abs(h), enthalpy.scale)
	low, high := bottom, top
	at := top
	if math.Abs(bottom.Enthalpy-h) < math.Abs(top.Enthalpy-h) {
		at = bottom
	}
	if p := pressureNear(h, s); p > float64(bottom.Pressure) && p < float64(top.Pressure) {
		if near, err := alongIsobar(&entropy, p, s); err == nil {
			at = near
		}
	}
	for range 2 * mostSteps {
		miss := at.Enthalpy - h
		if math.Abs(miss) <= tolerance {
			break
		}
		if miss > 0 {
			high = at
		} else {
			low = at
		}
		p, from, to := float64(at.Pressure), float64(low.Pressure), float64(high.Pressure)
		next := p - miss/at.Volume
		if at.Region != 1 {
			scale := at.Enthalpy - vapourBase
			step := -miss / (at.Volume * p)
			if scale > 0 && h > vapourBase && at.Region != 4 {
				// Of an ideal gas, enthalpy above its base is a power of pressure.
				step = math.Log((h-vapourBase)/scale) * scale / (at.Volume * p)
			}
			next = p * math.Exp(max(min(step, 50), -50))
		}
		if !(next > from && next < to) {
			next = math.Sqrt(from * to)
			if at.Region == 1 {
				next = (from + to) / 2
			}
		}
		if !(next > from && next < to) || to-from <= 4e-16*to {
			break // at a jump, or at the end of what rounding tells apart
		}
		var err error
		if at, err = alongIsobar(&entropy, next, s); err != nil {
			// Water below 4 degC: between two pressures at which it has s there
			// may be some at which it would have to be colder.
			var colder *fault.Range
			if !errors.As(err, &colder) {
				return State{}, err
			}
			at = liquidAt(&entropy, next, s)
		}
	}
	at, err := atJumps(h, s, at)
	if err != nil {
		return State{}, err
	}
	if at.Temperature < coldest-1e-9 {
		return State{}, outside("temperature", "K", float64(at.Temperature), coldest, hottest5)
	}
	return at, nil
}

// Vapour of little pressure has some vapourBase + vapourHeat T of enthalpy, in
// J/kg and K; water has some waterHeat from the triple point on.
const (
	vapourBase, vapourHeat = 1.98e6, 1.86e3
	waterHeat              = 4.2e3
)

// pressureNear guesses the pressure in Pa with h and s: of vapour like an ideal
// gas, or of wet steam, where h - T s is the same as of the liquid.
func pressureNear(h, s float64) float64 {
	if t := (h - vapourBase) / vapourHeat; t > coldest {
		const thin = 1e4 // Pa
		standard, _ := entropy2(thin, min(t, hottest2))
		p := thin * math.Exp((standard-s)/gasConstant)
		if t > critical || p < saturationPressure(t) {
			return p
		}
	}
	t := 400.0
	for range 5 {
		liquid := waterHeat * math.Log(t/coldest)
		t += (h - t*s - waterHeat*(t-coldest) + t*liquid) / (s - liquid)
		if !(t > coldest && t < critical) {
			return 0
		}
	}
	return saturationPressure(t)
}

// atJumps returns near itself; but near to where two regions meet it lets the
// lower-numbered one answer if both have h and s, or if neither has.
func atJumps(h, s float64, near State) (State, error) {
	const reach = 1.0 // K: more than any jump
	p, t := float64(near.Pressure), float64(near.Temperature)
	beside := func(edge float64) bool { return math.Abs(t-edge) < reach }
	switch {
	case near.Region == 4:
		if near.Neighbour = 0; beside(regionsEnd) {
			return wetAtJoint(h, s, near), nil
		}
		return near, nil
	case near.Region == 5 || near.Region == 2 && beside(hottest2) && p <= highest5:
		if beside(hottest2) {
			lower, higher := solve2(h, s, near), solve5(h, s, near)
			return choose(h, s, near, lower, higher, lower.Temperature <= hottest2, higher.Temperature > hottest2)
		}
	case near.Region == 1 && beside(regionsEnd) && p > lineJoint()*0.99, near.Region == 3 && beside(regionsEnd) && 1/near.Volume > criticalDensity:
		lower, higher := solve1(h, s, near), solve3(h, s, near)
		return choose(h, s, near, lower, higher, lower.Temperature <= regionsEnd, higher.Temperature > regionsEnd)
	case (near.Region == 2 || near.Region == 3) && p > lineJoint()*0.99:
		if end := boundary23Temperature(p); beside(end) {
			lower, higher := solve2(h, s, near), solve3(h, s, near)
			return choose(h, s, near, lower, higher,
				float64(lower.Pressure) <= boundary23(float64(lower.Temperature)),
				float64(higher.Pressure) > boundary23(float64(higher.Temperature)))
		}
	}
	return near, nil
}

// choose picks between the states that two neighbouring regions have with the
// same enthalpy and entropy; inside tells whether a state lies in its region.
func choose(h, s float64, near, lower, higher State, lowerInside, higherInside bool) (State, error) {
	meets := func(a State) bool {
		return math.Abs(a.Enthalpy-h) <= 1e-9*max(math.Abs(h), enthalpy.scale) && math.Abs(a.Entropy-s) <= 1e-9*max(math.Abs(s), entropy.scale)
	}
	lowerInside, higherInside = lowerInside && meets(lower), higherInside && meets(higher)
	switch {
	case higherInside && !lowerInside:
		return higher, nil
	case !meets(lower):
		return State{}, unfound((near.Enthalpy-h)/max(math.Abs(h), enthalpy.scale), "enthalpy at this entropy")
	case higherInside == lowerInside:
		lower.Neighbour = higher.Region
	}
	return lower, nil
}

// solve1, solve2, solve3 and solve5 solve for h and s by Newton's method on the
// equation of one region, from a state nearby.
func solve1(h, s float64, from State) State { return solveGibbs(h, s, from, fill1) }
func solve2(h, s float64, from State) State { return solveGibbs(h, s, from, fill2) }
func solve5(h, s float64, from State) State { return solveGibbs(h, s, from, fill5) }

func solveGibbs(h, s float64, from State, fill func(s *State, p, t float64)) State {
	p, t := float64(from.Pressure), float64(from.Temperature)
	var a State
	for range newtonSteps {
		a = State{Pressure: quantity.Pressure(p), Temperature: quantity.Temperature(t)}
		fill(&a, p, t)
		// dh - T ds = v dp, and ds = cp dT/T - (dv/dT) dp.
		missH, missS := h-a.Enthalpy, s-a.Entropy
		dp := (missH - t*missS) / a.Volume
		dt := t / a.Cp * (missS + a.VolumeByTemperature*dp)
		p, t = p+dp, t+dt
		if !(p > 0 && t > coldest/2) || math.Abs(dp) <= 1e-14*p && math.Abs(dt) <= 1e-14*t {
			break
		}
	}
	a.Phase = phaseOf(float64(a.Pressure), float64(a.Temperature), a.Region == 1)
	return a
}

// newtonSteps is more than a start as near as a jump needs.
const newtonSteps = 12

func solve3(h, s float64, from State) State {
	rho, t := 1/from.Volume, float64(from.Temperature)
	for range newtonSteps {
		a := region3(rho, t)
		missH, missS := h-a.h, s-a.s
		determinant := a.hByRho*a.sByT - a.hByT*a.sByRho
		drho := (missH*a.sByT - missS*a.hByT) / determinant
		dt := (a.hByRho*missS - a.sByRho*missH) / determinant
		rho, t = rho+drho, t+dt
		if !(rho > thinnest && rho < densest && t > coldest) || math.Abs(drho) <= 1e-14*rho && math.Abs(dt) <= 1e-14*t {
			break
		}
	}
	p := region3(rho, t).p
	a := State{Pressure: quantity.Pressure(p), Temperature: quantity.Temperature(t)}
	fill3(&a, rho, t)
	a.Phase = phaseOf(p, t, rho > criticalDensity)
	return a
}

// wetAtJoint returns wet steam with h and s next to 623.15 K: with the saturated
// phases of regions 1 and 2 if they have such a state up to there or if those of
// region 3 have none above.
func wetAtJoint(h, s float64, near State) State {
	low, lowWorks := wetBy(h, s, float64(near.Temperature), func(p, t float64) (liquid, vapour State) {
		liquid, vapour = saturated(p, regionsEnd)
		fill1(&liquid, p, t)
		fill2(&vapour, p, t)
		return liquid, vapour
	})
	high, highWorks := wetBy(h, s, float64(near.Temperature), func(p, t float64) (liquid, vapour State) {
		liquid, vapour = saturated(p, math.Nextafter(regionsEnd, critical))
		thick, _ := density3(p, t, true)
		thin, _ := density3(p, t, false)
		fill3(&liquid, thick, t)
		fill3(&vapour, thin, t)
		return liquid, vapour
	})
	lowInside, highInside := lowWorks && low.Temperature <= regionsEnd, highWorks && high.Temperature > regionsEnd
	switch {
	case highInside && !lowInside:
		return high
	case !lowWorks:
		return near
	case highInside == lowInside:
		low.Neighbour = 3
	}
	return low
}

// wetBy solves for the temperature at which the phases that saturated gives mix
// to h and s, by the secant method on h - T s, which is the same for both phases.
func wetBy(h, s, t float64, saturated func(p, t float64) (liquid, vapour State)) (State, bool) {
	var liquid, vapour State
	miss := func(t float64) float64 {
		p := saturationPressure(t)
		liquid, vapour = saturated(p, t)
		liquid.Pressure, liquid.Temperature = quantity.Pressure(p), quantity.Temperature(t)
		vapour.Pressure, vapour.Temperature = liquid.Pressure, liquid.Temperature
		slope := (vapour.Enthalpy - liquid.Enthalpy) / (vapour.Entropy - liquid.Entropy)
		return h - liquid.Enthalpy - slope*(s-liquid.Entropy)
	}
	before, missBefore := t-1e-3, miss(t-1e-3)
	for range newtonSteps {
		now := miss(t)
		if math.Abs(now) <= 1e-11*max(math.Abs(h), enthalpy.scale) || now == missBefore {
			break
		}
		before, missBefore, t = t, now, t-now*(t-before)/(now-missBefore)
		if !(math.Abs(t-regionsEnd) < 5) {
			return State{}, false
		}
	}
	a := between(&entropy, liquid, vapour, s)
	return a, math.Abs(a.Enthalpy-h) <= 1e-9*max(math.Abs(h), enthalpy.scale)
}
