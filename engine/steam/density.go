package steam

import "math"

// density3 returns the density in kg/m3 of region 3 at p in Pa and t in K, on
// the side of the liquid or on that of the vapour below the critical
// temperature; above there is one side only. It is polished on Eq. 28. If that
// side has no state at p, which Eq. 30 brings about close to the critical point
// only, ok is false.
func density3(p, t float64, dense bool) (rho float64, ok bool) {
	low, high := thinnest, densest
	if t < critical {
		if dense {
			low = criticalDensity
		} else {
			high = criticalDensity
		}
	}
	rho = startingDensity(p, t, dense)
	for range mostSteps {
		at, slope := region3Pressure(rho, t)
		miss := at - p
		// Where pressure falls as density rises no state is stable: the
		// boundary of that zone lies towards the wanted side.
		stable := slope > 0
		if stable && math.Abs(miss) <= densityTolerance*p {
			return rho, true
		}
		if stable && miss > 0 || !stable && !dense {
			high = rho
		} else {
			low = rho
		}
		next := rho - miss/slope
		if !stable || !(next > low && next < high) {
			next = (low + high) / 2
		}
		if next == rho || high-low <= rho*1e-15 {
			return rho, math.Abs(miss) <= 100*densityTolerance*p
		}
		rho = next
	}
	return rho, false
}

const (
	criticalDensity   = 322.0 // kg/m3
	thinnest, densest = 50.0, 850.0
	// densityTolerance is relative in pressure; the equation itself can be
	// evaluated to some 1e-13.
	densityTolerance = 1e-12
	mostSteps        = 80
)

// startingDensity reads the table of densities.
func startingDensity(p, t float64, dense bool) float64 {
	var along, line float64
	if t < critical {
		along = (t - regionsEnd) * (startBelow / (critical - regionsEnd))
		line = saturationPressure(t)
	} else {
		along = startBelow + (t-critical)*(startAbove/(hottest3-critical))
		line = lineAbove(t)
	}
	table, width := &startDensity[0], highestPressure-line
	if !dense {
		table, width = &startDensity[1], min(boundary23(t)-line, -lineNarrow)
	}
	across := math.Sqrt(max((p-line)/width, 0)) * startAcross
	i, j := cell(along, startBelow+startAbove), cell(across, startAcross)
	x, y := along-float64(i), across-float64(j)
	near, far := &table[i], &table[i+1]
	a := float64(near[j]) + x*float64(far[j]-near[j])
	b := float64(near[j+1]) + x*float64(far[j+1]-near[j+1])
	return a + y*(b-a)
}

// cell is the cell of a table with count cells in which a place lies, the last
// one for what lies beyond.
func cell(at float64, count int) int {
	return min(max(int(at), 0), count-1)
}
