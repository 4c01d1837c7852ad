package steam

import (
	"errors"
	"math"
	"testing"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
)

// grid calls check with states of regions 1 and 2, away from their edges.
func grid(t *testing.T, check func(s State)) {
	t.Helper()
	for temperature := 275.0; temperature <= 1070; temperature += 15 {
		for decade := -3.0; decade <= 1.99; decade += 0.25 {
			s, err := AtPressureTemperature(quantity.Megapascals(math.Pow(10, decade)), quantity.Temperature(temperature))
			var outside *fault.Range
			if errors.As(err, &outside) {
				continue // region 3
			}
			if err != nil {
				t.Fatal(err)
			}
			check(s)
		}
	}
}

// TestLaws holds every state of a grid to the identities of thermodynamics,
// whose two sides come from different derivatives of the equation.
func TestLaws(t *testing.T) {
	near := func(a, b, relative float64) bool {
		return math.Abs(a-b) <= relative*math.Max(math.Abs(a), math.Abs(b))
	}
	count := 0
	grid(t, func(s State) {
		count++
		p, temperature := float64(s.Pressure), float64(s.Temperature)
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
		// Derivatives against differences, and Maxwell's (ds/dp)_T = -(dv/dT)_p.
		dt, dp := 1e-3, 1e-5*p
		at := func(p, t float64) State {
			var other State
			if s.Region == 1 {
				region1(p, t).fill(&other, p, t)
			} else {
				region2(p, t).fill(&other, p, t)
			}
			return other
		}
		hot, cold, high, low := at(p, temperature+dt), at(p, temperature-dt), at(p+dp, temperature), at(p-dp, temperature)
		if cp := (hot.Enthalpy - cold.Enthalpy) / (2 * dt); !near(cp, s.Cp, 1e-6) {
			t.Errorf("%g K %g Pa: cp %g, by differences %g", temperature, p, s.Cp, cp)
		}
		if byT := (hot.Volume - cold.Volume) / (2 * dt); math.Abs(byT-s.VolumeByTemperature) > 1e-6*s.Volume/temperature {
			t.Errorf("%g K %g Pa: dv/dT %g, by differences %g", temperature, p, s.VolumeByTemperature, byT)
		}
		if byP := (high.Volume - low.Volume) / (2 * dp); math.Abs(byP-s.VolumeByPressure) > 1e-5*math.Abs(s.VolumeByPressure)+1e-10*s.Volume/dp {
			t.Errorf("%g K %g Pa: dv/dp %g, by differences %g", temperature, p, s.VolumeByPressure, byP)
		}
		if byP := (high.Entropy - low.Entropy) / (2 * dp); math.Abs(byP+s.VolumeByTemperature) > 1e-5*math.Abs(s.VolumeByTemperature)+1e-12*1e4/dp {
			t.Errorf("%g K %g Pa: ds/dp %g, -dv/dT %g", temperature, p, byP, -s.VolumeByTemperature)
		}
	})
	if count < 800 {
		t.Errorf("%d states", count)
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
		above, _ := equation30(float64(temperature) + d)
		below, _ := equation30(float64(temperature) - d)
		slope, err := SaturationSlope(temperature)
		if difference := (above - below) / (2 * d); err != nil || math.Abs(slope-difference) > 1e-6*slope {
			t.Errorf("%g K: slope %g, by differences %g: %v", temperature, slope, difference, err)
		}
	}
}

