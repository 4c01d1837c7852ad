package liquor

import (
	"fmt"
	"math"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
)

// sucroseActivity is the water activity of pure sucrose solutions by Starzak and
// Peacock, Zuckerindustrie 122 (1997): a_w = (1 - x) exp(Q/(R T) x^2 (1 + a x +
// b x^2)), x the mole fraction of sucrose.
func sucroseActivity(w, t float64) (logarithm, byW, byT float64) {
	const (
		energy     = -17638.0 // J/mol
		a, b       = -1.0038, -0.24653
		gas        = 8.314472 // J/(mol K)
		ratio      = 342.297 / waterMass
		dilute     = 0.0
		saturation = 0.98 // kg/kg: stronger is no liquor
	)
	w = min(max(w, dilute), saturation)
	whole := w + ratio*(1-w)
	x := w / whole
	xByW := ratio / (whole * whole)
	excess := energy / (gas * t)
	shape := x * x * (1 + x*(a+x*b))
	byX := -1/(1-x) + excess*x*(2+x*(3*a+x*4*b))
	return math.Log1p(-x) + excess*shape, byX * xByW, -excess * shape / t
}

// heldActivity is that of the solution that is left where more sucrose is there
// than dissolves.
func heldActivity(w, t float64) (logarithm, byW, byT float64) {
	soluble, solubleByT := sucroseSolubility(t)
	if w <= soluble {
		return sucroseActivity(w, t)
	}
	logarithm, byW, byT = sucroseActivity(soluble, t)
	return logarithm, 0, byT + byW*solubleByT
}

type sucroseRise struct{}

func (sucroseRise) at(w, tw float64) (rise, byW, byTw float64) {
	return activity(heldActivity).riseBy(w, tw)
}

func (sucroseRise) dependsOnSolids() bool { return true }

// sucroseStrongest is how strong, in kg/kg, the figures go.
const sucroseStrongest = 0.95

// sure is how strong, in kg/kg, sucrose's rise is confirmed: old handbook tables
// lie 30 % above the model from there on.
const sure = 0.7

func (sucroseRise) check(w float64) []evidence.Advisory {
	if w <= sure {
		return nil
	}
	return []evidence.Advisory{{
		Code: evidence.OutsideRange, Warning: true, Field: "product.solids_fraction",
		Message: fmt.Sprintf("At solids of %.4g kg/kg the sources for sucrose differ by up to 30 %% of the boiling-point rise.", w),
		Limit:   "0.7 kg/kg",
	}}
}

func (sucroseRise) model() evidence.Model { return evidence.Model{} }

// sucroseHeat is liquid water's enthalpy, and the specific heat by which a
// solution differs from water, by Bubnik et al. (1995) for pure sucrose,
// integrated from 0 degC: heat of dilution is below 1 % of the latent heat.
type sucroseHeat struct{}

func (sucroseHeat) at(w, t float64) (h, byW, byT float64) {
	h, byT = water(t)
	const linear, rise = -100 * (0.0297e3 - 4.6e-2*100), 100 * 7.5e-2 // J/(kg K), J/(kg K2), per solids fraction
	c := t - quantity.Zero
	excess := c * (linear + rise*c/2)
	return h + w*excess, excess, byT + w*(linear+rise*c)
}

func (sucroseHeat) dependsOnSolids() bool { return true }

func (sucroseHeat) check(w, t float64) ([]evidence.Advisory, error) {
	const hottest = quantity.Zero + 150
	if !(w >= 0 && w <= sucroseStrongest) {
		return nil, &fault.Range{Quantity: "solids of sucrose", Source: "liquor sucrose", Value: w, Min: 0, Max: sucroseStrongest}
	}
	if !(t <= hottest) {
		return nil, &fault.Range{Quantity: "temperature of sucrose", Unit: "K", Source: "liquor sucrose", Value: t, Min: quantity.Zero, Max: hottest}
	}
	if soluble, _ := sucroseSolubility(t); w > soluble {
		return []evidence.Advisory{{
			Code: evidence.Crystallisation, Warning: true, Field: "product.solids_fraction",
			Message: fmt.Sprintf("At %.4g degC sucrose dissolves to solids of %.4g kg/kg; at %.4g kg/kg a fraction of %.3g is crystals, and the liquor boils like the saturated one.", t-quantity.Zero, soluble, w, (w-soluble)/(1-soluble)),
			Limit:   fmt.Sprintf("%.4g kg/kg", soluble),
		}}, nil
	}
	return nil, nil
}

func (sucroseHeat) model() evidence.Model { return evidence.Model{} }

// sucroseSolubility is the solids fraction of a saturated solution at t in K, by
// Vavrinecz (1962), 0 to 100 degC.
func sucroseSolubility(t float64) (solids, byT float64) {
	const hottest = 120.0 // degC, to which it is held to go on
	c := t - quantity.Zero
	held := min(max(c, 0), hottest)
	solids = 0.64447 + held*(8.222e-4+held*(1.6169e-5+held*(-1.558e-8-held*4.63e-10)))
	if held == c {
		byT = 8.222e-4 + held*(2*1.6169e-5+held*(-3*1.558e-8-held*4*4.63e-10))
	}
	return solids, byT
}

// sucroseDensity is liquid water's, times what Bubnik et al. (1995) have for
// solids at 20 degC.
type sucroseDensity struct{}

func (sucroseDensity) at(w, t float64) (rho, byW, byT float64) {
	rho, _, byT = waterDensity{}.at(0, t)
	brix := 100 * w
	factor := 1 + brix*(brix+200)/54000
	return rho * factor, rho * 100 * (2*brix + 200) / 54000, byT * factor
}

func (sucroseDensity) dependsOnSolids() bool { return true }

func sucroseModels() []evidence.Model {
	return []evidence.Model{
		{ID: "sucrose-rise", Revision: "1997", Source: "Starzak and Peacock, Zuckerindustrie 122 (1997), water activity of sucrose", ValidRange: "solids to 0.7 kg/kg confirmed, to 0.95 by the model", Grade: evidence.Confirmed, Inside: true},
		{ID: "sucrose-heat", Revision: "1995", Source: "Bubnik et al., Sugar Technologists Manual (1995), specific heat and density, on IAPWS water", ValidRange: "solids to 0.95 kg/kg, 0 to 150 degC; no heat of dilution", Grade: evidence.Approximate, Inside: true},
	}
}
