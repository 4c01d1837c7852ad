package liquor

import (
	"fmt"

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
