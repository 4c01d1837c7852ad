package steam

import (
	"math"
	"math/rand/v2"
	"testing"

	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam/release"
)

// Benchmarks take independent random inputs of one region, so that what they
// show is throughput. Compare them within one run only.

const inputs = 1 << 12

type sample struct {
	p [inputs]quantity.Pressure
	t [inputs]quantity.Temperature
	h [inputs]quantity.Enthalpy
}

func draw(region int) *sample {
	r := rand.New(rand.NewPCG(uint64(region), 12))
	s := &sample{}
	for i := range inputs {
		for {
			var p, t float64
			switch region {
			case 1:
				t = coldest + (regionsEnd-coldest)*r.Float64()
				p = saturationPressure(t) * 1.0001
				p += (highestPressure - p) * r.Float64()
			case 2:
				t = coldest + (hottest2-coldest)*r.Float64()
				high := min(highestPressure, boundary23(max(t, regionsEnd)))
				if t <= regionsEnd {
					high = saturationPressure(t) * 0.9999
				}
				const low = 620
				if high < low {
					continue
				}
				p = low * math.Pow(high/low, r.Float64())
			case 3:
				t = regionsEnd + (hottest3-regionsEnd)*r.Float64()
				p = boundary23(t)
				p += (highestPressure - p) * r.Float64()
			}
			state, err := AtPressureTemperature(quantity.Pressure(p), quantity.Temperature(t))
			if err != nil || state.Region != region {
				continue
			}
			s.p[i], s.t[i], s.h[i] = state.Pressure, state.Temperature, quantity.Enthalpy(state.Enthalpy)
			break
		}
	}
	return s
}

// byPower is the enthalpy of region 1 or 2 as the release prints it, with a
// call of math.Pow for every power.
func byPower(region int, p, t float64) float64 {
	sum := func(terms []release.Term, x, y float64) float64 {
		total := 0.0
		for _, c := range terms {
			total += c.N * math.Pow(x, float64(c.I)) * float64(c.J) * math.Pow(y, float64(c.J-1))
		}
		return total
	}
	if region == 1 {
		tau := 1386 / t
		return gasConstant * t * tau * sum(release.Region1, 7.1-p/16.53e6, tau-1.222)
	}
	tau := 540 / t
	return gasConstant * t * tau * (sum(release.Region2Ideal, p/1e6, tau) + sum(release.Region2Residual, p/1e6, tau-0.5))
}

var sink float64

// each runs call over the inputs in turn.
func each(b *testing.B, call func(i int) float64) {
	b.Helper()
	b.ReportAllocs()
	total, i := 0.0, 0
	for b.Loop() {
		total += call(i & (inputs - 1))
		i++
	}
	sink = total
}

func must[T ~float64](v T, err error) float64 {
	if err != nil {
		panic(err)
	}
	return float64(v)
}

func BenchmarkSteam(b *testing.B) {
	s1, s2, s3 := draw(1), draw(2), draw(3)
	b.Run("1/enthalpy-by-math.Pow", func(b *testing.B) {
		each(b, func(i int) float64 { return byPower(1, float64(s1.p[i]), float64(s1.t[i])) })
	})
	b.Run("2/enthalpy-by-math.Pow", func(b *testing.B) {
		each(b, func(i int) float64 { return byPower(2, float64(s2.p[i]), float64(s2.t[i])) })
	})
	for _, c := range []struct {
		name   string
		region *sample
	}{{"1", s1}, {"2", s2}, {"3", s3}} {
		s := c.region
		b.Run(c.name+"/enthalpy", func(b *testing.B) {
			each(b, func(i int) float64 { return must(Enthalpy(s.p[i], s.t[i])) })
		})
		b.Run(c.name+"/enthalpies-one-by-one", func(b *testing.B) {
			h := make([]quantity.Enthalpy, inputs)
			b.ReportAllocs()
			for i := 0; i < b.N; i += inputs { // an operation is a point
				for j := range h {
					var err error
					if h[j], err = Enthalpy(s.p[j], s.t[j]); err != nil {
						b.Fatal(err)
					}
				}
			}
		})
		b.Run(c.name+"/enthalpies-in-a-batch", func(b *testing.B) {
			h := make([]quantity.Enthalpy, inputs)
			b.ReportAllocs()
			for i := 0; i < b.N; i += inputs { // an operation is a point
				if _, err := Enthalpies(h, s.p[:], s.t[:]); err != nil {
					b.Fatal(err)
				}
			}
		})
		b.Run(c.name+"/density", func(b *testing.B) {
			each(b, func(i int) float64 { return must(Density(s.p[i], s.t[i])) })
		})
		b.Run(c.name+"/temperature-by-enthalpy", func(b *testing.B) {
			each(b, func(i int) float64 { return must(Temperature(s.p[i], s.h[i])) })
		})
		b.Run(c.name+"/viscosity", func(b *testing.B) {
			each(b, func(i int) float64 { return must(Viscosity(s.p[i], s.t[i])) })
		})
		b.Run(c.name+"/conductivity", func(b *testing.B) {
			each(b, func(i int) float64 { return must(Conductivity(s.p[i], s.t[i])) })
		})
		b.Run(c.name+"/whole-state", func(b *testing.B) {
			each(b, func(i int) float64 {
				state, err := AtPressureTemperature(s.p[i], s.t[i])
				return must(state.Enthalpy, err)
			})
		})
		b.Run(c.name+"/enthalpy-and-entropy", func(b *testing.B) {
			each(b, func(i int) float64 {
				state, err := AtPressureTemperature(s.p[i], s.t[i])
				if err != nil {
					panic(err)
				}
				state, err = AtEnthalpyEntropy(quantity.Enthalpy(state.Enthalpy), quantity.Entropy(state.Entropy))
				return must(state.Enthalpy, err)
			})
		})
	}
}
