package liquor

import (
	"fmt"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/numeric"
	"calandria.example/calandria/engine/quantity"
)

// specificHeat holds the coefficients of cp in J/(kg K) by rising powers of
// the solids fraction; the enthalpy is cp (t - 0 degC), without heat of
// dilution.
type specificHeat []float64

func (s specificHeat) at(w, t float64) (h, byW, byT float64) {
	cp, cpByW := numeric.Polynomial(s, w)
	d := t - quantity.Zero
	return cp * d, cpByW * d, cp
}

func (s specificHeat) dependsOnSolids() bool { return len(s) > 1 }

func (s specificHeat) check(w, _ float64) ([]evidence.Advisory, error) {
	const largest = 20000 // J/(kg K), five times water's
	cp, _ := numeric.Polynomial(s, w)
	if !(cp > 0 && cp <= largest) {
		return nil, &fault.Range{Quantity: "specific heat of the custom liquor", Unit: "J/(kg K)", Source: fmt.Sprintf("custom_liquor.specific_heat_polynomial at solids %.4g kg/kg", w), Value: cp, Min: 0, Max: largest}
	}
	return []evidence.Advisory{{
		Code: evidence.NoHeatOfDilution, Field: "custom_liquor",
		Message: "Liquor enthalpy is a specific heat integrated from 0 degC, without heat of dilution; for caustic and the like give an enthalpy_table.",
	}}, nil
}

func (s specificHeat) model() evidence.Model {
	return evidence.Model{ID: "custom-specific-heat", ValidRange: "where the caller's figure holds; no heat of dilution", Inside: true}
}

// enthalpyTable interpolates within each row by a smooth curve in the
// temperature and between the rows by cubic pieces whose slopes are linear in
// the rows' heights, so that the derivatives by temperature are exact too.
type enthalpyTable struct {
	solids []float64
	rows   []numeric.Curve
}

// By how much a table may be overreached: a hundredth of a kelvin around a
// single point, which stands for a temperature that was itself read off a
// chart.
const (
	pointSlack       = 0.01 // K
	temperatureSlack = 5.0  // K, beyond a row of several points
	solidsSlack      = 0.02 // kg/kg, beyond the first and last row
)

func newEnthalpyTable(rows []EnthalpyRow, complain complaint) heatModel {
	table := &enthalpyTable{}
	for i, row := range rows {
		field := fmt.Sprintf("custom_liquor.enthalpy_table.rows[%d]", i)
		if !(row.Solids >= 0 && row.Solids <= 1) {
			complain(field+".solids_fraction", number(row.Solids), "0 to 1 kg/kg", "give a fraction, not a percentage")
		}
		if len(row.Points) == 0 {
			complain(field+".points", "empty", "at least one point", "give temperature and enthalpy of one reading")
			continue
		}
		t, h := make([]float64, len(row.Points)), make([]float64, len(row.Points))
		for j, point := range row.Points {
			t[j], h[j] = float64(point.Temperature), float64(point.Enthalpy)
		}
		checkFinite(h, field+".points.enthalpy_kj_per_kg", complain)
		if j, ok := numeric.Rising(t); !ok {
			complain(fmt.Sprintf("%s.points[%d].temperature_c", field, j), number(row.Points[j].Temperature.Celsius()), "above that of the point before", "put the points in rising order of temperature, each once")
		}
		table.solids = append(table.solids, row.Solids)
		table.rows = append(table.rows, numeric.NewCurve(t, h))
	}
	if i, ok := numeric.Rising(table.solids); !ok {
		complain(fmt.Sprintf("custom_liquor.enthalpy_table.rows[%d].solids_fraction", i), number(table.solids[i]), "above that of the row before", "put the rows in rising order of solids, each strength once")
	}
	return table
}

func (e *enthalpyTable) dependsOnSolids() bool { return len(e.rows) > 1 }

