package steam

import (
	"errors"
	"math"
	"testing"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
)

// at returns a state of one region's equation near s, wherever that leads.
func at(s State, p, t float64) State {
	other := State{Pressure: quantity.Pressure(p), Temperature: quantity.Temperature(t)}
	switch s.Region {
	case 1:
		fill1(&other, p, t)
	case 2:
		fill2(&other, p, t)
	case 5:
		fill5(&other, p, t)
	default:
		rho, _ := density3(p, t, 1/s.Volume > criticalDensity)
		fill3(&other, rho, t)
	}
	return other
}

// TestLaws holds the states of a grid over every region to the identities of
// thermodynamics, whose two sides come from different derivatives of the
// equation, and every derivative to differences.
func TestLaws(t *testing.T) {
	near := func(a, b, relative float64) bool {
		return math.Abs(a-b) <= relative*math.Max(math.Abs(a), math.Abs(b))
	}
	count := map[int]int{}
	for temperature := 275.0; temperature <= 2270; temperature += 7 {
		for decade := -3.0; decade <= 1.99; decade += 0.1 {
			s, err := AtPressureTemperature(quantity.Megapascals(math.Pow(10, decade)), quantity.Temperature(temperature))
			var outside *fault.Range
			if errors.As(err, &outside) {
				continue // above 50 MPa beside region 5
			}
			if err != nil {
				t.Fatal(err)
			}
			count[s.Region]++
			p := float64(s.Pressure)
			if pv := p * s.Volume; math.Abs(s.Enthalpy-s.InternalEnergy-pv) > 1e-9*math.Max(pv, 1e5) {
				t.Errorf("%g K %g Pa: h - u is %g, p v is %g", temperature, p, s.Enthalpy-s.InternalEnergy, pv)
			}
			if s.Cp < s.Cv-1e-9 || s.Cv <= 0 || s.Volume <= 0 || s.VolumeByPressure >= 0 || !(s.SpeedOfSound > 0) {
				t.Errorf("%g K %g Pa: not stable: %+v", temperature, p, s)
			}
			// cp - cv = -T (dv/dT)^2 / (dv/dp)
			if want := -temperature * s.VolumeByTemperature * s.VolumeByTemperature / s.VolumeByPressure; math.Abs(s.Cp-s.Cv-want) > 1e-9*s.Cp {
				t.Errorf("%g K %g Pa: cp - cv is %g, want %g", temperature, p, s.Cp-s.Cv, want)
			}
			// w^2 = -v^2 / ((dv/dp) cv/cp)
			if want := math.Sqrt(-s.Volume * s.Volume / s.VolumeByPressure * s.Cp / s.Cv); !near(s.SpeedOfSound, want, 1e-9) {
				t.Errorf("%g K %g Pa: sound %g, want %g", temperature, p, s.SpeedOfSound, want)
			}
			// Differences of the fourth order, since close to the critical point
			// everything bends.
			dt, dp := 2e-3, 2e-5*p
			byT := func(read func(State) float64) float64 {
				return (8*(read(at(s, p, temperature+dt))-read(at(s, p, temperature-dt))) - read(at(s, p, temperature+2*dt)) + read(at(s, p, temperature-2*dt))) / (12 * dt)
			}
			byP := func(read func(State) float64) float64 {
				return (8*(read(at(s, p+dp, temperature))-read(at(s, p-dp, temperature))) - read(at(s, p+2*dp, temperature)) + read(at(s, p-2*dp, temperature))) / (12 * dp)
			}
			h := func(s State) float64 { return s.Enthalpy }
			v := func(s State) float64 { return s.Volume }
			entropy := func(s State) float64 { return s.Entropy }
			if cp := byT(h); !near(cp, s.Cp, 1e-6) {
				t.Errorf("%g K %g Pa: cp %g, by differences %g", temperature, p, s.Cp, cp)
			}
			if cp := temperature * byT(entropy); !near(cp, s.Cp, 1e-6) {
				t.Errorf("%g K %g Pa: cp %g, T ds/dT by differences %g", temperature, p, s.Cp, cp)
			}
			if slope := byT(v); math.Abs(slope-s.VolumeByTemperature) > 1e-6*max(s.Volume/temperature, math.Abs(slope)) {
				t.Errorf("%g K %g Pa: dv/dT %g, by differences %g", temperature, p, s.VolumeByTemperature, slope)
			}
			if slope := byP(v); math.Abs(slope-s.VolumeByPressure) > 1e-6*math.Abs(s.VolumeByPressure)+1e-10*s.Volume/dp {
				t.Errorf("%g K %g Pa: dv/dp %g, by differences %g", temperature, p, s.VolumeByPressure, slope)
			}
			// Maxwell: (ds/dp)_T = -(dv/dT)_p.
			if slope := byP(entropy); math.Abs(slope+s.VolumeByTemperature) > 1e-6*math.Abs(s.VolumeByTemperature)+1e-12*1e4/dp {
				t.Errorf("%g K %g Pa: ds/dp %g, -dv/dT %g", temperature, p, slope, -s.VolumeByTemperature)
			}
			if slope := byP(h); math.Abs(slope-s.EnthalpyByPressure()) > 1e-6*s.Volume+1e-12*3e6/dp {
				t.Errorf("%g K %g Pa: dh/dp %g, by differences %g", temperature, p, s.EnthalpyByPressure(), slope)
			}
			single(t, s)
		}
	}
	for region, least := range map[int]int{1: 1000, 2: 2000, 3: 100, 5: 7000} {
		if count[region] < least {
			t.Errorf("%d states of region %d", count[region], region)
		}
	}
	t.Log(count)
}

