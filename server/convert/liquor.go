package convert

import (
	"calandria.example/calandria/engine/liquor"
	"calandria.example/calandria/engine/quantity"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

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
