package steam

import (
	"flag"
	"math"
	"math/rand/v2"
	"testing"

	"calandria.example/calandria/engine/quantity"
)

// points is how many random states of each region the round trips take; the
// million that the design asks for has a step of its own in CI.
var points = flag.Int("points", 10_000, "random states of each region in TestRoundTrips")

// randomState draws a state of a region by its pressure and temperature, or on
// the saturation line; a third of those of region 3 lie near the critical point
// and a third near the saturation line.
func randomState(region int, r *rand.Rand) (State, error) {
	uniform := func(low, high float64) float64 { return low + (high-low)*r.Float64() }
	spread := func(low, high float64) float64 { // half of them by the logarithm
		if r.IntN(2) == 0 {
			return low * math.Pow(high/low, r.Float64())
		}
		return uniform(low, high)
	}
	at := func(p, t float64) (State, error) {
		return AtPressureTemperature(quantity.Pressure(p), quantity.Temperature(t))
	}
	switch region {
	case 1:
		t := uniform(coldest, regionsEnd)
		return at(spread(saturationPressure(t)*(1+2e-9), highestPressure), t)
	case 2:
		t := uniform(coldest, hottest2)
		limit := min(highestPressure, boundary23(max(t, regionsEnd)))
		if t <= regionsEnd {
			limit = saturationPressure(t) * (1 - 2e-9)
		}
		return at(spread(1, limit), t)
	case 3:
		switch r.IntN(3) {
		case 0:
			t := critical + math.Pow(10, uniform(-6, 1))*float64(2*r.IntN(2)-1)
			t = max(t, 640)
			return at(lineTop()+1e6*math.Pow(10, uniform(-6, 0))*float64(2*r.IntN(2)-1), t)
		case 1:
			t := uniform(regionsEnd, critical)
			line := saturationPressure(t)
			if r.IntN(2) == 0 {
				return at(line*(1+math.Pow(10, uniform(-8, -1))), t)
			}
			return at(line-(line-boundary23(t))*math.Pow(10, uniform(-6, 0)), t)
		}
		// By the density, so that finding it from p and t has something to find.
		t := uniform(regionsEnd, hottest3)
		if s, err := AtDensityTemperature(uniform(110, 765), quantity.Temperature(t)); err == nil {
			return s, nil
		}
		return at(uniform(boundary23(t), highestPressure), t)
	case 4:
		return AtTemperatureDryness(quantity.Temperature(uniform(coldest, critical)), quantity.Fraction(uniform(1e-9, 1-1e-9)))
	}
	return at(spread(1, highest5), uniform(hottest2, hottest5))
}

