package steam

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam/release"
)

// plainGibbs adds up a region's printed equation term by term. Its derivatives
// are times pi and tau as often as derived by them, without ln pi in the value.
func plainGibbs(region int, p, t float64) gibbs {
	reduced := func(residual, ideal release.Sum, pi, tau, sign, logarithm float64) gibbs {
		return gibbs{
			value:  residual.Value + ideal.Value,
			byPi:   logarithm + sign*pi*residual.ByX,
			byPiPi: -logarithm + pi*pi*residual.ByXX,
			byTau:  tau * (residual.ByY + ideal.ByY), byTauTau: tau * tau * (residual.ByYY + ideal.ByYY),
			byPiTau: sign * pi * tau * residual.ByXY,
		}
	}
	switch region {
	case 1:
		pi, tau := p/16.53e6, 1386/t
		return reduced(release.At(release.Region1, 7.1-pi, tau-1.222), release.Sum{}, pi, tau, -1, 0)
	case 2:
		pi, tau := p/1e6, 540/t
		return reduced(release.At(release.Region2Residual, pi, tau-0.5), release.At(release.Region2Ideal, 1, tau), pi, tau, 1, 1)
	case 5:
		pi, tau := p/1e6, 1000/t
		return reduced(release.At(release.Region5Residual, pi, tau), release.At(release.Region5Ideal, 1, tau), pi, tau, 1, 1)
	}
	pi, tau := p/1e6, 540/t
	return reduced(release.At(release.MetastableResidual, pi, tau-0.5), release.At(release.MetastableIdeal, 1, tau), pi, tau, 1, 1)
}

