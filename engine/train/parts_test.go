package train

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/liquor"
)

// dense are liquors whose density is known: the same at any strength, and not.
func dense(t testing.TB) []*liquor.Liquor {
	return []*liquor.Liquor{
		newLiquor(t, liquor.Custom{RiseConstant: point(3), SpecificHeat: []float64{3800}, Density: []float64{1100}}),
		newLiquor(t, liquor.Custom{RisePolynomial: []float64{0, 2, 7}, SpecificHeat: []float64{4190, -2300}, Density: []float64{990, 400, 150}}),
		newLiquor(t, liquor.Custom{
			Duhring:      []liquor.DuhringLine{{Solids: 0, Slope: 1}, {Solids: 0.4, Slope: 1.06, Intercept: 10}, {Solids: 0.8, Slope: 1.2, Intercept: 60}},
			SpecificHeat: []float64{4100, -1800}, Density: []float64{1000, 500},
		}),
	}
}

// furnish gives a chosen plant parts, with numbers of their own.
func furnish(r *rand.Rand, l *liquor.Liquor, has parts, v *state) {
	v[Circulation], v[LiquorLevel] = math.NaN(), math.NaN()
	rho, _, _, _ := l.Density(v[FeedSolids], v[FeedTemperature])
	v[FeedVolumeFlow] = v[FeedFlow] / rho
	rho, _, _, _ = l.Density(v[SolidsOut], v[BoilingTemperature])
	v[ProductVolumeFlow] = v[ProductFlow] / rho
	if has.level {
		v[LiquorLevel] = 0.2 + 3*r.Float64()
	}
	if has.circulation {
		_, _, cp := l.Enthalpy(v[SolidsOut], v[BoilingTemperature])
		share := 0.05 + 0.8*r.Float64() // of the difference, that the liquor is heated by
		v[Circulation] = math.Abs(v[Duty]) / (cp * share * (v[ChestTemperature] - v[BoilingTemperature]))
		v[Duty] = math.Abs(v[Duty])
	}
}

// TestStaticHead: liquor that boils like water, at 20 kPa and as deep as gives
// 25 kPa at half its level, boils there as hot as water at 25 kPa: 60.06 and
// 64.97 degC in handbook steam tables (from memory).
func TestStaticHead(t *testing.T) {
	l := newLiquor(t, liquor.Custom{RiseConstant: point(0), SpecificHeat: []float64{4180}, Density: []float64{1000}})
	level := 2 * 5000 / (1000 * 9.80665) // standard gravity, by definition
	deep := solved(t, design(l, Given{EffectPressure, 20e3}, Given{LiquorLevel, level}))
	if want := 64.97 - 60.06; math.Abs(deep.StaticHead-want) > 0.01 {
		t.Errorf("static head %g K, want %g", deep.StaticHead, want)
	}
	flat := solved(t, design(l, Given{EffectPressure, 20e3}))
	if flat.StaticHead != 0 || math.Abs(flat.DrivingForce-deep.DrivingForce-deep.StaticHead) > 1e-9 || deep.Value[Area] <= flat.Value[Area] {
		t.Errorf("driving force %g and area %g with head, %g and %g without", deep.DrivingForce, deep.Value[Area], flat.DrivingForce, flat.Value[Area])
	}
}

// TestLogarithmicMean: by the definition of the logarithmic mean difference,
// liquor heated by half of the difference it enters with is driven by that
// difference over 2 ln 2; and with ever more liquor pumped around the mean
// becomes the difference itself.
func TestLogarithmicMean(t *testing.T) {
	l := newLiquor(t, liquor.Custom{RiseConstant: point(2), SpecificHeat: []float64{4000}})
	still := solved(t, design(l))
	cold := still.DrivingForce
	pumped := solved(t, design(l, Given{Circulation, still.Value[Duty] / (4000 * cold / 2)}))
	if want := cold / (2 * math.Ln2); math.Abs(pumped.DrivingForce-want) > 1e-9 || math.Abs(pumped.LiquorHeating-cold/2) > 1e-9 {
		t.Errorf("driving force %g, want %g; heating %g", pumped.DrivingForce, want, pumped.LiquorHeating)
	}
	torrent := solved(t, design(l, Given{Circulation, 1e6}))
	if math.Abs(torrent.DrivingForce/cold-1) > 1e-5 || torrent.StaticHead != 0 {
		t.Errorf("driving force %g, want nearly %g", torrent.DrivingForce, cold)
	}
}

