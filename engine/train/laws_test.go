package train

import (
	"errors"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/liquor"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
)

// TestDerivatives compares every derivative of every equation with central
// differences at random states, for every kind of liquor.
func TestDerivatives(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for k, l := range append(liquors(t), dense(t)...) {
		for i := range 60 {
			v := chosen(t, r, l, true)
			has := parts{}
			if i%3 > 0 && l.HasDensity() {
				has = parts{feedVolume: true, productVolume: true, level: i%3 == 1, circulation: i%3 == 2}
				furnish(r, l, has, &v)
			}
			for _, e := range equationsOf(l, has) {
				var d, unused gradient
				if _, _, err := residual(e.relation, l, &v, &d); err != nil {
					t.Fatal(err)
				}
				for _, n := range e.in {
					h := 1e-5 * math.Max(math.Abs(v[n]), 1e-3)
					up, down := v, v
					up[n] += h
					down[n] -= h
					above, size, err := residual(e.relation, l, &up, &unused)
					if err != nil {
						t.Fatal(err)
					}
					below, _, err := residual(e.relation, l, &down, &unused)
					if err != nil {
						t.Fatal(err)
					}
					difference := (above - below) / (2 * h)
					if allowed := 1e-5*math.Abs(d[n]) + 1e-9*size/h; math.Abs(difference-d[n]) > allowed {
						t.Errorf("liquor %d, %s by %s: %g, by differences %g", k, relationNames[e.relation], n.Path(), d[n], difference)
					}
				}
			}
		}
	}
}

// TestEverythingThatChangesAnEquationStandsInIt guards the structure: a number
// that is not listed in an equation must not move it.
func TestEverythingThatChangesAnEquationStandsInIt(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for i, l := range slices.Concat(liquors(t), dense(t), dense(t)) {
		v := chosen(t, r, l, true)
		has := parts{}
		if l.HasDensity() {
			has = parts{feedVolume: true, productVolume: true, level: i%2 == 0, circulation: i%2 == 1}
			furnish(r, l, has, &v)
		}
		for _, e := range equationsOf(l, has) {
			var d gradient
			if _, _, err := residual(e.relation, l, &v, &d); err != nil {
				t.Fatal(err)
			}
			for n := range unknowns {
				if d[n] != 0 && !slices.Contains(e.in, n) {
					t.Errorf("%s moves with %s, which is not listed", relationNames[e.relation], n.Path())
				}
			}
		}
	}
}

// design is a plant of the tests' own.
func design(l *liquor.Liquor, change ...Given) Plant {
	given := []Given{
		{FeedFlow, 2}, {FeedSolids, 0.15}, {FeedTemperature, quantity.Zero + 40}, {ProductSolids, 0.45},
		{SteamPressure, 180e3}, {EffectPressure, 25e3}, {Coefficient, 1800},
	}
	for _, c := range change {
		given = slices.DeleteFunc(given, func(g Given) bool { return g.Number == c.Number })
		if !math.IsNaN(c.Value) {
			given = append(given, c)
		}
	}
	return Plant{Liquor: l, Given: given}
}

// without drops a number from a design.
func without(n Number) Given { return Given{n, math.NaN()} }

