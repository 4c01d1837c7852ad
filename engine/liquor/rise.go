package liquor

import (
	"fmt"
	"math"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/numeric"
	"calandria.example/calandria/engine/quantity"
)

// largestRise is far above any liquor's boiling-point rise, in K; fused
// caustic reaches it.
const largestRise = 200

type constantRise float64

func (r constantRise) at(_, _ float64) (rise, byW, byTw float64) { return float64(r), 0, 0 }

func (r constantRise) dependsOnSolids() bool { return false }

func (r constantRise) check(float64) []evidence.Advisory { return nil }

func (r constantRise) model() evidence.Model {
	return evidence.Model{ID: "custom-rise-constant", ValidRange: "where the caller's figure holds", Inside: true}
}

type polynomialRise []float64

func (r polynomialRise) at(w, _ float64) (rise, byW, byTw float64) {
	rise, byW = numeric.Polynomial(r, w)
	return rise, byW, 0
}

func (r polynomialRise) dependsOnSolids() bool { return len(r) > 1 }

func (r polynomialRise) check(float64) []evidence.Advisory { return nil }

func (r polynomialRise) model() evidence.Model {
	return evidence.Model{ID: "custom-rise-polynomial", ValidRange: "where the caller's polynomial holds; the same at every pressure", Inside: true}
}

// duhringRise interpolates slope and intercept between strengths and holds
// both beyond the first and the last.
type duhringRise struct {
	slope, intercept numeric.Curve
}

func newDuhring(lines []DuhringLine, complain complaint) riseModel {
	n := len(lines)
	solids, slope, intercept := make([]float64, n), make([]float64, n), make([]float64, n)
	for i, line := range lines {
		solids[i], slope[i], intercept[i] = line.Solids, line.Slope, line.Intercept
		field := fmt.Sprintf("custom_liquor.duhring.lines[%d].", i)
		if !(line.Solids >= 0 && line.Solids <= 1) {
			complain(field+"solids_fraction", number(line.Solids), "0 to 1 kg/kg", "give a fraction, not a percentage")
		}
		if !(line.Slope > 0 && line.Slope <= 10) {
			complain(field+"slope", number(line.Slope), "above 0, at most 10", "give degC of liquor per degC of water")
		}
		if !(line.Intercept >= -300 && line.Intercept <= 300) {
			complain(field+"intercept_c", number(line.Intercept), "-300 to 300 degC", "give the liquor's temperature where water boils at 0 degC")
		}
	}
	if i, ok := numeric.Rising(solids); !ok {
		complain(fmt.Sprintf("custom_liquor.duhring.lines[%d].solids_fraction", i), number(solids[i]), "above that of the line before", "put the lines in rising order of solids, each strength once")
	}
	return &duhringRise{slope: numeric.NewCurve(solids, slope), intercept: numeric.NewCurve(solids, intercept)}
}

func (r *duhringRise) at(w, tw float64) (rise, byW, byTw float64) {
	held := min(max(w, r.slope.First()), r.slope.Last())
	slope, slopeByW := r.slope.At(held)
	intercept, interceptByW := r.intercept.At(held)
	if held != w {
		slopeByW, interceptByW = 0, 0
	}
	t := tw - quantity.Zero
	return intercept + (slope-1)*t, interceptByW + slopeByW*t, slope - 1
}

func (r *duhringRise) dependsOnSolids() bool { return r.slope.First() < r.slope.Last() }

func (r *duhringRise) check(w float64) []evidence.Advisory {
	const slack = 1e-9
	low, high := r.slope.First(), r.slope.Last()
	if w >= low-slack && w <= high+slack {
		return nil
	}
	return []evidence.Advisory{{
		Code: evidence.HeldBeyondStrength, Warning: true, Field: "product.solids_fraction",
		Message: fmt.Sprintf("The Duhring lines are for solids of %.4g to %.4g kg/kg; at %.4g kg/kg the nearest line was used.", low, high, w),
		Limit:   fmt.Sprintf("%.4g to %.4g kg/kg", low, high),
	}}
}