// TestVolumeFlows: 1000 kg/m3 and 3.6 m3/h are 1 kg/s.
func TestVolumeFlows(t *testing.T) {
	l := newLiquor(t, liquor.Custom{RiseConstant: point(2), SpecificHeat: []float64{4000}, Density: []float64{1000}})
	a := solved(t, design(l, without(FeedFlow), Given{FeedVolumeFlow, 3.6 / 3600}))
	if math.Abs(a.Value[FeedFlow]-1) > 1e-12 || math.Abs(a.FeedVolume-1e-3) > 1e-15 || math.Abs(a.ProductVolume-a.Value[ProductFlow]/1000) > 1e-15 {
		t.Errorf("feed %g kg/s, %g m3/s, product %g m3/s", a.Value[FeedFlow], a.FeedVolume, a.ProductVolume)
	}
	b := solved(t, design(l, without(FeedFlow), Given{ProductVolumeFlow, a.ProductVolume}))
	if math.Abs(b.Value[FeedFlow]-1) > 1e-9 {
		t.Errorf("feed %g kg/s from the product's volume", b.Value[FeedFlow])
	}
	var over *fault.Specification
	if _, err := Solve(design(l, Given{FeedVolumeFlow, 1e-3})); !errors.As(err, &over) || !over.Over {
		t.Errorf("mass and volume of the feed: %v", err)
	}
}

// TestPartsFromManySides asks for plants with parts by other numbers.
func TestPartsFromManySides(t *testing.T) {
	for _, l := range dense(t) {
		for _, part := range []Given{{LiquorLevel, 2}, {Circulation, 60}} {
			base := solved(t, design(l, part))
			for _, side := range [][2]Number{{Area, ProductSolids}, {Area, Coefficient}, {Area, SteamPressure}, {Area, EffectPressure}, {SteamFlow, ProductSolids}, {Duty, FeedFlow}} {
				given, sought := side[0], side[1]
				a := solved(t, design(l, part, without(sought), Given{given, base.Value[given]}))
				for n := range numbers {
					if math.Abs(a.Value[n]-base.Value[n]) > 1e-7*math.Max(1e-3, math.Abs(base.Value[n])) {
						t.Errorf("%s, %s from %s: %s is %.12g, was %.12g", part.Number.Path(), sought.Path(), given.Path(), n.Path(), a.Value[n], base.Value[n])
					}
				}
			}
		}
		// The level itself from a test of the area.
		base := solved(t, design(l, Given{LiquorLevel, 2}))
		p := design(l, Given{Area, base.Value[Area]})
		p.Find = []Number{LiquorLevel}
		if a := solved(t, p); math.Abs(a.LiquorLevel-2) > 1e-7 {
			t.Errorf("level %g, was 2", a.LiquorLevel)
		}
	}
}

func TestPartsRefused(t *testing.T) {
	l, light := dense(t)[0], sugar(t)
	for _, c := range []struct {
		name  string
		plant Plant
	}{
		{"level without density", design(light, Given{LiquorLevel, 1})},
		{"volume without density", design(light, without(FeedFlow), Given{FeedVolumeFlow, 1e-3})},
		{"level to find without density", Plant{Liquor: light, Given: design(light).Given, Find: []Number{LiquorLevel}}},
		{"level and pump", design(l, Given{LiquorLevel, 1}, Given{Circulation, 10})},
	} {
		var invalid *fault.Invalid
		if _, err := Solve(c.plant); !errors.As(err, &invalid) {
			t.Errorf("%s: %v", c.name, err)
		}
	}
	var infeasible *fault.Infeasible
	if _, err := Solve(design(l, Given{SteamPressure, 40e3}, Given{LiquorLevel, 8})); !errors.As(err, &infeasible) || infeasible.Cause != fault.NoDrivingForce {
		t.Errorf("too deep: %v", err)
	}
	if a := solved(t, design(light, Given{LiquorLevel, 0})); a.StaticHead != 0 || a.LiquorLevel != 0 {
		t.Errorf("no level: %+v", a)
	}
}
