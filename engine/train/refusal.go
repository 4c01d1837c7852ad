package train

import (
	"fmt"
	"math"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
)

// refusal finds the words for a question without a physical answer: what the
// walks ran into, or failing that the answer that the equations have when
// physical limits are set aside.
func (s *search) refusal() error {
	if s.dependent != nil {
		return s.dependent
	}
	for i := range s.dead {
		if why := impossible(&s.dead[i], s.question); why != nil {
			return why
		}
	}
	if why := s.question.beyondItsEnds(); why != nil {
		return why
	}
	free := search{question: s.question, blocks: s.blocks}
	free.from(0, s.question.value)
	for i := range free.found {
		if why := unphysical(&free.found[i], s.question); why != nil {
			return why
		}
		// A plant that could be, but for the reach of the liquor's figures.
		if _, why := s.question.answer(&free.found[i]); why != nil {
			return why
		}
	}
	for i := range free.dead {
		if why := impossible(&free.dead[i], s.question); why != nil {
			return why
		}
	}
	return &fault.NotConverged{Iterations: s.iterations + free.iterations, Residual: s.residual, Where: relationNames[s.where]}
}

// beyondItsEnds looks at all that an effect can do with its feed, from no
// evaporation at all to all water boiled off. If the plant would use more, or
// less, of something than is given all the way, that is the reason.
func (q *question) beyondItsEnds() error {
	if !q.fixed[FeedSolids] || q.fixed[SolidsOut] || q.fixed[ProductSolids] || q.value[FeedSolids] <= 0 {
		return nil
	}
	const (
		places = 12
		short  = 1e-6 // of either end
	)
	for _, n := range [...]Number{Area, SteamFlow, Duty, VapourFlow, Evaporation} {
		if !q.fixed[n] {
			continue
		}
		given := q.value[n]
		least, most := math.Inf(1), math.Inf(-1)
		first, last := false, false
		for i := range places {
			f := short + (1-2*short)*float64(i)/(places-1)
			use, ok := q.atSolids(q.value[FeedSolids]+(1-q.value[FeedSolids])*f, n)
			if !ok {
				continue
			}
			least, most = math.Min(least, use), math.Max(most, use)
			first, last = first || i == 0, last || i == places-1
		}
		switch {
		case last && most < given:
			return &fault.Infeasible{
				Effect: "effect", Cause: fault.OutOfBounds, Field: n.Path(), Amount: given - most, Unit: details[n].unit,
				Detail: n.Path() + " is more than the feed can use, up to boiling off all of its water.",
			}
		case first && least > given:
			return &fault.Infeasible{
				Effect: "effect", Cause: fault.NegativeEvaporation, Field: n.Path(), Amount: least - given, Unit: details[n].unit,
				Detail: n.Path() + " does not even bring the feed to its boiling point.",
			}
		}
	}
	return nil
}

// atSolids solves the question with given outlet solids in place of number n,
// and returns what n would then be.
func (q *question) atSolids(w float64, n Number) (float64, bool) {
	other := *q
	other.fixed[n], other.value[n] = false, math.NaN()
	other.fixed[SolidsOut], other.value[SolidsOut] = true, w
	blocks, err := other.blocks()
	if err != nil {
		return 0, false
	}
	s := search{question: &other, blocks: blocks, physical: true}
	s.from(0, other.value)
	if len(s.found) == 0 {
		return 0, false
	}
	return s.found[0][n], true
}

// impossible looks at a walk that ended early: if the temperatures that were
// already found leave no driving force, or the flows ask for the wrong
// direction, that is the reason.
func impossible(v *state, q *question) error {
	known := func(n Number) bool { return !math.IsNaN(v[n]) }
	if known(ChestTemperature) && known(BoilingTemperature) && v[ChestTemperature] <= v[BoilingTemperature] {
		return noDrivingForce(v)
	}
	if known(ChestTemperature) && known(VapourSaturationTemperature) {
		// The rise at the feed's solids is the least that the product can have.
		solids := v[FeedSolids]
		if known(SolidsOut) {
			solids = v[SolidsOut]
		}
		if !math.IsNaN(solids) || !q.liquor.RiseDependsOnSolids() {
			rise, _, _ := q.liquor.Rise(solids, v[VapourSaturationTemperature])
			if short := v[VapourSaturationTemperature] + rise - v[ChestTemperature]; short >= 0 {
				lowest := *v
				lowest[BoilingTemperature] = v[VapourSaturationTemperature] + rise
				return noDrivingForce(&lowest)
			}
		}
	}
	if known(FeedSolids) && known(SolidsOut) && v[SolidsOut] < v[FeedSolids] {
		return weakerProduct(v)
	}
	if known(FeedFlow) && known(ProductFlow) && v[ProductFlow] > v[FeedFlow] {
		if known(FeedSolids) && v[FeedSolids] > 0 {
			diluted := *v
			diluted[SolidsOut] = v[FeedSolids] * v[FeedFlow] / v[ProductFlow]
			return weakerProduct(&diluted)
		}
		return &fault.Infeasible{
			Effect: "effect", Cause: fault.NegativeEvaporation, Field: VapourFlow.Path(), Amount: v[ProductFlow] - v[FeedFlow], Unit: "kg/s",
			Detail: "More liquor would leave than enters.",
		}
	}
	return nil
}

