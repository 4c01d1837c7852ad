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
	// Mostly the start is so good that one step of Halley's method is enough.
	if at, slope, bend := region3PressureCurve(rho, t); slope > 0 {
		step := (at - p) / slope
		if curved := step / (1 - step*bend/(2*slope*rho)); math.Abs(step) <= firstStep*rho*min(1, slope*rho/p) {
			return rho - curved, true
		}
	}
	for range mostSteps {
		at, slope := region3Pressure(rho, t)
		miss := at - p
		// Where pressure falls as density rises no state is stable: the
		// boundary of that zone lies towards the wanted side.
		stable := slope > 0
		step := miss / slope
		if stable && (math.Abs(miss) <= densityTolerance*p || math.Abs(step) <= lastStep*rho*min(1, slope*rho/p)) {
			return rho - step, true
		}
		if stable && miss > 0 || !stable && !dense {
			high = rho
		} else {
			low = rho
		}
		next := rho - step
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
	// lastStep is relative in density: what a step of Newton's method leaves is
	// of the order of its square, less where pressure hardly depends on density.
	lastStep = 2e-7
	// firstStep is the same for one of Halley's method, which leaves the cube.
	firstStep = 3e-5
	mostSteps = 80
)

// startingDensity reads the table of densities, by parabolas through three
// places along the temperature and three across.
func startingDensity(p, t float64, dense bool) float64 {
	var along, line float64
	first, last := 0, startBelow
	if t < critical {
		along = (t - regionsEnd) * (startBelow / (critical - regionsEnd))
		line = saturationPressure(t)
	} else {
		along = startBelow + (t-critical)*(startAbove/(hottest3-critical))
		line = lineAbove(t)
		first, last = startBelow, startBelow+startAbove
	}
	table, width := &startDensity[0], highestPressure-line
	if !dense {
		table, width = &startDensity[1], boundary23(t)-line
		if width > -lineNarrow {
			width = -lineNarrow
		}
	}
	share := (p - line) / width
	if share < 0 {
		share = 0
	}
	across := math.Sqrt(share) * startAcross
	i, j := middle(along, first, last), middle(across, 0, startAcross)
	x, y := along-float64(i), across-float64(j)
	a, b, c := table[i-1][j-1:j+2], table[i][j-1:j+2], table[i+1][j-1:j+2]
	before, at, after := parabola(y)
	near := float64(before*float64(a[0])) + float64(at*float64(a[1])) + float64(after*float64(a[2]))
	here := float64(before*float64(b[0])) + float64(at*float64(b[1])) + float64(after*float64(b[2]))
	far := float64(before*float64(c[0])) + float64(at*float64(c[1])) + float64(after*float64(c[2]))
	before, at, after = parabola(x)
	return float64(before*near) + float64(at*here) + float64(after*far)
}

// middle is the place nearest to at that has a neighbour on both sides.
func middle(at float64, first, last int) int {
	i := int(at + 0.5)
	if i <= first {
		return first + 1
	}
	if i >= last {
		return last - 1
	}
	return i
}

// parabola returns the weights of values at -1, 0 and 1 of the parabola through
// them, at a place near 0.
func parabola(at float64) (before, middle, after float64) {
	half, square := at/2, float64(at*at)
	return float64(at*half) - half, 1 - square, float64(at*half) + half
}