func solved(t *testing.T, p Plant) *Answer {
	t.Helper()
	a, err := Solve(p)
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// TestOnePlantFromManySides asks for the same plant by other numbers.
func TestOnePlantFromManySides(t *testing.T) {
	l := sugar(t)
	base := solved(t, design(l))
	for _, side := range [][2]Number{
		{Area, ProductSolids}, {Area, Coefficient}, {Area, SteamPressure}, {Area, EffectPressure},
		{SteamFlow, ProductSolids}, {Evaporation, ProductSolids}, {Economy, FeedTemperature}, {Duty, FeedFlow}, {ProductFlow, FeedFlow},
		{BoilingTemperature, EffectPressure}, {ChestTemperature, SteamPressure}, {VapourFlow, FeedSolids},
	} {
		given, sought := side[0], side[1]
		a := solved(t, design(l, without(sought), Given{given, base.Value[given]}))
		for n := range numbers {
			if math.Abs(a.Value[n]-base.Value[n]) > 1e-8*math.Max(1e-3, math.Abs(base.Value[n])) {
				t.Errorf("%s from %s: %s is %.12g, was %.12g", sought.Path(), given.Path(), n.Path(), a.Value[n], base.Value[n])
			}
		}
	}
}

// TestWithoutSolids: every catalogue liquor without solids is a boiler of water,
// whose steam follows from the enthalpies of saturated liquid and vapour alone.
func TestWithoutSolids(t *testing.T) {
	for _, id := range liquor.IDs() {
		a := solved(t, design(named(t, id), Given{FeedSolids, 0}, without(ProductSolids), Given{Evaporation, 1.5}))
		liquid, vapour, err := steam.SaturationAtPressure(25e3)
		chest, live, errChest := steam.SaturationAtPressure(180e3)
		feed, _, errFeed := steam.Saturation(quantity.Zero + 40)
		if err := errors.Join(err, errChest, errFeed); err != nil {
			t.Fatal(err)
		}
		duty := 1.5*vapour.Enthalpy + 0.5*liquid.Enthalpy - 2*feed.Enthalpy
		if math.Abs(a.Value[Duty]/duty-1) > 1e-9 || math.Abs(a.Value[SteamFlow]/(duty/(live.Enthalpy-chest.Enthalpy))-1) > 1e-9 || math.Abs(a.Rise) > 1e-9 {
			t.Errorf("%s: duty %g, of water %g; steam %g; rise %g", id, a.Value[Duty], duty, a.Value[SteamFlow], a.Rise)
		}
	}
}

// TestPlantsScale: with twice the feed everything that grows with the plant
// doubles, and nothing else moves.
func TestPlantsScale(t *testing.T) {
	l := sugar(t)
	one, two := solved(t, design(l)), solved(t, design(l, Given{FeedFlow, 4}))
	for n := range numbers {
		want := one.Value[n]
		if slices.Contains(extensive[:], n) {
			want *= 2
		}
		if math.Abs(two.Value[n]-want) > 1e-9*math.Max(1e-3, math.Abs(want)) {
			t.Errorf("%s is %.12g, want %.12g", n.Path(), two.Value[n], want)
		}
	}
}

// TestMoreAreaNeverEvaporatesLess holds pressures, feed and coefficient.
func TestMoreAreaNeverEvaporatesLess(t *testing.T) {
	for _, l := range []*liquor.Liquor{water(t), sugar(t)} {
		before := 0.0
		for area := 5.0; area <= 60; area += 1 {
			a, err := Solve(design(l, without(ProductSolids), Given{Area, area}))
			var why *fault.Infeasible
			if errors.As(err, &why) {
				break // more than the feed can give
			}
			if err != nil {
				t.Fatalf("%g m2: %v", area, err)
			}
			if a.Value[Evaporation] < before {
				t.Errorf("%g m2 evaporates %g, less area %g", area, a.Value[Evaporation], before)
			}
			before = a.Value[Evaporation]
		}
		if before == 0 {
			t.Error("no plant was solved")
		}
	}
}

// TestSpecificationFaults names what is too much and what is too little.
func TestSpecificationFaults(t *testing.T) {
	l := sugar(t)
	for _, c := range []struct {
		name     string
		plant    Plant
		over     bool
		conflict []Number // exactly
		closers  []Number // at least
		missing  int
	}{
		{"solids balance twice", design(l, Given{Evaporation, 1}), true, []Number{FeedFlow, FeedSolids, ProductSolids, Evaporation}, nil, 0},
		{"steam pressure and temperature", design(l, Given{SteamTemperature, 390}), true, []Number{SteamPressure, SteamTemperature}, nil, 0},
		{"solids by two names", design(l, Given{SolidsOut, 0.45}), true, []Number{ProductSolids, SolidsOut}, nil, 0},
		{"coefficient left out", design(l, without(Coefficient)), false, nil, []Number{Area, Coefficient}, 1},
		{"product left out", design(l, without(ProductSolids)), false, nil, []Number{ProductSolids, Area, SteamFlow, Evaporation}, 1},
		{"two left out", design(l, without(ProductSolids), without(FeedTemperature)), false, nil, []Number{FeedTemperature, ProductSolids}, 2},
		{"nothing given", Plant{Liquor: l}, false, nil, []Number{FeedFlow, Area}, 7},
		{"vent sought without a number for it", Plant{Liquor: l, Given: design(l).Given, Find: []Number{Vent}}, false, nil, []Number{Vent, SteamFlow, Economy}, 1},
		{"no size", design(l, without(FeedFlow), Given{Economy, 0.9}), false, nil, []Number{FeedFlow, Area}, 1},
	} {
		_, err := Solve(c.plant)
		var f *fault.Specification
		if !errors.As(err, &f) || f.Over != c.over {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		paths := func(list []Number) (p []string) {
			for _, n := range list {
				p = append(p, n.Path())
			}
			slices.Sort(p)
			return p
		}
		got := slices.Sorted(slices.Values(f.Conflict))
		if c.over && !slices.Equal(got, paths(c.conflict)) {
			t.Errorf("%s: conflict %v, want %v", c.name, got, paths(c.conflict))
		}
		for _, want := range paths(c.closers) {
			if !slices.Contains(f.Closers, want) {
				t.Errorf("%s: %s is not among the closers %v", c.name, want, f.Closers)
			}
		}
		if !c.over && f.Missing != c.missing {
			t.Errorf("%s: %d missing, want %d", c.name, f.Missing, c.missing)
		}
	}
}

// TestInfeasiblePlants asks for what can not be, and expects reason and
// amount.
func TestInfeasiblePlants(t *testing.T) {
	l := sugar(t)
	strong := newLiquor(t, liquor.Custom{RiseConstant: point(70), SpecificHeat: []float64{3500}})
	for _, c := range []struct {
		name  string
		plant Plant
		cause fault.Cause
	}{
		{"rise eats the driving force", design(strong), fault.NoDrivingForce},
		{"rise eats the driving force of a given area", design(strong, without(ProductSolids), Given{Area, 20}), fault.NoDrivingForce},
		{"chest colder than the vapour", design(l, Given{SteamPressure, 20e3}), fault.NoDrivingForce},
		{"chest colder, area given", design(l, Given{SteamPressure, 20e3}, without(ProductSolids), Given{Area, 20}), fault.NoDrivingForce},
		{"product weaker than feed", design(l, Given{ProductSolids, 0.1}), fault.WeakerProduct},
		{"more product than feed", design(l, without(ProductSolids), Given{ProductFlow, 3}), fault.WeakerProduct},
		{"more evaporated than fed", design(l, without(ProductSolids), Given{Evaporation, 2.5}), fault.OutOfBounds},
		{"more area than the feed can use", design(l, without(ProductSolids), Given{Area, 4000}), fault.OutOfBounds},
		{"too little area to boil", design(l, without(ProductSolids), Given{Area, 0.5}), fault.NegativeEvaporation},
		{"subcooled below freezing", design(l, Given{Subcooling, 200}), fault.OutOfBounds},
	} {
		_, err := Solve(c.plant)
		var f *fault.Infeasible
		if !errors.As(err, &f) {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		if f.Cause != c.cause {
			t.Errorf("%s: cause %d (%v), want %d", c.name, f.Cause, err, c.cause)
		}
		if !(f.Amount > 0) || math.IsInf(f.Amount, 0) {
			t.Errorf("%s: by %g %s: %v", c.name, f.Amount, f.Unit, err)
		}
	}
}

func TestInputsThatAreRefused(t *testing.T) {
	l := sugar(t)
	for _, c := range []struct {
		name  string
		plant Plant
	}{
		{"not a number", Plant{Liquor: l, Given: []Given{{FeedFlow, math.NaN()}}}},
		{"infinite", design(l, Given{FeedFlow, math.Inf(1)})},
		{"negative flow", design(l, Given{FeedFlow, -1})},
		{"fraction above one", design(l, Given{FeedSolids, 1.5})},
		{"twice", Plant{Liquor: l, Given: append(design(l).Given, Given{FeedFlow, 2})}},
		{"sought without default", Plant{Liquor: l, Given: design(l).Given, Find: []Number{Area}}},
		{"given and sought", Plant{Liquor: l, Given: design(l, Given{Vent, 0.1}).Given, Find: []Number{Vent}}},
		{"wet and superheated", design(l, Given{Superheat, 10}, Given{Dryness, 0.9})},
	} {
		a, err := Solve(c.plant)
		var f fault.Fault
		if a != nil || !errors.As(err, &f) {
			t.Errorf("%s: %v %v", c.name, a, err)
		}
	}
}

// TestPointsServeAtTheirOwnPlaceOnly: a chart reading must not be used
// elsewhere.
func TestPointsServeAtTheirOwnPlaceOnly(t *testing.T) {
	row := func(w, c, h float64) liquor.EnthalpyRow {
		return liquor.EnthalpyRow{Solids: w, Points: []liquor.EnthalpyPoint{{Temperature: quantity.Celsius(c), Enthalpy: quantity.KilojoulesPerKilogram(h)}}}
	}
	l := newLiquor(t, liquor.Custom{RiseConstant: point(5), EnthalpyTable: []liquor.EnthalpyRow{row(0.15, 40, 150), row(0.45, 70, 230)}})
	if _, err := Solve(design(l, without(EffectPressure), Given{BoilingTemperature, quantity.Zero + 70})); err != nil {
		t.Errorf("at the points: %v", err)
	}
	_, err := Solve(design(l, without(EffectPressure), Given{BoilingTemperature, quantity.Zero + 75}))
	var f *fault.Range
	if !errors.As(err, &f) {
		t.Errorf("5 K beside the point: %v", err)
	}
}

// TestPressuresOffTheLine: below the triple point and above 350 degC there is
// no boiling to model, and that is the reason given.
func TestPressuresOffTheLine(t *testing.T) {
	l := sugar(t)
	for _, c := range []Given{{EffectPressure, 550}, {EffectPressure, 17e6}, {SteamPressure, 600}, {SteamPressure, 16.6e6}} {
		_, err := Solve(design(l, c))
		var f *fault.Range
		if !errors.As(err, &f) || f.Quantity != c.Number.Path() {
			t.Errorf("%s %g Pa: %v", c.Number.Path(), c.Value, err)
		}
	}
	if _, err := Solve(design(l, Given{EffectPressure, 620})); err != nil {
		t.Errorf("just above the triple point: %v", err)
	}
}

// TestSeveralAnswers asks for solids by a rise that takes the same value three
// times: 20 w - 50 w^2 + 40 w^3 is 2.55 K between its turning points at w of
// 1/3 (2.593 K) and 1/2 (2.5 K), by hand.
func TestSeveralAnswers(t *testing.T) {
	rise := []float64{0, 20, -50, 40}
	ask := func(specificHeat []float64) (*Answer, error) {
		l := newLiquor(t, liquor.Custom{RisePolynomial: rise, SpecificHeat: specificHeat})
		return Solve(Plant{Liquor: l, Given: []Given{
			{FeedFlow, 2}, {FeedSolids, 0.05}, {FeedTemperature, 330}, {VapourSaturationTemperature, 340}, {BoilingTemperature, 342.55}, {SteamPressure, 180e3}, {Coefficient, 1500},
		}})
	}
	others := func(a *Answer) (n int) {
		for _, remark := range a.Advisories {
			if remark.Code == evidence.SecondAnswer {
				n++
			}
		}
		return n
	}
	a, err := ask([]float64{4000})
	if err != nil {
		t.Fatal(err)
	}
	if w := a.Value[SolidsOut]; !(w > 0.05 && w < 1./3) || others(a) != 2 {
		t.Errorf("solids %g with %d others, want the lowest root, below 1/3, and two others", w, others(a))
	}
	// A specific heat that is negative around the lowest root only, about
	// 0.28: no answer there, but the next one stands.
	lowest := a.Value[SolidsOut]
	middle := lowest + 0.01
	bowl := []float64{middle*middle*1e5 - 100, -2e5 * middle, 1e5} // 1e5 (w - middle)^2 - 100
	a, err = ask(bowl)
	if err != nil {
		t.Fatalf("the next root was not tried: %v", err)
	}
	if w := a.Value[SolidsOut]; !(w > 1./3 && w < 0.5) || others(a) != 1 {
		t.Errorf("solids %g with %d others, want the middle root and one other", w, others(a))
	}
}

// FuzzSolve gives any numbers. Solve must end with a fault, or with an answer
// that is finite, closes and is physical.
func FuzzSolve(f *testing.F) {
	f.Add(uint32(0b1111111), uint8(0), 2.0, 0.15, 313.0, 0.45, 1.8e5, 2.5e4, 1800.0)
	f.Add(uint32(0xffffffff), uint8(3), 1.0, 0.1, 300.0, 0.4, 2e5, 2e4, 2000.0)
	f.Add(uint32(0x1f0f), uint8(1), 1e-9, 1.0, 623.0, 1e-9, 1.6e7, 700.0, 1e5)
	f.Fuzz(func(t *testing.T, which uint32, kind uint8, a, b, c, d, e, g, h float64) {
		kinds := liquors(t)
		l := kinds[int(kind)%len(kinds)]
		values := []float64{a, b, c, d, e, g, h}
		p := Plant{Liquor: l}
		for n := range numbers {
			if which&(1<<n) != 0 && len(p.Given) < 10 {
				p.Given = append(p.Given, Given{n, values[len(p.Given)%len(values)]})
			}
		}
		answer, err := Solve(p)
		var known fault.Fault
		if err != nil {
			if !errors.As(err, &known) {
				t.Fatalf("not a fault: %v", err)
			}
			return
		}
		for n := range numbers {
			if math.IsNaN(answer.Value[n]) || math.IsInf(answer.Value[n], 0) {
				t.Fatalf("%s is %g", n.Path(), answer.Value[n])
			}
		}
		if worst := max(answer.Closure.Mass, answer.Closure.Solids, answer.Closure.Energy); !(worst <= closes) || answer.DrivingForce <= 0 {
			t.Fatalf("closes to %g, driving force %g", worst, answer.DrivingForce)
		}
	})
}

func BenchmarkSolve(b *testing.B) {
	l, caustic := sugar(b), named(b, "sodium-hydroxide")
	sucrose, pure := named(b, "sucrose"), named(b, "water")
	boiler := func(last Given) Plant {
		return design(pure, without(FeedSolids), without(ProductSolids), last)
	}
	for _, c := range []struct {
		name  string
		plant Plant
	}{
		{"design", design(l)},
		{"rating", design(l, without(ProductSolids), Given{Area, 40})},
		{"water/design", boiler(Given{Evaporation, 1.5})},
		{"water/rating", boiler(Given{Area, 40})},
		{"sucrose/design", design(sucrose)},
		{"sucrose/rating", design(sucrose, without(ProductSolids), Given{Area, 40})},
		{"sodium-hydroxide/design", design(caustic, Given{SteamPressure, 300e3})},
		{"sodium-hydroxide/rating", design(caustic, Given{SteamPressure, 300e3}, without(ProductSolids), Given{Area, 40})},
	} {
		b.Run(c.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Solve(c.plant); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