func noDrivingForce(v *state) error {
	short := v[BoilingTemperature] - v[ChestTemperature]
	if short < 0 && v[drivingForce] <= 0 {
		return &fault.Infeasible{
			Effect: "effect", Cause: fault.NoDrivingForce, Field: drivingForce.Path(), Amount: -v[drivingForce], Unit: "K difference",
			Detail: fmt.Sprintf("The static head takes more than the %.2f K between the chest (%.2f degC) and the boiling liquor.", -short, v[ChestTemperature]-quantity.Zero),
		}
	}
	return &fault.Infeasible{
		Effect: "effect", Cause: fault.NoDrivingForce, Field: drivingForce.Path(), Amount: short, Unit: "K difference",
		Detail: fmt.Sprintf("The liquor would boil at %.2f degC but the chest condenses at %.2f degC: the driving force is short by %.2f K.", v[BoilingTemperature]-quantity.Zero, v[ChestTemperature]-quantity.Zero, short),
	}
}

func weakerProduct(v *state) error {
	return &fault.Infeasible{
		Effect: "effect", Cause: fault.WeakerProduct, Field: ProductSolids.Path(), Amount: v[FeedSolids] - v[SolidsOut], Unit: "",
		Detail: fmt.Sprintf("The product (solids %.6g kg/kg) would be weaker than the feed (%.6g kg/kg).", v[SolidsOut], v[FeedSolids]),
	}
}

// unphysical returns the first reason why a whole answer can not be a plant.
func unphysical(v *state, q *question) error {
	const rounding = 1e-9
	if v[drivingForce] <= 0 {
		return noDrivingForce(v)
	}
	if v[SolidsOut] < v[FeedSolids]*(1-rounding) {
		return weakerProduct(v)
	}
	if v[VapourFlow] < -rounding*math.Abs(v[FeedFlow]) {
		return &fault.Infeasible{
			Effect: "effect", Cause: fault.NegativeEvaporation, Field: VapourFlow.Path(), Amount: -v[VapourFlow], Unit: "kg/s",
			Detail: "The liquor would take up water instead of giving it off.",
		}
	}
	for n := range unknowns {
		if q.fixed[n] {
			continue
		}
		low, high := bounds(n)
		slack := rounding * math.Max(1, math.Abs(v[n]))
		strictlyAbove := details[n].kind == positive || n == FeedFlow || n == ProductFlow || n == SteamFlow
		if v[n] < low-slack || v[n] > high+slack || math.IsNaN(v[n]) || strictlyAbove && v[n] <= 0 {
			cause, amount := fault.OutOfBounds, math.Max(low-v[n], v[n]-high)
			words := "would lie outside of what is possible"
			if v[n] <= 0 && low == 0 {
				cause, amount, words = fault.NegativeFlow, -v[n], "would not be positive"
			}
			unit := details[n].unit
			if unit == "K" {
				unit = "K difference"
			}
			return &fault.Infeasible{
				Effect: "effect", Cause: cause, Field: n.Path(), Amount: amount, Unit: unit,
				Detail: n.Path() + " " + words + ".",
			}
		}
	}
	if v[Superheat] > rounding && v[Dryness] < 1-rounding {
		return &fault.Infeasible{
			Effect: "effect", Cause: fault.OutOfBounds, Field: Dryness.Path(), Amount: 1 - v[Dryness], Unit: "",
			Detail: fmt.Sprintf("The live steam would have to be wet (dryness %.6g) and superheated (by %.6g K) at once.", v[Dryness], v[Superheat]),
		}
	}
	return nil
}