// single holds the doors that return one property to the state.
func single(t *testing.T, s State) {
	t.Helper()
	h, err := Enthalpy(s.Pressure, s.Temperature)
	if err != nil || math.Abs(float64(h)-s.Enthalpy) > 1e-12*max(math.Abs(s.Enthalpy), 50e3) {
		t.Errorf("%+v: enthalpy %g: %v", s, h, err)
	}
	rho, err := Density(s.Pressure, s.Temperature)
	if err != nil || math.Abs(rho*s.Volume-1) > 1e-12 {
		t.Errorf("%+v: density %g: %v", s, rho, err)
	}
	temperature, err := Temperature(s.Pressure, quantity.Enthalpy(s.Enthalpy))
	if err != nil || math.Abs(float64(temperature/s.Temperature)-1) > 1e-10 {
		t.Errorf("%+v: temperature %g: %v", s, temperature, err)
	}
	if s.Temperature > hottestTransport {
		return
	}
	mu, err := Viscosity(s.Pressure, s.Temperature)
	if want, ok := s.Viscosity(); err != nil || !ok || math.Abs(mu/want-1) > 1e-11 {
		t.Errorf("%+v: viscosity %g, want %g: %v", s, mu, want, err)
	}
	lambda, err := Conductivity(s.Pressure, s.Temperature)
	if want, ok := s.Conductivity(); err != nil || !ok || math.Abs(lambda/want-1) > 1e-9 {
		t.Errorf("%+v: conductivity %g, want %g: %v", s, lambda, want, err)
	}
}