// TestGeneratedCode holds every generated function to the printed sums.
func TestGeneratedCode(t *testing.T) {
	const draws = 20_000
	r := rand.New(rand.NewPCG(5, 97))
	worst := map[string]float64{}
	near := func(what string, got, want, scale float64) {
		t.Helper()
		// Derivatives have a digit less: their terms cancel more, and region 2
		// divides by tau - 0.5, which nearly vanishes at 1073.15 K.
		tolerance := 1e-12
		if strings.Contains(what, "by") {
			tolerance = 1e-11
		}
		deviation := math.Abs(got-want) / max(math.Abs(want), scale)
		worst[what] = max(worst[what], deviation)
		if !(deviation <= tolerance) {
			t.Fatalf("%s: %.17g, plainly %.17g", what, got, want)
		}
	}
	const least = 50e3 // J/kg, and J/(kg K) of s over some 300 K
	for _, region := range []int{1, 2, 5} {
		for range draws {
			s, err := randomState(region, r)
			if err != nil {
				continue
			}
			p, temperature := float64(s.Pressure), float64(s.Temperature)
			g := plainGibbs(region, p, temperature)
			var whole, part gibbs
			var h, h2, cp, cp2, entropy, v float64
			switch region {
			case 1:
				whole.value, whole.byPi, whole.byPiPi, whole.byTau, whole.byTauTau, whole.byPiTau = region1Gibbs(p, temperature)
				part.byPi, part.byPiPi, part.byTauTau, part.byPiTau = region1Response(p, temperature)
				h, v = region1Enthalpy(p, temperature), region1Volume(p, temperature)
				h2, cp = region1EnthalpyHeat(p, temperature)
				entropy, cp2 = region1EntropyHeat(p, temperature)
			case 2:
				whole.value, whole.byPi, whole.byPiPi, whole.byTau, whole.byTauTau, whole.byPiTau = region2Gibbs(p, temperature)
				part.byPi, part.byPiPi, part.byTauTau, part.byPiTau = region2Response(p, temperature)
				h, v = region2Enthalpy(p, temperature), region2Volume(p, temperature)
				h2, cp = region2EnthalpyHeat(p, temperature)
				entropy, cp2 = region2EntropyHeat(p, temperature)
			case 5:
				whole.value, whole.byPi, whole.byPiPi, whole.byTau, whole.byTauTau, whole.byPiTau = region5Gibbs(p, temperature)
				part.byPi, part.byPiPi, part.byTauTau, part.byPiTau = region5Response(p, temperature)
				h, v = region5Enthalpy(p, temperature), region5Volume(p, temperature)
				h2, cp = region5EnthalpyHeat(p, temperature)
				entropy, cp2 = region5EntropyHeat(p, temperature)
			}
			rt := gasConstant * temperature
			near("h", h, rt*g.byTau, least)
			near("h with cp", h2, rt*g.byTau, least)
			near("cp", cp, -gasConstant*g.byTauTau, 0)
			near("cp with s", cp2, -gasConstant*g.byTauTau, 0)
			near("s", entropy, gasConstant*(g.byTau-g.value), least/300)
			near("v", v, rt/p*g.byPi, 0)
			near("g", whole.value, g.value, 1)
			near("g by pi", whole.byPi, g.byPi, 0)
			near("g by pi pi", whole.byPiPi, g.byPiPi, math.Abs(g.byPi))
			near("g by tau", whole.byTau, g.byTau, least/rt)
			near("g by tau tau", whole.byTauTau, g.byTauTau, 0)
			near("g by pi tau", whole.byPiTau, g.byPiTau, math.Abs(g.byPi))
			near("response by pi", part.byPi, g.byPi, 0)
			near("response by pi pi", part.byPiPi, g.byPiPi, math.Abs(g.byPi))
			near("response by tau tau", part.byTauTau, g.byTauTau, 0)
			near("response by pi tau", part.byPiTau, g.byPiTau, math.Abs(g.byPi))
		}
	}
	for range draws {
		temperature := 280 + 300*r.Float64()
		p := saturationPressure(temperature) * (1 + 0.2*r.Float64())
		g := plainGibbs(0, p, temperature)
		value, byPi, byPiPi, byTau, byTauTau, byPiTau := regionMetastableGibbs(p, temperature)
		near("metastable", value, g.value, 1)
		near("metastable by pi", byPi, g.byPi, 0)
		near("metastable by pi pi", byPiPi, g.byPiPi, 0)
		near("metastable by tau", byTau, g.byTau, 0)
		near("metastable by tau tau", byTauTau, g.byTauTau, 0)
		near("metastable by pi tau", byPiTau, g.byPiTau, 1e-3)
	}
	for range draws {
		rho, temperature := 100+660*r.Float64(), regionsEnd+240*r.Float64()
		delta, tau := rho/criticalDensity, critical/temperature
		sum := release.At(release.Region3, delta, tau)
		// Terms of this sum are some hundred times the sum itself.
		const scale = 10
		value, byDelta, byDeltaDelta, byTau, byTauTau, byDeltaTau := region3Helmholtz(rho, temperature)
		near("f", value, sum.Value, scale)
		near("f by delta", byDelta, delta*sum.ByX, scale)
		near("f by delta delta", byDeltaDelta, delta*delta*sum.ByXX, scale)
		near("f by tau", byTau, tau*sum.ByY, scale)
		near("f by tau tau", byTauTau, tau*tau*sum.ByYY, scale)
		near("f by delta tau", byDeltaTau, delta*tau*sum.ByXY, scale)
		p, slope, bend := region3PressureCurve(rho, temperature)
		short, shortSlope := region3Pressure(rho, temperature)
		unit := rho * gasConstant * temperature
		near("p", p, unit*(release.Region3Log+delta*sum.ByX), 10*unit)
		near("p, short", short, p, 10*unit)
		near("p by density", slope*rho, unit*(release.Region3Log+2*delta*sum.ByX+delta*delta*sum.ByXX), 10*unit)
		near("p by density, short", shortSlope*rho, slope*rho, 10*unit)
		const step = 1e-4
		_, above := region3Pressure(rho+step, temperature)
		_, below := region3Pressure(rho-step, temperature)
		if difference := (above - below) / (2 * step) * rho; math.Abs(difference-bend) > 1e-5*max(math.Abs(bend), unit/rho) {
			t.Fatalf("bend %g, by differences %g", bend, difference)
		}
		a, b, c, d := region3Response(rho, temperature)
		near("response 3", a+b+c+d, byDelta+byDeltaDelta+byTauTau+byDeltaTau, scale)
		a, b, c, d, e := region3Slopes(rho, temperature)
		near("slopes 3", a+b+c+d+e, byDelta+byDeltaDelta+byTau+byTauTau+byDeltaTau, scale)
		near("viscosity", viscosity1(tau-1, delta-1), release.At(release.Viscosity1, tau-1, delta-1).Value, 1)
		near("conductivity", conductivity1(tau-1, delta-1), release.At(release.Conductivity1, tau-1, delta-1).Value, 1)
		var series0, series1 float64
		for i, n := range release.Viscosity0 {
			series0 += n * release.Power(tau, i)
		}
		for i, n := range release.Conductivity0 {
			series1 += n * release.Power(tau, i)
		}
		near("viscosity 0", viscosity0(tau), series0, 0)
		near("conductivity 0", conductivity0(tau), series1, 0)
	}
	t.Log(worst)
}

