package train

import (
	"errors"
	"flag"
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

func newLiquor(t testing.TB, c liquor.Custom) *liquor.Liquor {
	t.Helper()
	l, err := liquor.New(c)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func point(v float64) *float64 { return &v }

// sugar is the classroom sugar solution of Geankoplis ex. 8.5-1 (from memory).
func sugar(t testing.TB) *liquor.Liquor {
	return newLiquor(t, liquor.Custom{RisePolynomial: []float64{0, 1.78, 6.22}, SpecificHeat: []float64{4190, -2350}})
}

// water boils and holds heat like itself, nearly: a constant specific heat.
func water(t testing.TB) *liquor.Liquor {
	return newLiquor(t, liquor.Custom{RiseConstant: point(0), SpecificHeat: []float64{4190}})
}

// chosen is a plant built backwards: temperatures, solids and feed are drawn,
// and the rest follows by the balances written out here, one after the other.
func chosen(t testing.TB, r *rand.Rand, l *liquor.Liquor, losses bool) (v state) {
	t.Helper()
	must := func(f float64, err error) float64 {
		if err != nil {
			t.Fatal(err)
		}
		return f
	}
	between := func(low, high float64) float64 { return low + (high-low)*r.Float64() }
	v[Dryness] = 1
	if losses {
		v[HeatLoss], v[Vent], v[GasSideResistance] = between(0, 0.05), between(0, 0.05), between(0, 1e-4)
		v[Entrainment], v[Subcooling] = between(0, 0.02), between(0, 20)
		if r.IntN(2) == 0 {
			v[Superheat] = between(0, 60)
		} else {
			v[Dryness] = between(0.8, 1)
		}
	}
	v[FeedFlow] = math.Exp(between(-3, 4))
	v[FeedSolids] = between(0.02, 0.4)
	strongest, coolest := 0.8, 280.0
	if l.ID() != "" { // within what the catalogue answers for
		strongest, coolest = 0.55, 310
	}
	v[SolidsOut] = between(v[FeedSolids]+0.02, strongest)
	v[VapourSaturationTemperature] = between(305, 400)
	rise, _, _ := l.Rise(v[SolidsOut], v[VapourSaturationTemperature])
	v[BoilingTemperature] = v[VapourSaturationTemperature] + rise
	v[ChestTemperature] = v[BoilingTemperature] + between(3, 50)
	v[FeedTemperature] = between(min(coolest, v[BoilingTemperature]), v[BoilingTemperature]+5)
	v[Coefficient] = between(300, 5000)
	v[ProductSolids], v[ProductTemperature], v[SteamTemperature] = v[SolidsOut], v[BoilingTemperature], v[ChestTemperature]
	v[drivingForce] = v[ChestTemperature] - v[BoilingTemperature]
	p, err := steam.SaturationPressure(quantity.Temperature(v[VapourSaturationTemperature]))
	v[EffectPressure] = must(float64(p), err)
	p, err = steam.SaturationPressure(quantity.Temperature(v[SteamTemperature]))
	v[SteamPressure] = must(float64(p), err)

	leaving := v[FeedFlow] * v[FeedSolids] / v[SolidsOut]
	v[VapourFlow] = v[FeedFlow] - leaving
	v[ProductFlow] = leaving - v[Entrainment]*v[VapourFlow]
	v[Evaporation] = v[VapourFlow]
	hf, _, _ := l.Enthalpy(v[FeedSolids], v[FeedTemperature])
	hl, _, _ := l.Enthalpy(v[SolidsOut], v[BoilingTemperature])
	hv, _, _, err := steam.VapourEnthalpy(quantity.Pressure(v[EffectPressure]), quantity.Temperature(v[BoilingTemperature]))
	must(hv, err)
	v[Duty] = (v[VapourFlow]*hv + leaving*hl - v[FeedFlow]*hf) / (1 - v[HeatLoss])
	live, err := liveSteam(quantity.Pressure(v[SteamPressure]), v[Superheat], v[Dryness])
	must(live, err)
	hc, _, err := steam.LiquidEnthalpy(quantity.Temperature(v[ChestTemperature] - v[Subcooling]))
	must(hc, err)
	v[SteamFlow] = v[Duty] / (live - hc) / (1 - v[Vent])
	v[Area] = v[Duty] * (1/v[Coefficient] + v[GasSideResistance]) / v[drivingForce]
	v[Economy] = v[VapourFlow] / v[SteamFlow]
	return v
}

// drawQuestion fixes numbers of a chosen plant, drawn at random from all that
// fix it.
func drawQuestion(r *rand.Rand, l *liquor.Liquor, v *state) (Plant, bool) {
	p := Plant{Liquor: l}
	order := r.Perm(int(numbers))
	q := &question{liquor: l}
	q.fit(nil)
	give := func(n Number) {
		p.Given = append(p.Given, Given{n, v[n]})
		q.fixed[n] = true
	}
	open := 0
	for n := range numbers {
		if standard, ok := defaultOf(n); ok {
			if open == 0 && r.IntN(8) == 0 && v[n] != standard && n != Superheat && n != Dryness {
				p.Find = append(p.Find, n)
				open++
				continue
			}
			give(n)
		}
	}
	for _, i := range order {
		n := Number(i)
		if q.fixed[n] || contains(p.Find, n) {
			continue
		}
		fixed := q.fixed
		fixed[n] = true
		if !q.overdetermined(&fixed) {
			give(n)
		}
	}
	g, _ := q.graph(&q.fixed)
	_, columns := g.Match().Unmatched()
	return p, columns == 0 && q.sized()
}

// liquors of every custom kind.
func liquors(t testing.TB) []*liquor.Liquor {
	row := func(w float64) liquor.EnthalpyRow {
		r := liquor.EnthalpyRow{Solids: w}
		for c := 0.0; c <= 350; c += 25 {
			r.Points = append(r.Points, liquor.EnthalpyPoint{
				Temperature: quantity.Celsius(c),
				Enthalpy:    quantity.KilojoulesPerKilogram(c*(4.2-2*w) + 300*w*w),
			})
		}
		return r
	}
	return []*liquor.Liquor{
		water(t), sugar(t),
		newLiquor(t, liquor.Custom{RiseConstant: point(8), SpecificHeat: []float64{3900, -1500}}),
		newLiquor(t, liquor.Custom{
			Duhring: []liquor.DuhringLine{{Solids: 0, Slope: 1}, {Solids: 0.2, Slope: 1.02, Intercept: 4}, {Solids: 0.5, Slope: 1.08, Intercept: 34}, {Solids: 0.8, Slope: 1.2, Intercept: 90}},
			EnthalpyTable: []liquor.EnthalpyRow{
				row(0), row(0.2), row(0.4), row(0.6), row(0.8), row(1),
			},
		}),
	}
}

// plants is how many random plants are asked for; the million that the design
// asks for is make plants.
var plants = flag.Int("plants", 6_000, "random plants in TestPlantsBuiltBackwards")

func named(t testing.TB, id string) *liquor.Liquor {
	t.Helper()
	l, err := liquor.ByID(id)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// TestPlantsBuiltBackwards asks for chosen plants from random sides: each must
// be answered by the chosen plant, or by another physical one that closes and
// has lower product solids, as the rule for several answers says.
func TestPlantsBuiltBackwards(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	own := liquors(t)
	kinds := append(own, named(t, "sucrose"), named(t, "sodium-hydroxide"))
	solved, others, unreported, sizeless, undecided, ofCatalogue := 0, 0, 0, 0, 0, 0
	for range *plants {
		l := kinds[r.IntN(len(kinds))]
		v := chosen(t, r, l, r.IntN(2) == 0)
		p, ok := drawQuestion(r, l, &v)
		if !ok {
			continue
		}
		if math.Abs(v[FeedTemperature]-v[BoilingTemperature]) < 5 {
			// Feed that enters at its boiling point leaves the energy balance
			// almost the same whatever the feed's flow: such a question is
			// ill-conditioned when it asks for that flow.
			continue
		}
		answer, err := Solve(p)
		var open *fault.Specification
		if errors.As(err, &open) && !open.Over {
			// The draw fixes one thing twice and leaves the plant's size open,
			// which structure alone does not show.
			sizeless++
			continue
		}
		if err != nil {
			if l.ID() != "" {
				ofCatalogue++
				continue
			}
			undecided++
			if undecided < 8 {
				var given []string
				for _, g := range p.Given {
					if _, isDefault := defaultOf(g.Number); !isDefault {
						given = append(given, g.Number.Path())
					}
				}
				t.Logf("%v\n given %v find %v\n chosen x %.4g -> %.4g Tw %.4g T %.5g Tc %.5g TF %.4g F %.4g", err, given, p.Find, v[FeedSolids], v[SolidsOut], v[VapourSaturationTemperature], v[BoilingTemperature], v[ChestTemperature], v[FeedTemperature], v[FeedFlow])
			}
			continue
		}
		near := true
		for n := range numbers {
			if math.Abs(answer.Value[n]-v[n]) > 1e-5*math.Max(math.Abs(v[n]), 1e-3) {
				near = false
			}
		}
		if near {
			solved++
			continue
		}
		others++
		if answer.Value[SolidsOut] > v[SolidsOut]*(1+1e-9) && l.ID() == "" {
			t.Errorf("another plant with higher product solids than the chosen one: %g, chosen %g", answer.Value[SolidsOut], v[SolidsOut])
		}
		if !slices.ContainsFunc(answer.Advisories, func(a evidence.Advisory) bool { return a.Code == evidence.SecondAnswer }) {
			unreported++
		}
	}
	t.Logf("the chosen plant %d, another with lower product solids %d (of which %d without a word of the chosen one), left open by the draw %d, undecided %d and of the catalogue %d", solved, others, unreported, sizeless, undecided, ofCatalogue)
	if sizeless > *plants/100 {
		t.Errorf("%d draws left open: more than their share", sizeless)
	}
	// Strong caustic's rise and heat bend so that a few questions about it have
	// roots that the search does not reach.
	if ofCatalogue > *plants/500 {
		t.Errorf("%d plants with catalogue liquors were not found: more than their share", ofCatalogue)
	}
	if undecided > 0 {
		t.Errorf("%d plants that can exist were not found", undecided)
	}
}

func TestFaultsAreFaults(t *testing.T) {
	var f fault.Fault
	_, err := Solve(Plant{Liquor: sugar(t)})
	if !errors.As(err, &f) {
		t.Errorf("%v", err)
	}
}