// TestSaturationLine: monotone, its own inverse, and with an exact slope, to
// both of its ends.
func TestSaturationLine(t *testing.T) {
	before := quantity.Pressure(0)
	for i := 0; i <= 1000; i++ {
		temperature := quantity.Temperature(coldest + (critical-coldest)*float64(i)/1000)
		if i == 1000 {
			temperature = critical
		}
		p, err := SaturationPressure(temperature)
		if err != nil {
			t.Fatal(err)
		}
		if p <= before {
			t.Errorf("not rising at %g K", temperature)
		}
		before = p
		back, err := SaturationTemperature(p)
		// R7-97 section 8 lets the two equations differ by rounding only.
		if err != nil || math.Abs(float64(back-temperature)) > 1e-6 {
			t.Errorf("%g K comes back as %g K: %v", temperature, back, err)
		}
		if i == 0 || i == 1000 {
			continue
		}
		const d = 1e-4
		_, slope, err := SaturationSlope(temperature)
		difference := (saturationPressure(float64(temperature)+d) - saturationPressure(float64(temperature)-d)) / (2 * d)
		if err != nil || math.Abs(slope-difference) > 1e-6*slope {
			t.Errorf("%g K: slope %g, by differences %g: %v", temperature, slope, difference, err)
		}
	}
}

// TestSaturatedPhases: liquid is denser and poorer in heat than vapour up to
// the critical point, where they are one; both doors agree; above 623.15 K
// region 3 answers, whose phases have the pressure of Eq. 30.
func TestSaturatedPhases(t *testing.T) {
	latent := math.Inf(1)
	for i := 0; i <= 20_000; i++ {
		temperature := coldest + (critical-coldest)*float64(i)/20_000
		if i == 20_000 {
			temperature = critical
		}
		liquid, vapour, err := Saturation(quantity.Temperature(temperature))
		if err != nil {
			t.Fatal(err)
		}
		region := 1
		if temperature > regionsEnd {
			region = 3
		}
		if liquid.Region != region || vapour.Region != min(region+1, 3) {
			t.Errorf("%g K: regions %d and %d", temperature, liquid.Region, vapour.Region)
		}
		now := vapour.Enthalpy - liquid.Enthalpy
		// The phases of regions 1 and 2 and those of region 3 jump where they meet.
		if now > latent+10 || now < 0 || liquid.Volume > vapour.Volume || liquid.Entropy > vapour.Entropy {
			t.Errorf("%g K: latent heat %g after %g, %+v %+v", temperature, now, latent, liquid, vapour)
		}
		latent = now
		if region == 3 && temperature < critical {
			for _, s := range []State{liquid, vapour} {
				if p := region3(1/s.Volume, temperature).p; math.Abs(p/float64(s.Pressure)-1) > 1e-10 {
					t.Errorf("%g K: p %g of Eq. 28, %g of Eq. 30", temperature, p, s.Pressure)
				}
			}
		}
		byPressure, _, err := SaturationAtPressure(liquid.Pressure)
		if err != nil || math.Abs(byPressure.Enthalpy/liquid.Enthalpy-1) > 1e-5 && math.Abs(byPressure.Enthalpy-liquid.Enthalpy) > 1 {
			t.Errorf("%g K: liquid by pressure %g, by temperature %g: %v", temperature, byPressure.Enthalpy, liquid.Enthalpy, err)
		}
	}
	if latent != 0 {
		t.Errorf("latent heat %g at the critical point", latent)
	}
}

// TestLatentHeat: common practice, by which people know a steam table to be
// right.
func TestLatentHeat(t *testing.T) {
	for _, c := range []struct{ celsius, kilojoules float64 }{{100, 2257}, {110, 2230}} {
		liquid, vapour, err := Saturation(quantity.Celsius(c.celsius))
		if latent := (vapour.Enthalpy - liquid.Enthalpy) / 1e3; err != nil || math.Abs(latent-c.kilojoules) > 1 {
			t.Errorf("latent heat at %g degC is %g kJ/kg, want some %g: %v", c.celsius, latent, c.kilojoules, err)
		}
	}
}