func (r *duhringRise) model() evidence.Model {
	return evidence.Model{
		ID: "custom-rise-duhring", Inside: true,
		ValidRange: fmt.Sprintf("solids %.4g to %.4g kg/kg", r.slope.First(), r.slope.Last()),
	}
}

// riseTable interpolates a caller's rises as an enthalpy table its enthalpies;
// beyond its ends it holds the nearest one.
type riseTable struct {
	surface            enthalpyTable
	coldest, hottest   float64 // K, boiling temperatures of water that every row reaches
	weakest, strongest float64 // kg/kg
}

func newRiseTable(rows []RiseRow, complain complaint) riseModel {
	r := &riseTable{coldest: -math.MaxFloat64, hottest: math.MaxFloat64}
	for i, row := range rows {
		field := fmt.Sprintf("custom_liquor.rise_table.rows[%d]", i)
		if !(row.Solids >= 0 && row.Solids <= 1) {
			complain(field+".solids_fraction", number(row.Solids), "0 to 1 kg/kg", "give a fraction, not a percentage")
		}
		if len(row.Points) == 0 {
			complain(field+".points", "empty", "at least one point", "give one reading")
			continue
		}
		t, rise := make([]float64, len(row.Points)), make([]float64, len(row.Points))
		for j, point := range row.Points {
			t[j], rise[j] = float64(point.Water), point.Rise
			if !(point.Rise >= 0 && point.Rise <= largestRise) {
				complain(fmt.Sprintf("%s.points[%d].rise_k", field, j), number(point.Rise), "0 to 200 K", "give the rise as a difference in K")
			}
		}
		if j, ok := numeric.Rising(t); !ok {
			complain(fmt.Sprintf("%s.points[%d].water_boiling_temperature_c", field, j), number(row.Points[j].Water.Celsius()), "above that of the point before", "put the points in rising order of temperature, each once")
		}
		r.surface.solids = append(r.surface.solids, row.Solids)
		r.surface.rows = append(r.surface.rows, numeric.NewCurve(t, rise))
		r.coldest, r.hottest = max(r.coldest, t[0]), min(r.hottest, t[len(t)-1])
	}
	if i, ok := numeric.Rising(r.surface.solids); !ok {
		complain(fmt.Sprintf("custom_liquor.rise_table.rows[%d].solids_fraction", i), number(r.surface.solids[i]), "above that of the row before", "put the rows in rising order of solids, each strength once")
	}
	if n := len(r.surface.solids); n > 0 {
		r.weakest, r.strongest = r.surface.solids[0], r.surface.solids[n-1]
	}
	if r.hottest < r.coldest { // rows of single points, or apart: each holds its own
		r.coldest, r.hottest = -math.MaxFloat64, math.MaxFloat64
	}
	return r
}

func (r *riseTable) at(w, tw float64) (rise, byW, byTw float64) {
	heldW, heldT := min(max(w, r.weakest), r.strongest), min(max(tw, r.coldest), r.hottest)
	rise, byW, byTw = r.surface.at(heldW, heldT)
	if heldW != w {
		byW = 0
	}
	if heldT != tw {
		byTw = 0
	}
	return rise, byW, byTw
}

func (r *riseTable) dependsOnSolids() bool { return r.surface.dependsOnSolids() }

func (r *riseTable) check(w float64) []evidence.Advisory {
	const slack = 1e-9
	if w >= r.weakest-slack && w <= r.strongest+slack {
		return nil
	}
	return []evidence.Advisory{{
		Code: evidence.HeldBeyondStrength, Warning: true, Field: "product.solids_fraction",
		Message: fmt.Sprintf("The rises are for solids of %.4g to %.4g kg/kg; at %.4g kg/kg the nearest row was used.", r.weakest, r.strongest, w),
		Limit:   fmt.Sprintf("%.4g to %.4g kg/kg", r.weakest, r.strongest),
	}}
}

func (r *riseTable) model() evidence.Model {
	return evidence.Model{ID: "custom-rise-table", Inside: true, ValidRange: fmt.Sprintf("solids %.4g to %.4g kg/kg", r.weakest, r.strongest)}
}
