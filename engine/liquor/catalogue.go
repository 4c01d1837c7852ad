package liquor

import (
	"math"
	"strconv"
	"strings"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/numeric"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
)

// IDs lists the liquors of the catalogue.
func IDs() []string { return []string{"water", "sucrose", "sodium-hydroxide"} }

// ByID returns a liquor of the catalogue. It refuses any other id with
// *fault.Invalid.
func ByID(id string) (*Liquor, error) {
	switch id {
	case "water":
		return &Liquor{id: id, pure: true, rise: constantRise(0), heat: waterHeat{}, dense: waterDensity{}, models: steam.Models()[:0]}, nil
	case "sucrose":
		return &Liquor{id: id, rise: sucroseRise{}, heat: sucroseHeat{}, dense: sucroseDensity{}, solubility: sucroseSolubility, strongest: sucroseStrongest, models: sucroseModels()}, nil
	case "sodium-hydroxide":
		return &Liquor{id: id, rise: causticRise{}, heat: causticHeat{}, dense: causticDensity{}, strongest: causticStrongest, models: causticModels()}, nil
	}
	return nil, &fault.Invalid{
		Field: "liquor.id", Value: strconv.Quote(id), Limit: "one of " + strings.Join(IDs(), ", "),
		WayOut: "name one of these, or describe the liquor in custom_liquor",
	}
}

// water returns the enthalpy in J/kg of saturated liquid water at t in K, and
// its slope; beyond the ends of the line it goes on straight, for the sake of
// solvers.
func water(t float64) (h, byT float64) {
	held := min(max(t, quantity.Zero), lineEnd)
	h, byT, _ = steam.LiquidEnthalpy(quantity.Temperature(held)) // held inside of its range
	return h + byT*(t-held), byT
}

// lineEnd is where the saturated liquid of region 1 ends, in K.
const lineEnd = 623.15

// waterHeat is liquid water's own; there are no solids in it.
type waterHeat struct{}

func (waterHeat) at(_, t float64) (h, byW, byT float64) {
	h, byT = water(t)
	return h, 0, byT
}

func (waterHeat) dependsOnSolids() bool { return false }

func (waterHeat) check(w, _ float64) ([]evidence.Advisory, error) {
	const trace = 1e-9 // kg/kg
	if w > trace {
		return nil, &fault.Range{Quantity: "solids of water", Source: "liquor water", Value: w, Min: 0, Max: 0}
	}
	return nil, nil
}

func (waterHeat) model() evidence.Model { return evidence.Model{} }

// densityModel gives the density in kg/m3 at solids fraction w and t in K, with
// its derivatives.
type densityModel interface {
	at(w, t float64) (rho, byW, byT float64)
	dependsOnSolids() bool
}

type waterDensity struct{}

func (waterDensity) at(_, t float64) (rho, byW, byT float64) {
	held := min(max(t, quantity.Zero), lineEnd)
	rho, byT, _ = steam.LiquidDensity(quantity.Temperature(held)) // held inside of its range
	return rho + byT*(t-held), 0, byT
}

func (waterDensity) dependsOnSolids() bool { return false }

// polynomialDensity is a caller's own, in rising powers of the solids fraction.
type polynomialDensity []float64

func (p polynomialDensity) at(w, _ float64) (rho, byW, byT float64) {
	rho, byW = numeric.Polynomial(p, w)
	return rho, byW, 0
}

func (p polynomialDensity) dependsOnSolids() bool { return len(p) > 1 }

// activity is the logarithm of a liquor's water activity at solids fraction w
// and t in K, with its derivatives.
type activity func(w, t float64) (logarithm, byW, byT float64)

// riseBy solves a_w(w, T) psat(T) = psat(Tw) for the boiling temperature T by
// Newton's method, and returns T - Tw with its derivatives, which the same
// equation gives.
func (a activity) riseBy(w, tw float64) (rise, byW, byTw float64) {
	pw, slopeW, err := steam.SaturationSlope(quantity.Temperature(min(max(tw, quantity.Zero), hottestLine)))
	if err != nil {
		return 0, 0, 0
	}
	wanted, wantedByTw := math.Log(float64(pw)), slopeW/float64(pw)
	logarithm, _, _ := a(w, tw)
	t := tw - logarithm/wantedByTw
	var byT float64
	for range 20 {
		held := min(max(t, quantity.Zero), hottestLine)
		p, slope, err := steam.SaturationSlope(quantity.Temperature(held))
		if err != nil {
			return 0, 0, 0
		}
		logarithm, aByW, aByT := a(w, t)
		perT := slope / float64(p)
		byT = perT + aByT
		miss := math.Log(float64(p)) + perT*(t-held) + logarithm - wanted
		step := miss / byT
		t -= step
		byW = -aByW / byT
		if math.Abs(step) <= 1e-9 {
			break
		}
	}
	return t - tw, byW, wantedByTw/byT - 1
}

// hottestLine is the upper end of the saturation line, in K.
const hottestLine = 647.096

// solute is a solution that behaves ideally: molar mass in g/mol and the number
// of particles that a molecule gives, van 't Hoff's factor.
type solute struct{ mass, factor float64 }

const waterMass = 18.015268 // g/mol, IAPWS R7-97's constants give R of water by it

func (s solute) logarithm(w, _ float64) (logarithm, byW, byT float64) {
	const strongest = 0.999
	w = min(max(w, 0), strongest)
	// a_w = n_w/(n_w + i n_s), with w in solids and 1 - w in water.
	ratio := s.factor * waterMass / s.mass
	x := ratio * w / (1 - w)
	return -math.Log1p(x), -ratio / ((1 - w) * (1 - w)) / (1 + x), 0
}

func (s solute) at(w, tw float64) (rise, byW, byTw float64) {
	return activity(s.logarithm).riseBy(w, tw)
}

func (s solute) dependsOnSolids() bool { return true }

func (s solute) check(w float64) []evidence.Advisory {
	const ideal = 0.3 // kg/kg
	if w <= ideal {
		return nil
	}
	return []evidence.Advisory{{
		Code: evidence.OutsideRange, Warning: true, Field: "product.solids_fraction",
		Message: "The rise is that of an ideal solution, which strong liquors are not; give Duhring lines or a table if there are any.",
		Limit:   "0.3 kg/kg",
	}}
}

func (s solute) model() evidence.Model {
	return evidence.Model{ID: "custom-rise-ideal", ValidRange: "dilute solutions; ideal water activity", Inside: true}
}