// TestStartingEquations holds the generated backward equations to the printed
// ones, over the regions that they are for.
func TestStartingEquations(t *testing.T) {
	r := rand.New(rand.NewPCG(6, 97))
	for _, c := range []struct {
		region    int
		entropy   bool
		printed   release.Backward
		generated func(p, c float64) float64
		inside    func(s State) bool
	}{
		{1, false, release.TemperatureByEnthalpy1, backwardTemperature1ByEnthalpy, nil},
		{1, true, release.TemperatureByEntropy1, backwardTemperature1ByEntropy, nil},
		{2, false, release.TemperatureByEnthalpy2a, backwardTemperature2aByEnthalpy, func(s State) bool { return s.Pressure <= 4e6 }},
		{2, false, release.TemperatureByEnthalpy2b, backwardTemperature2bByEnthalpy, func(s State) bool { return s.Pressure > 4e6 && s.Entropy > 5850 }},
		{2, false, release.TemperatureByEnthalpy2c, backwardTemperature2cByEnthalpy, func(s State) bool { return s.Pressure > 4e6 && s.Entropy < 5850 }},
		{2, true, release.TemperatureByEntropy2a, func(p, c float64) float64 {
			return backwardTemperature2aByEntropy(math.Sqrt(math.Sqrt(p*1e-6)), c)
		}, func(s State) bool { return s.Pressure <= 4e6 && s.Pressure > 611.2 }},
		{2, true, release.TemperatureByEntropy2b, backwardTemperature2bByEntropy, func(s State) bool { return s.Pressure > 4e6 && s.Entropy > 5850 }},
		{2, true, release.TemperatureByEntropy2c, backwardTemperature2cByEntropy, func(s State) bool { return s.Pressure > 4e6 && s.Entropy < 5850 }},
		{3, false, release.TemperatureByEnthalpy3a, backwardTemperature3aByEnthalpy, func(s State) bool { return s.Entropy < 4412 }},
		{3, false, release.TemperatureByEnthalpy3b, backwardTemperature3bByEnthalpy, func(s State) bool { return s.Entropy > 4413 }},
		{3, false, release.VolumeByEnthalpy3a, backwardVolume3aByEnthalpy, func(s State) bool { return s.Entropy < 4412 }},
		{3, false, release.VolumeByEnthalpy3b, backwardVolume3bByEnthalpy, func(s State) bool { return s.Entropy > 4413 }},
		{3, true, release.TemperatureByEntropy3a, backwardTemperature3aByEntropy, func(s State) bool { return s.Entropy < 4412 }},
		{3, true, release.TemperatureByEntropy3b, backwardTemperature3bByEntropy, func(s State) bool { return s.Entropy > 4413 }},
		{3, true, release.VolumeByEntropy3a, backwardVolume3aByEntropy, func(s State) bool { return s.Entropy < 4412 }},
		{3, true, release.VolumeByEntropy3b, backwardVolume3bByEntropy, func(s State) bool { return s.Entropy > 4413 }},
	} {
		for drawn := 0; drawn < 300; {
			s, err := randomState(c.region, r)
			if err != nil || s.Region != c.region || c.inside != nil && !c.inside(s) {
				continue
			}
			drawn++
			coordinate := s.Enthalpy
			if c.entropy {
				coordinate = s.Entropy
			}
			want, got := c.printed.At(s.Pressure.Megapascals(), coordinate/1e3), c.generated(float64(s.Pressure), coordinate)
			if math.Abs(got/want-1) > 1e-8 {
				t.Fatalf("region %d: %g, printed equation %g, at %+v", c.region, got, want, s)
			}
		}
	}
}

// TestConstantsOfTheTables: the table of starting densities begins where the
// equations say.
func TestConstantsOfTheTables(t *testing.T) {
	if math.Abs(lineTop()/lineEnd-1) > 1e-9 {
		t.Errorf("the saturation line ends at %g, the table goes on from %g", lineTop(), lineEnd)
	}
	for i, p := range linePressure {
		if at := saturationPressure(coldest + float64(i)); math.Abs(p/at-1) > 1e-12 {
			t.Errorf("%d: %g, want %g", i, p, at)
		}
	}
	if _, err := AtPressureTemperature(quantity.Megapascals(100), hottest3); err != nil {
		t.Error(err)
	}
}
