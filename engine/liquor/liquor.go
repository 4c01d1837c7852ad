// Package liquor tells how a liquor differs from water: how much hotter it
// boils and how much heat it holds.
package liquor

import (
	"fmt"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
)

// Liquor is one liquor with its figures. It is made by New, does not change
// after that and may be shared.
type Liquor struct {
	source string
	rise   riseModel
	heat   heatModel
	dense  densityModel // nil for a liquor whose density is not known

	// solubility is the solids fraction of saturated liquor at t in K, with its
	// slope; nil if it is not known.
	solubility func(t float64) (solids, byT float64)

	strongest float64 // kg/kg; 0 for a caller's own, whose figures may reach anywhere

	id     string           // in the catalogue; "" for a caller's own
	pure   bool             // without solids
	models []evidence.Model // of the catalogue
}

// ID is the liquor's id in the catalogue, "" for a caller's own.
func (l *Liquor) ID() string { return l.id }

// Pure is true for water, which has no solids.
func (l *Liquor) Pure() bool { return l.pure }

// riseModel gives the boiling-point rise in K at solids fraction w and at the
// boiling temperature of water tw in K, with its derivatives.
type riseModel interface {
	at(w, tw float64) (rise, byW, byTw float64)
	dependsOnSolids() bool
	check(w float64) (remarks []evidence.Advisory)
	model() evidence.Model
}

// heatModel gives the specific enthalpy in J/kg at solids fraction w and
// temperature t in K, with its derivatives; 0 for liquid water at 0 degC.
type heatModel interface {
	at(w, t float64) (h, byW, byT float64)
	dependsOnSolids() bool
	check(w, t float64) (remarks []evidence.Advisory, err error)
	model() evidence.Model
}

// Rise returns the boiling-point rise in K of liquor with solids fraction w,
// 0 to 1, at the pressure at which water boils at tw in K, and its
// derivatives by w and by tw. It is smooth enough for a Newton solver over
// the whole of both ranges; CheckRise tells whether the value may be used.
func (l *Liquor) Rise(w, tw float64) (rise, byW, byTw float64) { return l.rise.at(w, tw) }

// RiseDependsOnSolids is false for a liquor whose rise is the same at any
// strength, so that solids can not be found from temperatures.
func (l *Liquor) RiseDependsOnSolids() bool { return l.rise.dependsOnSolids() }

// Enthalpy returns the specific enthalpy in J/kg of liquor with solids
// fraction w at t in K, and its derivatives by w and by t. CheckEnthalpy
// tells whether the value may be used.
func (l *Liquor) Enthalpy(w, t float64) (h, byW, byT float64) { return l.heat.at(w, t) }

// EnthalpyDependsOnSolids is false for a liquor with one specific heat.
func (l *Liquor) EnthalpyDependsOnSolids() bool { return l.heat.dependsOnSolids() }

// CheckRise returns remarks on a rise taken at solids fraction w.
func (l *Liquor) CheckRise(w float64) []evidence.Advisory { return l.rise.check(w) }

// CheckEnthalpy returns remarks on an enthalpy taken at solids fraction w and
// t in K, or a *fault.Range where the figures do not reach.
func (l *Liquor) CheckEnthalpy(w, t float64) ([]evidence.Advisory, error) {
	return l.heat.check(w, t)
}

// Density returns the density in kg/m3 of liquor with solids fraction w at t in
// K, and its derivatives by w and by t. ok is false if it is not known.
func (l *Liquor) Density(w, t float64) (rho, byW, byT float64, ok bool) {
	if l.dense == nil {
		return 0, 0, 0, false
	}
	rho, byW, byT = l.dense.at(w, t)
	return rho, byW, byT, true
}

// HasDensity tells whether the density is known.
func (l *Liquor) HasDensity() bool { return l.dense != nil }

// DensityDependsOnSolids is false for a liquor with one density.
func (l *Liquor) DensityDependsOnSolids() bool { return l.dense != nil && l.dense.dependsOnSolids() }

// Crystals returns the mass fraction of liquor with solids fraction w at t in K
// that is crystals; known is false for a liquor whose solubility is not known.
func (l *Liquor) Crystals(w, t float64) (fraction float64, known bool) {
	if l.solubility == nil {
		return 0, false
	}
	soluble, _ := l.solubility(t)
	return max(0, (w-soluble)/(1-soluble)), true
}

// Strongest is the solids fraction up to which the liquor's figures reach at any
// temperature.
func (l *Liquor) Strongest() float64 {
	if l.strongest == 0 {
		return 1
	}
	return l.strongest
}

// CheckDensity returns a *fault.Range where the density, at solids fraction w,
// can not be that of a liquor.
func (l *Liquor) CheckDensity(w float64) error {
	const lightest, heaviest = 200, 5000 // kg/m3
	if rho, _, _, ok := l.Density(w, 300); ok && l.id == "" && !(rho >= lightest && rho <= heaviest) {
		return &fault.Range{Quantity: "density of the custom liquor", Unit: "kg/m3", Source: fmt.Sprintf("custom_liquor.density_polynomial at solids %.4g kg/kg", w), Value: rho, Min: lightest, Max: heaviest}
	}
	return nil
}

// Models returns what the liquor's figures rest on.
func (l *Liquor) Models() []evidence.Model {
	if l.id != "" {
		return append([]evidence.Model(nil), l.models...)
	}
	models := []evidence.Model{l.rise.model(), l.heat.model()}
	if l.HasDensity() {
		models = append(models, evidence.Model{ID: "custom-density", ValidRange: "where the caller's figure holds; the same at every temperature", Inside: true})
	}
	for i := range models {
		models[i].Grade = evidence.CallerSupplied
		models[i].Source = "given by the caller"
		if l.source != "" {
			models[i].Source += ": " + l.source
		}
	}
	return models
}