// TestClapeyron: the latent heat follows from the slope of the saturation
// line, h_fg = T (v_g - v_f) dp/dT. Eq. 30 and the regions are separate
// equations; 0.02 % is the order of the formulation's own uncertainty of the
// saturation pressure (from memory).
func TestClapeyron(t *testing.T) {
	for temperature := 280.0; temperature <= 640; temperature += 10 {
		liquid, vapour, err := Saturation(quantity.Temperature(temperature))
		if err != nil {
			t.Fatal(err)
		}
		_, slope := equation30(temperature)
		latent, want := vapour.Enthalpy-liquid.Enthalpy, temperature*(vapour.Volume-liquid.Volume)*slope
		if tolerance := 2e-4; math.Abs(latent/want-1) > tolerance && temperature <= regionsEnd || math.Abs(latent/want-1) > 1e-3 {
			t.Errorf("%g K: latent heat %g, by Clapeyron %g", temperature, latent, want)
		}
	}
}

// TestSolverFunctions compares the enthalpies that solvers use, and their
// derivatives, with the states and with differences.
func TestSolverFunctions(t *testing.T) {
	const d = 1e-3
	for temperature := 280.0; temperature <= 620; temperature += 20 {
		liquid, vapour, err := Saturation(quantity.Temperature(temperature))
		if err != nil {
			t.Fatal(err)
		}
		h, byT, err := LiquidEnthalpy(quantity.Temperature(temperature))
		above, _, errAbove := LiquidEnthalpy(quantity.Temperature(temperature + d))
		below, _, errBelow := LiquidEnthalpy(quantity.Temperature(temperature - d))
		if errors.Join(err, errAbove, errBelow) != nil || math.Abs(h/liquid.Enthalpy-1) > 1e-12 || math.Abs(byT-(above-below)/(2*d)) > 1e-6*byT {
			t.Errorf("%g K: liquid %g, slope %g by differences %g", temperature, h, byT, (above-below)/(2*d))
		}
		rho, rhoByT, err := LiquidDensity(quantity.Temperature(temperature))
		rhoAbove, _, errAbove := LiquidDensity(quantity.Temperature(temperature + d))
		rhoBelow, _, errBelow := LiquidDensity(quantity.Temperature(temperature - d))
		if errors.Join(err, errAbove, errBelow) != nil || math.Abs(rho*liquid.Volume-1) > 1e-12 || math.Abs(rhoByT-(rhoAbove-rhoBelow)/(2*d)) > 1e-6*math.Abs(rhoByT)+1e-7 {
			t.Errorf("%g K: density %g, slope %g by differences %g", temperature, rho, rhoByT, (rhoAbove-rhoBelow)/(2*d))
		}
		h, byP, byT, err := VapourEnthalpy(vapour.Pressure, vapour.Temperature)
		near := func(a, b float64) bool { return math.Abs(a-b) <= 1e-11*math.Abs(b) }
		if err != nil || !near(h, vapour.Enthalpy) || !near(byT, vapour.Cp) || !near(byP, vapour.EnthalpyByPressure()) {
			t.Errorf("%g K: vapour %g %g %g %v", temperature, h, byP, byT, err)
		}
	}
}

