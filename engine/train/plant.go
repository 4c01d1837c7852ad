package train

import (
	"errors"
	"math"
	"strconv"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/liquor"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
)

// Given is a number that a question fixes, in SI units.
type Given struct {
	Number Number
	Value  float64
}

// Plant is a question about one effect: what is concentrated, the numbers
// that are fixed, and those to solve for that would otherwise take their
// default.
type Plant struct {
	Liquor *liquor.Liquor
	Given  []Given
	Find   []Number
}

// Closure is by how much the balances fail to close, relative to what enters,
// computed from the answer apart from the solver.
type Closure struct {
	Mass, Solids, Energy float64
}

// Answer holds every number of the plant, in SI units.
type Answer struct {
	Value    [numbers]float64 // by Number
	Defaults []Given          // what took its default

	Rise                  float64 // K, boiling-point rise
	DrivingForce          float64 // K
	VapourEnthalpy        float64 // J/kg
	Condensate            float64 // kg/s
	CondensateTemperature float64 // K
	HeatLossRate          float64 // W
	VentFlow              float64 // kg/s
	Entrained             float64 // kg/s
	StaticHead            float64 // K, at half the liquor level
	LiquorLevel           float64 // m
	Circulation           float64 // kg/s; 0 without a pump
	LiquorHeating         float64 // K, of the circulating liquor
	FeedVolume            float64 // m3/s; 0 if the density is not known
	ProductVolume         float64 // m3/s; 0 if the density is not known
	Crystals              float64 // kg/kg of the product
	SolubilityKnown       bool

	Closure    Closure
	Advisories []evidence.Advisory
	Models     []evidence.Model
}

// At returns a number of the answer, in SI units; those of parts that the plant
// does not have are 0.
func (a *Answer) At(n Number) float64 {
	switch n {
	case drivingForce:
		return a.DrivingForce
	case FeedVolumeFlow:
		return a.FeedVolume
	case ProductVolumeFlow:
		return a.ProductVolume
	case Circulation:
		return a.Circulation
	case LiquorLevel:
		return a.LiquorLevel
	}
	return a.Value[n]
}

// question is a plant with every number known to be fixed or sought.
type question struct {
	liquor    *liquor.Liquor
	equations []equation
	fixed     [unknowns]bool
	byDefault [unknowns]bool
	absent    [unknowns]bool // of a part that the plant does not have

	levelGiven bool  // if only as 0
	value      state // NaN where not fixed
}

func newQuestion(p Plant) (*question, error) {
	q := &question{liquor: p.Liquor}
	for n := range unknowns {
		q.value[n] = math.NaN()
	}
	var problems []error
	complain := func(n Number, value, limit, wayOut string) {
		problems = append(problems, &fault.Invalid{Field: n.Path(), Value: value, Limit: limit, WayOut: wayOut})
	}
	for _, g := range p.Given {
		low, high := doorBounds(g.Number)
		shown := strconv.FormatFloat(g.Value, 'g', -1, 64) + " " + details[g.Number].unit
		switch {
		case math.IsNaN(g.Value) || math.IsInf(g.Value, 0):
			complain(g.Number, shown, "a finite number", "leave it out to have it solved for")
		case !(g.Value >= low && g.Value <= high):
			problems = append(problems, &fault.Range{Quantity: g.Number.Path(), Unit: details[g.Number].unit, Source: "the effect model", Value: g.Value, Min: low, Max: high})
		case q.fixed[g.Number]:
			complain(g.Number, "given twice", "once", "drop one of the two")
		}
		q.fixed[g.Number], q.value[g.Number] = true, g.Value
	}
	for _, n := range p.Find {
		if _, ok := defaultOf(n); !ok {
			complain(n, "in find", "only numbers that have a default", "leave it out: what is left out is solved for")
		}
		if q.fixed[n] {
			complain(n, "given and in find", "one of the two", "drop its value, or drop it from find")
		}
	}
	if q.fixed[Superheat] && q.value[Superheat] > 0 && q.fixed[Dryness] && q.value[Dryness] < 1 {
		complain(Dryness, strconv.FormatFloat(q.value[Dryness], 'g', -1, 64), "1 for superheated steam", "give superheat_k or a dryness below 1, not both")
	}
	for _, n := range [...]Number{FeedVolumeFlow, ProductVolumeFlow, LiquorLevel} {
		if asked := q.fixed[n] && q.value[n] != 0 || contains(p.Find, n); asked && !p.Liquor.HasDensity() {
			complain(n, "asked for", "only for a liquor whose density is known", "give custom_liquor.density_kg_per_m3 or density_polynomial")
		}
	}
	if asked := q.fixed[LiquorLevel] && q.value[LiquorLevel] > 0 || contains(p.Find, LiquorLevel); asked && q.fixed[Circulation] {
		complain(LiquorLevel, "given beside "+Circulation.Path(), "one of the two", "drop one: liquor that is pumped around does not boil in the tubes, and its driving force has no static head")
	}
	if len(problems) > 0 {
		return nil, errors.Join(problems...)
	}
	if p.Liquor.Pure() && !q.fixed[FeedSolids] && !q.fixed[ProductSolids] && !q.fixed[SolidsOut] {
		q.fixed[FeedSolids], q.byDefault[FeedSolids], q.value[FeedSolids] = true, true, 0
	}
	q.fit(p.Find)
	for n := range numbers {
		value, ok := defaultOf(n)
		if !ok || q.fixed[n] || contains(p.Find, n) {
			continue
		}
		q.fixed[n], q.byDefault[n], q.value[n] = true, true, value
	}
	return q, nil
}

// fit sees which parts the plant has: a part of which the question gives no
// number adds neither unknowns nor equations.
func (q *question) fit(find []Number) {
	q.levelGiven = q.fixed[LiquorLevel]
	level := q.fixed[LiquorLevel] && q.value[LiquorLevel] > 0 || contains(find, LiquorLevel)
	has := parts{feedVolume: q.fixed[FeedVolumeFlow], productVolume: q.fixed[ProductVolumeFlow], level: level, circulation: q.fixed[Circulation]}
	for _, part := range [...]struct {
		number Number
		there  bool
	}{{FeedVolumeFlow, has.feedVolume}, {ProductVolumeFlow, has.productVolume}, {Circulation, has.circulation}, {LiquorLevel, has.level}} {
		if n := part.number; !part.there {
			q.fixed[n], q.absent[n], q.value[n] = true, true, math.NaN()
		}
	}
	q.equations = equationsOf(q.liquor, has)
}

// levelByDefault tells whether the liquor level was left out where it could have
// been given.
func (q *question) levelByDefault() bool {
	return q.absent[LiquorLevel] && !q.levelGiven && q.absent[Circulation] && q.liquor.HasDensity()
}

// doorBounds are what a question may fix a number to: the bounds of the
// solver, but temperatures from 0 degC on, and pressures exactly as far as the
// saturation line goes between the temperatures of the model.
func doorBounds(n Number) (low, high float64) {
	low, high = bounds(n)
	switch details[n].kind {
	case temperature:
		low = quantity.Zero
	case pressure:
		// Both temperatures lie on the line: there is no error.
		bottom, _ := steam.SaturationPressure(coldest)
		top, _ := steam.SaturationPressure(hottest)
		low, high = float64(bottom), float64(top)
	}
	return low, high
}

func contains(list []Number, n Number) bool {
	for _, m := range list {
		if m == n {
			return true
		}
	}
	return false
}