// TestRoundTrips: any two coordinates lead back to the state that they were
// taken from, in its own region, and are reproduced to 1e-9.
func TestRoundTrips(t *testing.T) {
	pairs := []struct {
		name  string
		solve func(s State) (State, error)
	}{
		{"p and h", func(s State) (State, error) { return AtPressureEnthalpy(s.Pressure, quantity.Enthalpy(s.Enthalpy)) }},
		{"p and s", func(s State) (State, error) { return AtPressureEntropy(s.Pressure, quantity.Entropy(s.Entropy)) }},
		{"h and s", func(s State) (State, error) {
			return AtEnthalpyEntropy(quantity.Enthalpy(s.Enthalpy), quantity.Entropy(s.Entropy))
		}},
		{"p and h, only T", func(s State) (State, error) {
			t, err := Temperature(s.Pressure, quantity.Enthalpy(s.Enthalpy))
			back := s
			// What the answer is off by, in h. Where cp grows without bound, at the
			// critical point, no temperature can tell h: there 1e-11 of T counts.
			back.Temperature = t
			if whole, errWhole := AtPressureEnthalpy(s.Pressure, quantity.Enthalpy(s.Enthalpy)); errWhole == nil && whole.Neighbour != 0 && whole.Temperature == t {
				return whole, err // the other region answered both doors
			}
			if off := float64(t - s.Temperature); math.Abs(off) > 1e-11*float64(t) {
				back.Enthalpy += off * s.Cp
			}
			return back, err
		}},
		{"p and T or dryness", func(s State) (State, error) {
			if s.Saturated {
				return AtPressureDryness(s.Pressure, s.Dryness)
			}
			return AtPressureTemperature(s.Pressure, s.Temperature)
		}},
	}
	for region := 1; region <= 5; region++ {
		r := rand.New(rand.NewPCG(uint64(region), 97))
		var worst, apart [5]float64
		var jumps, refused, elsewhere, off [5]int
		drawn := 0
		for drawn < *points {
			s, err := randomState(region, r)
			if err != nil || s.Region != region {
				continue // on the line, or a draw that hit a neighbour
			}
			drawn++
			for i, pair := range pairs {
				back, err := pair.solve(s)
				if err != nil {
					if refused[i]++; refused[i] <= 3 {
						t.Errorf("region %d, %s: %v: %+v", region, pair.name, err, s)
					}
					continue
				}
				if back.Neighbour != 0 {
					jumps[i]++
				} else if back.Region != region {
					if elsewhere[i]++; elsewhere[i] <= 3 {
						t.Errorf("region %d, %s: answered by region %d: %+v from %+v", region, pair.name, back.Region, back, s)
					}
				}
				// What the equation of the answer's own region says.
				p := float64(back.Pressure)
				if back.Region == 3 {
					p = region3(1/back.Volume, float64(back.Temperature)).p
				}
				deviation := math.Abs(p/float64(s.Pressure) - 1)
				if i == 0 || i == 2 || i == 3 {
					deviation = max(deviation, math.Abs(back.Enthalpy-s.Enthalpy)/max(math.Abs(s.Enthalpy), 1e3))
				}
				if i == 1 || i == 2 {
					deviation = max(deviation, math.Abs(back.Entropy-s.Entropy)/max(math.Abs(s.Entropy), 1))
				}
				if i == 2 && (back.Region == 4 || back.Neighbour != 0 || back.Region == 1) {
					// The pressure is no input here: that of a liquid follows
					// from the small rest of h - T s.
					deviation = max(math.Abs(back.Enthalpy-s.Enthalpy)/max(math.Abs(s.Enthalpy), 1e3), math.Abs(back.Entropy-s.Entropy)/max(math.Abs(s.Entropy), 1))
				}
				worst[i] = max(worst[i], deviation)
				if deviation > 1e-9 {
					if off[i]++; off[i] <= 3 {
						t.Errorf("region %d, %s: inputs are off by %g: %+v from %+v", region, pair.name, deviation, back, s)
					}
				}
				if stiffness := math.Abs(s.VolumeByPressure) * p / s.Volume; back.Neighbour == 0 && (region != 3 || stiffness < 1e3) {
					apart[i] = max(apart[i], math.Abs(back.Volume/s.Volume-1))
				}
			}
		}
		for i, pair := range pairs {
			t.Logf("region %d  %-18s  %d points  %d refused  %d in another region  %d off by more  %d in a jump  worst %.1e  volumes apart %.1e",
				region, pair.name, drawn, refused[i], elsewhere[i], off[i], jumps[i], worst[i], apart[i])
		}
	}
}

// TestTemperatureAlone: the quick door answers what the whole one does, at
// random pressures and enthalpies, wet steam and refusals among them, and where
// regions 1, 2, 3 and wet steam meet.
func TestTemperatureAlone(t *testing.T) {
	r := rand.New(rand.NewPCG(8, 97))
	for i := range 200_000 {
		p, h := math.Pow(10, 2+6.1*r.Float64()), -1e5+8e6*r.Float64()
		if i%2 == 0 {
			p, h = 16.4e6+0.2e6*r.Float64(), 1.5e6+1.2e6*r.Float64()
		}
		alone, err := Temperature(quantity.Pressure(p), quantity.Enthalpy(h))
		whole, errWhole := AtPressureEnthalpy(quantity.Pressure(p), quantity.Enthalpy(h))
		if (err == nil) != (errWhole == nil) || math.Abs(float64(alone/whole.Temperature)-1) > 1e-9 {
			t.Fatalf("%g Pa, %g J/kg: %v %v, whole %+v %v", p, h, alone, err, whole, errWhole)
		}
	}
}
