// Package liquor tells how a liquor differs from water: how much hotter it
// boils and how much heat it holds.
package liquor

import (
	"calandria.example/calandria/engine/evidence"
)

// Liquor is one liquor with its figures. It is made by New, does not change
// after that and may be shared.
type Liquor struct {
	source string
	rise   riseModel
	heat   heatModel
}

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

// Models returns what the liquor's figures rest on.
func (l *Liquor) Models() []evidence.Model {
	models := []evidence.Model{l.rise.model(), l.heat.model()}
	for i := range models {
		models[i].Grade = evidence.CallerSupplied
		models[i].Source = "given by the caller"
		if l.source != "" {
			models[i].Source += ": " + l.source
		}
	}
	return models
}