// TestJumpsAreAnswered: a value inside of a jump, whichever way it goes, is
// answered by the lower-numbered region, which then reproduces it, and says so.
func TestJumpsAreAnswered(t *testing.T) {
	type boundary struct {
		name          string
		p, end        float64
		lower, higher int
		low, high     func(p, t float64) State
	}
	region3At := func(p, t float64) State {
		rho, _ := density3(p, t, t > critical && p > lineAbove(t))
		s := State{Pressure: quantity.Pressure(p), Temperature: quantity.Temperature(t)}
		fill3(&s, rho, t)
		return s
	}
	by := func(region int) func(p, t float64) State {
		return func(p, t float64) State { return at(State{Region: region}, p, t) }
	}
	var list []boundary
	for _, p := range []float64{17e6, 20e6, 23e6, 35e6, 60e6, 90e6, 99e6} {
		list = append(list,
			boundary{"1 and 3", p, regionsEnd, 1, 3, by(1), func(p, t float64) State {
				rho, _ := density3(p, t, true)
				s := State{Pressure: quantity.Pressure(p), Temperature: quantity.Temperature(t)}
				fill3(&s, rho, t)
				return s
			}},
			boundary{"2 and 3", p, boundary23Temperature(p), 2, 3, by(2), region3At})
	}
	for _, p := range []float64{1e3, 1e5, 3e6, 20e6, 40e6, 49e6} {
		list = append(list, boundary{"2 and 5", p, hottest2, 2, 5, by(2), by(5)})
	}
	for _, b := range list {
		low, high := b.low(b.p, b.end), b.high(b.p, b.end)
		check := func(what string, s State, err error, read func(State) float64, want, scale float64) {
			t.Helper()
			if err != nil || s.Region != b.lower || s.Neighbour != b.higher {
				t.Errorf("%s at %g Pa, %s: region %d beside %d: %v", b.name, b.p, what, s.Region, s.Neighbour, err)
				return
			}
			if math.Abs(read(s)-want) > 1e-9*max(math.Abs(want), scale) || len(s.Advisories()) != 1 {
				t.Errorf("%s at %g Pa, %s: %g, want %g, advisories %v", b.name, b.p, what, read(s), want, s.Advisories())
			}
		}
		middle := (low.Enthalpy + high.Enthalpy) / 2
		s, err := AtPressureEnthalpy(quantity.Pressure(b.p), quantity.Enthalpy(middle))
		check("p and h", s, err, func(s State) float64 { return s.Enthalpy }, middle, 1e3)
		single, err := Temperature(quantity.Pressure(b.p), quantity.Enthalpy(middle))
		if err != nil || single != s.Temperature {
			t.Errorf("%s at %g Pa: temperature %g, want %g: %v", b.name, b.p, single, s.Temperature, err)
		}
		middleS := (low.Entropy + high.Entropy) / 2
		s, err = AtPressureEntropy(quantity.Pressure(b.p), quantity.Entropy(middleS))
		check("p and s", s, err, func(s State) float64 { return s.Entropy }, middleS, 1)
		// Of h and s the boundary is a line; a point across it from the middle.
		s, err = AtEnthalpyEntropy(quantity.Enthalpy(middle), quantity.Entropy(middleS))
		check("h and s", s, err, func(s State) float64 { return s.Enthalpy }, middle, 1e3)
	}
	// Wet steam jumps at 623.15 K between the phases of regions 1 and 2 and
	// those of region 3; p tells which ones, h and s may not.
	for x := 0.05; x < 1; x += 0.1 {
		below, err := AtTemperatureDryness(regionsEnd, quantity.Fraction(x))
		above, errAbove := AtTemperatureDryness(quantity.Temperature(math.Nextafter(regionsEnd, critical)), quantity.Fraction(x))
		h, s := (below.Enthalpy+above.Enthalpy)/2, (below.Entropy+above.Entropy)/2
		back, errBack := AtEnthalpyEntropy(quantity.Enthalpy(h), quantity.Entropy(s))
		if errors.Join(err, errAbove, errBack) != nil || back.Region != 4 || math.Abs(back.Enthalpy/h-1) > 1e-9 || math.Abs(back.Entropy/s-1) > 1e-9 {
			t.Errorf("dryness %g: %+v: %v", x, back, errors.Join(err, errAbove, errBack))
		}
	}
}