func (e *enthalpyTable) at(w, t float64) (h, byW, byT float64) {
	n := len(e.rows)
	if n == 1 {
		h, byT = e.rows[0].At(t)
		return h, 0, byT
	}
	k := 0
	for k < n-2 && w >= e.solids[k+1] {
		k++
	}
	// Slopes of three neighbours each: those of the parabola through them.
	var heights, slopes [4]float64
	first := max(k-1, 0)
	last := min(k+2, n-1)
	for i := first; i <= last; i++ {
		heights[i-first], slopes[i-first] = e.rows[i].At(t)
	}
	low, high := k-first, k+1-first
	h0, d0 := heights[low], slopes[low]
	h1, d1 := heights[high], slopes[high]
	s0, s0ByT := e.slopeAt(k, first, heights), e.slopeAt(k, first, slopes)
	s1, s1ByT := e.slopeAt(k+1, first, heights), e.slopeAt(k+1, first, slopes)
	x0, x1 := e.solids[k], e.solids[k+1]
	switch {
	case w <= x0:
		return h0 + s0*(w-x0), s0, d0 + s0ByT*(w-x0)
	case w >= x1:
		return h1 + s1*(w-x1), s1, d1 + s1ByT*(w-x1)
	}
	h, byW = numeric.Hermite(w, x0, x1, h0, h1, s0, s1)
	byT, _ = numeric.Hermite(w, x0, x1, d0, d1, s0ByT, s1ByT)
	return h, byW, byT
}

// slopeAt is the slope by solids at row i of values given from row first on.
func (e *enthalpyTable) slopeAt(i, first int, values [4]float64) float64 {
	n := len(e.rows)
	if n == 2 {
		return (values[1] - values[0]) / (e.solids[1] - e.solids[0])
	}
	secant := func(j int) float64 {
		return (values[j+1-first] - values[j-first]) / (e.solids[j+1] - e.solids[j])
	}
	switch i {
	case 0:
		return secant(0)
	case n - 1:
		return secant(n - 2)
	}
	left, right := e.solids[i]-e.solids[i-1], e.solids[i+1]-e.solids[i]
	return (secant(i-1)*right + secant(i)*left) / (left + right)
}

func (e *enthalpyTable) check(w, t float64) ([]evidence.Advisory, error) {
	const same = 1e-9
	n := len(e.rows)
	low, high := e.solids[0], e.solids[n-1]
	slack := solidsSlack
	if n == 1 {
		slack = same
	}
	if !(w >= low-slack && w <= high+slack) {
		return nil, &fault.Range{Quantity: "solids fraction", Source: "custom_liquor.enthalpy_table", Value: w, Min: low, Max: high}
	}
	var remarks []evidence.Advisory
	if w < low-same || w > high+same {
		remarks = append(remarks, evidence.Advisory{
			Code: evidence.OutsideRange, Warning: true, Field: "custom_liquor.enthalpy_table",
			Message: fmt.Sprintf("Solids of %.4g kg/kg lie beyond the table's %.4g to %.4g; it was extended.", w, low, high),
			Limit:   fmt.Sprintf("%.4g to %.4g kg/kg", low, high),
		})
	}
	for i, row := range e.rows {
		near := i > 0 && w > e.solids[i-1]+same || w >= e.solids[i]-same || i == 0
		near = near && (i < n-1 && w < e.solids[i+1]-same || w <= e.solids[i]+same || i == n-1)
		if !near {
			continue
		}
		first, last := row.First(), row.Last()
		slack := temperatureSlack
		if first == last {
			slack = pointSlack
		}
		if !(t >= first-slack && t <= last+slack) {
			return nil, &fault.Range{Quantity: "temperature", Unit: "K", Source: fmt.Sprintf("custom_liquor.enthalpy_table, row of solids %.4g kg/kg", e.solids[i]), Value: t, Min: first, Max: last}
		}
		if first != last && (t < first || t > last) {
			remarks = append(remarks, evidence.Advisory{
				Code: evidence.OutsideRange, Warning: true, Field: "custom_liquor.enthalpy_table",
				Message: fmt.Sprintf("%.2f degC lies beyond the %.2f to %.2f degC of the row of solids %.4g kg/kg; it was extended.", t-quantity.Zero, first-quantity.Zero, last-quantity.Zero, e.solids[i]),
				Limit:   fmt.Sprintf("%.2f to %.2f degC", first-quantity.Zero, last-quantity.Zero),
			})
		}
	}
	return remarks, nil
}

func (e *enthalpyTable) model() evidence.Model {
	return evidence.Model{
		ID: "custom-enthalpy-table", Inside: true,
		ValidRange: fmt.Sprintf("solids %.4g to %.4g kg/kg, and the temperatures of the rows used", e.solids[0], e.solids[len(e.solids)-1]),
	}
}