// TestClapeyron: the latent heat follows from the slope of the saturation
// line, h_fg = T (v_g - v_f) dp/dT. Eq. 30 and the regions are separate
// equations; 0.02 % is the order of the formulation's own uncertainty of the
// saturation pressure (from memory).
func TestClapeyron(t *testing.T) {
	for temperature := 280.0; temperature <= 620; temperature += 10 {
		liquid, vapour, err := Saturation(quantity.Temperature(temperature))
		if err != nil {
			t.Fatal(err)
		}
		_, slope := equation30(temperature)
		latent, want := vapour.Enthalpy-liquid.Enthalpy, temperature*(vapour.Volume-liquid.Volume)*slope
		if math.Abs(latent/want-1) > 2e-4 {
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
		if errors.Join(err, errAbove, errBelow) != nil || h != liquid.Enthalpy || math.Abs(byT-(above-below)/(2*d)) > 1e-6*byT {
			t.Errorf("%g K: liquid %g, slope %g by differences %g", temperature, h, byT, (above-below)/(2*d))
		}
		h, byP, byT, err := VapourEnthalpy(vapour.Pressure, vapour.Temperature)
		if err != nil || h != vapour.Enthalpy || byT != vapour.Cp || byP != vapour.EnthalpyByPressure() {
			t.Errorf("%g K: vapour %g %g %g %v", temperature, h, byP, byT, err)
		}
	}
}

func TestRefusals(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	for _, c := range []struct {
		name string
		call func() error
	}{
		{"p NaN", func() error { _, err := AtPressureTemperature(quantity.Pressure(nan), 300); return err }},
		{"t NaN", func() error { _, err := AtPressureTemperature(1e5, quantity.Temperature(nan)); return err }},
		{"p infinite", func() error { _, err := AtPressureTemperature(quantity.Pressure(inf), 300); return err }},
		{"p zero", func() error { _, err := AtPressureTemperature(0, 300); return err }},
		{"ice", func() error { _, err := AtPressureTemperature(1e5, 273.1); return err }},
		{"too hot", func() error { _, err := AtPressureTemperature(1e5, 1073.2); return err }},
		{"region 3", func() error { _, err := AtPressureTemperature(30e6, 650); return err }},
		{"dryness NaN", func() error { _, err := AtTemperatureDryness(300, quantity.Fraction(nan)); return err }},
		{"dryness 1.1", func() error { _, err := AtPressureDryness(1e5, 1.1); return err }},
		{"pressure below the line", func() error { _, err := SaturationTemperature(611); return err }},
		{"pressure above the line", func() error { _, err := SaturationTemperature(22.1e6); return err }},
		{"saturation NaN", func() error { _, err := SaturationPressure(quantity.Temperature(nan)); return err }},
		{"slope beyond", func() error { _, err := SaturationSlope(648); return err }},
		{"liquid beyond", func() error { _, _, err := LiquidEnthalpy(624); return err }},
		{"vapour too dense", func() error { _, _, _, err := VapourEnthalpy(20e6, 630); return err }},
		{"vapour NaN", func() error { _, _, _, err := VapourEnthalpy(quantity.Pressure(nan), 630); return err }},
	} {
		var f *fault.Range
		if err := c.call(); !errors.As(err, &f) {
			t.Errorf("%s: %v", c.name, err)
		}
	}
	p, err := SaturationPressure(373.15)
	if err != nil {
		t.Fatal(err)
	}
	for _, factor := range []float64{1, 1 + 0.9e-9, 1 - 0.9e-9} {
		var f *fault.Invalid
		if _, err := AtPressureTemperature(quantity.Pressure(factor)*p, 373.15); !errors.As(err, &f) {
			t.Errorf("on the line: %v", err)
		}
	}
	for _, factor := range []float64{1 + 1.2e-9, 1 - 1.2e-9} {
		if _, err := AtPressureTemperature(quantity.Pressure(factor)*p, 373.15); err != nil {
			t.Errorf("beside the line: %v", err)
		}
	}
}

// FuzzStates asks for any state: refused, or finite.
func FuzzStates(f *testing.F) {
	f.Add(1e5, 300.0, 0.5)
	f.Add(16.6e6, 623.15, 0.0)
	f.Add(611.213, 273.15, 1.0)
	f.Fuzz(func(t *testing.T, p, temperature, dryness float64) {
		for _, call := range []func() (State, error){
			func() (State, error) {
				return AtPressureTemperature(quantity.Pressure(p), quantity.Temperature(temperature))
			},
			func() (State, error) { return AtPressureDryness(quantity.Pressure(p), quantity.Fraction(dryness)) },
			func() (State, error) {
				return AtTemperatureDryness(quantity.Temperature(temperature), quantity.Fraction(dryness))
			},
		} {
			s, err := call()
			var known fault.Fault
			if err != nil {
				if !errors.As(err, &known) {
					t.Fatalf("not a fault: %v", err)
				}
				continue
			}
			for _, v := range []float64{s.Volume, s.Enthalpy, s.InternalEnergy, s.Entropy, s.Cp, s.Cv, s.SpeedOfSound, float64(s.Pressure), float64(s.Temperature)} {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Fatalf("%+v", s)
				}
			}
		}
	})
}

func BenchmarkAtPressureTemperature(b *testing.B) {
	for _, c := range []struct {
		name           string
		p, temperature float64
	}{{"region1", 1e6, 350}, {"region2", 1e5, 450}} {
		b.Run(c.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := AtPressureTemperature(quantity.Pressure(c.p), quantity.Temperature(c.temperature)); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