// TestEnds asks for every end of the range from the coordinates that the
// equation itself has there, and for what lies a hair beyond.
func TestEnds(t *testing.T) {
	for _, c := range []struct{ p, low, high float64 }{
		{1e-3, coldest, hottest5}, {1, coldest, hottest5}, {611, coldest, hottest5}, {lineStart() * 1.00001, coldest, hottest5},
		{1e5, coldest, hottest5}, {16e6, coldest, hottest5}, {lineTop(), coldest, hottest5}, {30e6, coldest, hottest5},
		{50e6, coldest, hottest5}, {50.1e6, coldest, hottest2}, {100e6, coldest, hottest2},
	} {
		for _, temperature := range []float64{c.low, c.high} {
			p := quantity.Pressure(c.p)
			s, err := AtPressureTemperature(p, quantity.Temperature(temperature))
			if err != nil {
				t.Errorf("%g Pa %g K: %v", c.p, temperature, err)
				continue
			}
			byH, errH := AtPressureEnthalpy(p, quantity.Enthalpy(s.Enthalpy))
			byS, errS := AtPressureEntropy(p, quantity.Entropy(s.Entropy))
			byHS, errHS := AtEnthalpyEntropy(quantity.Enthalpy(s.Enthalpy), quantity.Entropy(s.Entropy))
			if err := errors.Join(errH, errS, errHS); err != nil {
				t.Errorf("%g Pa %g K: %v", c.p, temperature, err)
			}
			for _, back := range []State{byH, byS, byHS} {
				if math.Abs(float64(back.Temperature)-temperature) > 1e-6 {
					t.Errorf("%g Pa %g K: back at %g K", c.p, temperature, back.Temperature)
				}
			}
			beyond := math.Copysign(1e-6, temperature-500) // relative, outwards
			_, errH = AtPressureEnthalpy(p, quantity.Enthalpy(s.Enthalpy+beyond*3e6))
			_, errS = AtPressureEntropy(p, quantity.Entropy(s.Entropy+beyond*1e4))
			var outsideH, outsideS *fault.Range
			if !errors.As(errH, &outsideH) || !errors.As(errS, &outsideS) {
				t.Errorf("%g Pa beyond %g K: %v, %v", c.p, temperature, errH, errS)
			}
		}
	}
}

