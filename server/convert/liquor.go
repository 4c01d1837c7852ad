package convert

import (
	"strings"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/liquor"
	"calandria.example/calandria/engine/quantity"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// Liquor makes the engine's liquor: one of the catalogue, or a caller's own.
func Liquor(named *calandriav1.Liquor, own *calandriav1.CustomLiquor) (*liquor.Liquor, error) {
	switch {
	case named != nil && own != nil:
		return nil, &fault.Invalid{Field: "liquor", Value: "given beside custom_liquor", Limit: "one of the two", WayOut: "drop one of them"}
	case named != nil:
		return liquor.ByID(named.GetId())
	case own != nil:
		return CustomLiquor(own)
	}
	return nil, &fault.Invalid{
		Field: "liquor", Value: "left out", Limit: "liquor or custom_liquor",
		WayOut: "name a liquor of the catalogue (" + strings.Join(liquor.IDs(), ", ") + "), or describe one in custom_liquor",
	}
}

// CustomLiquor makes the engine's liquor from a caller's own figures.
func CustomLiquor(m *calandriav1.CustomLiquor) (*liquor.Liquor, error) {
	var c liquor.Custom
	c.Source = m.GetSource()
	switch rise := m.GetRise().(type) {
	case *calandriav1.CustomLiquor_RiseK:
		c.RiseConstant = &rise.RiseK
	case *calandriav1.CustomLiquor_RisePolynomial:
		c.RisePolynomial = rise.RisePolynomial.GetCoefficientsK()
	case *calandriav1.CustomLiquor_Duhring:
		for _, line := range rise.Duhring.GetLines() {
			c.Duhring = append(c.Duhring, liquor.DuhringLine{
				Solids: line.GetSolidsFraction(), Slope: line.GetSlope(), Intercept: line.GetInterceptC(),
			})
		}
	case *calandriav1.CustomLiquor_RiseTable:
		for _, row := range rise.RiseTable.GetRows() {
			points := make([]liquor.RisePoint, len(row.GetPoints()))
			for i, point := range row.GetPoints() {
				points[i] = liquor.RisePoint{Water: quantity.Celsius(point.GetWaterBoilingTemperatureC()), Rise: point.GetRiseK()}
			}
			c.RiseTable = append(c.RiseTable, liquor.RiseRow{Solids: row.GetSolidsFraction(), Points: points})
		}
	case *calandriav1.CustomLiquor_Solute:
		c.Solute = &liquor.Solute{MolarMass: rise.Solute.GetMolarMassGPerMol(), Factor: rise.Solute.GetVanTHoffFactor()}
	}
	switch heat := m.GetHeat().(type) {
	case *calandriav1.CustomLiquor_SpecificHeatKjPerKgK:
		c.SpecificHeat = []float64{heat.SpecificHeatKjPerKgK * 1e3}
	case *calandriav1.CustomLiquor_SpecificHeatPolynomial:
		for _, coefficient := range heat.SpecificHeatPolynomial.GetCoefficientsKjPerKgK() {
			c.SpecificHeat = append(c.SpecificHeat, coefficient*1e3)
		}
	case *calandriav1.CustomLiquor_EnthalpyTable:
		for _, row := range heat.EnthalpyTable.GetRows() {
			points := make([]liquor.EnthalpyPoint, len(row.GetPoints()))
			for i, point := range row.GetPoints() {
				points[i] = liquor.EnthalpyPoint{
					Temperature: quantity.Celsius(point.GetTemperatureC()),
					Enthalpy:    quantity.KilojoulesPerKilogram(point.GetEnthalpyKjPerKg()),
				}
			}
			c.EnthalpyTable = append(c.EnthalpyTable, liquor.EnthalpyRow{Solids: row.GetSolidsFraction(), Points: points})
		}
	}
	switch density := m.GetDensity().(type) {
	case *calandriav1.CustomLiquor_DensityKgPerM3:
		c.Density = []float64{density.DensityKgPerM3}
	case *calandriav1.CustomLiquor_DensityPolynomial:
		c.Density = density.DensityPolynomial.GetCoefficientsKgPerM3()
	}
	return liquor.New(c)
}
