package liquor

import (
	"errors"
	"fmt"
	"math"
	"strconv"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
)

// Custom holds a caller's own figures. Exactly one of the five rises and one
// of the two kinds of heat must be set.
type Custom struct {
	Source string // where the figures come from

	RiseConstant   *float64      // K, the same everywhere
	RisePolynomial []float64     // K, coefficients of rising powers of the solids fraction
	Duhring        []DuhringLine // in rising order of solids
	RiseTable      []RiseRow     // in rising order of solids
	Solute         *Solute

	SpecificHeat  []float64     // J/(kg K), coefficients of rising powers of the solids fraction
	EnthalpyTable []EnthalpyRow // in rising order of solids

	Density []float64 // kg/m3, coefficients of rising powers of the solids fraction; none if not known
}

// DuhringLine is t_liquor = Intercept + Slope t_water, both in degC, for one
// strength.
type DuhringLine struct {
	Solids    float64 // kg/kg
	Slope     float64
	Intercept float64 // degC
}

// RiseRow holds the rises of one strength.
type RiseRow struct {
	Solids float64 // kg/kg
	Points []RisePoint
}

// RisePoint is one reading.
type RisePoint struct {
	Water quantity.Temperature // K, boiling temperature of water, rising within a row
	Rise  float64              // K
}

// Solute makes an ideal solution.
type Solute struct {
	MolarMass float64 // g/mol
	Factor    float64 // particles that a molecule gives
}

// EnthalpyRow holds the enthalpies of one strength.
type EnthalpyRow struct {
	Solids float64 // kg/kg
	Points []EnthalpyPoint
}

// EnthalpyPoint is one reading of a chart.
type EnthalpyPoint struct {
	Temperature quantity.Temperature // K, rising within a row
	Enthalpy    quantity.Enthalpy    // J/kg, 0 for liquid water at 0 degC
}

// New makes a liquor from a caller's figures. It refuses, with one
// *fault.Invalid for each problem (joined), figures that are not finite, not
// in rising order, or missing.
func New(c Custom) (*Liquor, error) {
	var problems []error
	complain := func(field, value, limit, wayOut string) {
		problems = append(problems, &fault.Invalid{Field: field, Value: value, Limit: limit, WayOut: wayOut})
	}
	l := &Liquor{source: c.Source}
	switch {
	case c.RiseConstant != nil:
		if !(*c.RiseConstant >= 0 && *c.RiseConstant <= largestRise) {
			complain("custom_liquor.rise_k", number(*c.RiseConstant), "0 to 200 K", "give the rise as a difference in K")
		}
		l.rise = constantRise(*c.RiseConstant)
	case len(c.RisePolynomial) > 0:
		checkFinite(c.RisePolynomial, "custom_liquor.rise_polynomial.coefficients_k", complain)
		l.rise = polynomialRise(trimmed(c.RisePolynomial))
	case len(c.Duhring) > 0:
		l.rise = newDuhring(c.Duhring, complain)
	case len(c.RiseTable) > 0:
		l.rise = newRiseTable(c.RiseTable, complain)
	case c.Solute != nil:
		if !(c.Solute.MolarMass >= 1 && c.Solute.MolarMass <= 1e7) {
			complain("custom_liquor.solute.molar_mass_g_per_mol", number(c.Solute.MolarMass), "1 to 10000000 g/mol", "give the molar mass of what is dissolved")
		}
		if !(c.Solute.Factor > 0 && c.Solute.Factor <= 20) {
			complain("custom_liquor.solute.van_t_hoff_factor", number(c.Solute.Factor), "above 0, at most 20", "give the particles that one molecule gives: 1 for sugar, 2 for common salt")
		}
		l.rise = solute{c.Solute.MolarMass, c.Solute.Factor}
	default:
		complain("custom_liquor", "without a boiling-point rise", "one of rise_k, rise_polynomial, duhring, rise_table, solute", "give rise_k = 0 if the liquor boils like water")
	}
	switch {
	case len(c.SpecificHeat) > 0:
		checkFinite(c.SpecificHeat, "custom_liquor.specific_heat_polynomial.coefficients_kj_per_kg_k", complain)
		l.heat = specificHeat(trimmed(c.SpecificHeat))
	case len(c.EnthalpyTable) > 0:
		l.heat = newEnthalpyTable(c.EnthalpyTable, complain)
	default:
		complain("custom_liquor", "without heat", "one of specific_heat_kj_per_kg_k, specific_heat_polynomial, enthalpy_table", "give at least a specific heat")
	}
	if len(c.Density) > 0 {
		checkFinite(c.Density, "custom_liquor.density_polynomial.coefficients_kg_per_m3", complain)
		l.dense = polynomialDensity(trimmed(c.Density))
	}
	if len(problems) > 0 {
		return nil, errors.Join(problems...)
	}
	return l, nil
}

type complaint func(field, value, limit, wayOut string)

func checkFinite(values []float64, field string, complain complaint) {
	for i, v := range values {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			complain(fmt.Sprintf("%s[%d]", field, i), number(v), "a finite number", "leave it out")
		}
	}
}

// trimmed is c without zeros at its end, so that a polynomial's length tells
// whether it depends on its variable.
func trimmed(c []float64) []float64 {
	for len(c) > 1 && c[len(c)-1] == 0 {
		c = c[:len(c)-1]
	}
	return c
}

func number(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