func TestRefusals(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	drop := func(_ any, err error) error { return err }
	for _, c := range []struct {
		name string
		err  error
	}{
		{"p NaN", drop(AtPressureTemperature(quantity.Pressure(nan), 300))},
		{"t NaN", drop(AtPressureTemperature(1e5, quantity.Temperature(nan)))},
		{"p infinite", drop(AtPressureTemperature(quantity.Pressure(inf), 300))},
		{"p zero", drop(AtPressureTemperature(0, 300))},
		{"p all but zero", drop(AtPressureTemperature(1e-300, 300))},
		{"ice", drop(AtPressureTemperature(1e5, 273.1))},
		{"too hot", drop(AtPressureTemperature(1e5, 2273.2))},
		{"too hot for the pressure", drop(AtPressureTemperature(60e6, 1100))},
		{"too much pressure", drop(AtPressureTemperature(100.001e6, 300))},
		{"enthalpy: p NaN", drop(AtPressureEnthalpy(quantity.Pressure(nan), 1e6))},
		{"enthalpy NaN", drop(AtPressureEnthalpy(1e5, quantity.Enthalpy(nan)))},
		{"enthalpy infinite", drop(AtPressureEnthalpy(1e5, quantity.Enthalpy(inf)))},
		{"enthalpy too low", drop(AtPressureEnthalpy(1e5, -1e3))},
		{"enthalpy too high", drop(AtPressureEnthalpy(1e5, 8e6))},
		{"enthalpy of a hot state at 60 MPa", drop(AtPressureEnthalpy(60e6, 4.5e6))},
		{"entropy NaN", drop(AtPressureEntropy(1e5, quantity.Entropy(nan)))},
		{"entropy too low", drop(AtPressureEntropy(1e5, -100))},
		{"entropy too high", drop(AtPressureEntropy(1e5, 2e4))},
		{"temperature: p NaN", drop(Temperature(quantity.Pressure(nan), 1e6))},
		{"temperature: h NaN", drop(Temperature(1e5, quantity.Enthalpy(nan)))},
		{"temperature: h too high", drop(Temperature(1e5, 8e6))},
		{"h NaN with s", drop(AtEnthalpyEntropy(quantity.Enthalpy(nan), 1e3))},
		{"h with s NaN", drop(AtEnthalpyEntropy(1e6, quantity.Entropy(nan)))},
		{"h infinite with s", drop(AtEnthalpyEntropy(quantity.Enthalpy(-inf), 1e3))},
		{"h too low for s", drop(AtEnthalpyEntropy(1e5, 7e3))},
		{"h too high for s", drop(AtEnthalpyEntropy(6e6, 5e3))},
		{"s too low", drop(AtEnthalpyEntropy(1e5, -20))},
		{"s too high", drop(AtEnthalpyEntropy(1e6, 5e4))},
		{"dryness NaN", drop(AtTemperatureDryness(300, quantity.Fraction(nan)))},
		{"dryness 1.1", drop(AtPressureDryness(1e5, 1.1))},
		{"dryness above the critical point", drop(AtTemperatureDryness(647.2, 0.5))},
		{"pressure below the line", drop(SaturationTemperature(611))},
		{"pressure above the line", drop(SaturationTemperature(22.1e6))},
		{"saturation NaN", drop(SaturationPressure(quantity.Temperature(nan)))},
		{"enthalpy alone: ice", drop(Enthalpy(1e5, 270))},
		{"density alone: NaN", drop(Density(1e5, quantity.Temperature(nan)))},
		{"viscosity too hot", drop(Viscosity(1e5, 1173.2))},
		{"viscosity NaN", drop(Viscosity(quantity.Pressure(nan), 400))},
		{"conductivity too hot", drop(Conductivity(1e5, 1173.2))},
		{"viscosity of a stone", drop(ViscosityAtDensity(2000, 300))},
		{"conductivity at less than nothing", drop(BackgroundConductivity(-1, 300))},
		{"density of region 1", drop(AtDensityTemperature(700, 500))},
		{"density between the phases", drop(AtDensityTemperature(322, 640))},
		{"density NaN", drop(AtDensityTemperature(nan, 650))},
		{"density at too much pressure", drop(AtDensityTemperature(800, 650))},
		{"metastable above the line", drop(MetastableVapour(1e5, 380))},
		{"metastable, too wet", drop(MetastableVapour(1e6, 300))},
		{"metastable NaN", drop(MetastableVapour(quantity.Pressure(nan), 380))},
	} {
		var f *fault.Range
		if !errors.As(c.err, &f) {
			t.Errorf("%s: %v", c.name, c.err)
		}
	}
	if _, _, err := SaturationSlope(648); err == nil {
		t.Error("slope beyond")
	}
	if _, _, err := LiquidEnthalpy(624); err == nil {
		t.Error("liquid beyond")
	}
	for _, c := range []struct{ p, t float64 }{{20e6, 630}, {nan, 630}, {1e5, nan}} {
		if _, _, _, err := VapourEnthalpy(quantity.Pressure(c.p), quantity.Temperature(c.t)); err == nil {
			t.Errorf("vapour at %g Pa and %g K", c.p, c.t)
		}
	}
	for _, temperature := range []quantity.Temperature{373.15, 640, critical} {
		p, err := SaturationPressure(temperature)
		if err != nil {
			t.Fatal(err)
		}
		for _, factor := range []float64{1, 1 + 0.9e-9, 1 - 0.9e-9} {
			var f *fault.Invalid
			if _, err := AtPressureTemperature(quantity.Pressure(factor)*p, temperature); !errors.As(err, &f) {
				t.Errorf("on the line at %g K: %v", temperature, err)
			}
			if _, err := Enthalpy(quantity.Pressure(factor)*p, temperature); !errors.As(err, &f) {
				t.Errorf("on the line at %g K: %v", temperature, err)
			}
		}
		for _, factor := range []float64{1 + 1.2e-9, 1 - 1.2e-9} {
			if _, err := AtPressureTemperature(quantity.Pressure(factor)*p, temperature); err != nil {
				t.Errorf("beside the line at %g K: %v", temperature, err)
			}
		}
	}
}

// TestAbsence: what does not exist in a state is not answered.
func TestAbsence(t *testing.T) {
	has := func(s State) [3]bool {
		_, mu := s.Viscosity()
		_, lambda := s.Conductivity()
		_, sigma := s.SurfaceTension()
		return [3]bool{mu, lambda, sigma}
	}
	wet, err := AtPressureDryness(1e5, 0.5)
	liquid, vapour, errLine := Saturation(600)
	end, _, errEnd := Saturation(critical)
	hot, errHot := AtPressureTemperature(1e5, 1200)
	if err := errors.Join(err, errLine, errEnd, errHot); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name     string
		s        State
		onePhase bool
		has      [3]bool
	}{
		{"wet steam", wet, false, [3]bool{false, false, true}},
		{"saturated liquid", liquid, true, [3]bool{true, true, true}},
		{"saturated vapour", vapour, true, [3]bool{true, true, true}},
		{"critical point", end, false, [3]bool{true, false, true}},
		{"beyond the transport releases", hot, true, [3]bool{false, false, false}},
	} {
		if c.s.OnePhase != c.onePhase || has(c.s) != c.has {
			t.Errorf("%s: one phase %v, viscosity, conductivity and surface tension %v", c.name, c.s.OnePhase, has(c.s))
		}
	}
}

// FuzzStates asks for any state by any pair: refused, or finite.
func FuzzStates(f *testing.F) {
	f.Add(1e5, 300.0, 0.5, 1e6, 3e3)
	f.Add(16.6e6, 623.15, 0.0, 1.67e6, 3.78e3)
	f.Add(611.213, 273.15, 1.0, 0.0, 0.0)
	f.Add(22.064e6, 647.096, 1.0, 2.0874e6, 4.412e3)
	f.Add(50e6, 1073.15, 1.0, 3.9e6, 7.0e3)
	f.Fuzz(func(t *testing.T, p, temperature, dryness, h, s float64) {
		for _, call := range []func() (State, error){
			func() (State, error) {
				return AtPressureTemperature(quantity.Pressure(p), quantity.Temperature(temperature))
			},
			func() (State, error) { return AtPressureDryness(quantity.Pressure(p), quantity.Fraction(dryness)) },
			func() (State, error) {
				return AtTemperatureDryness(quantity.Temperature(temperature), quantity.Fraction(dryness))
			},
			func() (State, error) { return AtPressureEnthalpy(quantity.Pressure(p), quantity.Enthalpy(h)) },
			func() (State, error) { return AtPressureEntropy(quantity.Pressure(p), quantity.Entropy(s)) },
			func() (State, error) { return AtEnthalpyEntropy(quantity.Enthalpy(h), quantity.Entropy(s)) },
			func() (State, error) { return AtDensityTemperature(dryness, quantity.Temperature(temperature)) },
			func() (State, error) {
				return MetastableVapour(quantity.Pressure(p), quantity.Temperature(temperature))
			},
		} {
			s, err := call()
			var known fault.Fault
			if err != nil {
				if !errors.As(err, &known) {
					t.Fatalf("not a fault: %v", err)
				}
				var stuck *fault.NotConverged
				if errors.As(err, &stuck) {
					t.Fatalf("p %g t %g x %g h %g s %g: %v", p, temperature, dryness, h, s.Entropy, err)
				}
				continue
			}
			mu, _ := s.Viscosity()
			lambda, _ := s.Conductivity()
			sigma, _ := s.SurfaceTension()
			for _, v := range []float64{s.Volume, s.Enthalpy, s.InternalEnergy, s.Entropy, s.Cp, s.Cv, s.SpeedOfSound, float64(s.Pressure), float64(s.Temperature), mu, lambda, sigma} {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Fatalf("%+v", s)
				}
			}
		}
	})
}
