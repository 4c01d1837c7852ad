package train

import (
	"fmt"
	"math"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
)

// closes is by how much a balance may fail to close, relative to what enters.
const closes = 1e-9

// answer completes a state to an answer and refuses it if a property was used
// where it does not hold or a balance does not close.
func (q *question) answer(v *state) (*Answer, error) {
	a := &Answer{
		DrivingForce:          v[drivingForce],
		Rise:                  v[BoilingTemperature] - v[VapourSaturationTemperature],
		CondensateTemperature: v[ChestTemperature] - v[Subcooling],
		VentFlow:              v[SteamFlow] * v[Vent],
		Condensate:            v[SteamFlow] * (1 - v[Vent]),
		HeatLossRate:          v[Duty] * v[HeatLoss],
		Entrained:             v[VapourFlow] * v[Entrainment],
	}
	copy(a.Value[:], v[:numbers])
	switch {
	case v[Circulation] > 0:
		_, _, cp := q.liquor.Enthalpy(v[SolidsOut], v[BoilingTemperature])
		a.Circulation, a.LiquorHeating = v[Circulation], v[Duty]/(v[Circulation]*cp)
	case v[LiquorLevel] > 0:
		a.LiquorLevel, a.StaticHead = v[LiquorLevel], v[ChestTemperature]-v[BoilingTemperature]-v[drivingForce]
	}
	a.Crystals, a.SolubilityKnown = q.liquor.Crystals(v[SolidsOut], v[BoilingTemperature])
	if rho, _, _, ok := q.liquor.Density(v[FeedSolids], v[FeedTemperature]); ok {
		a.FeedVolume = v[FeedFlow] / rho
	}
	if rho, _, _, ok := q.liquor.Density(v[SolidsOut], v[BoilingTemperature]); ok {
		a.ProductVolume = v[ProductFlow] / rho
	}
	for n := range numbers {
		if q.byDefault[n] {
			a.Defaults = append(a.Defaults, Given{n, v[n]})
		}
	}
	if q.levelByDefault() {
		a.Defaults = append(a.Defaults, Given{LiquorLevel, 0})
	}
	if err := q.check(v, a); err != nil {
		return nil, err
	}
	if err := q.closure(v, a); err != nil {
		return nil, err
	}
	q.remark(v, a)
	a.Models = append(steam.Models(), q.liquor.Models()...)
	for i := range a.Models {
		for _, remark := range a.Advisories {
			if remark.Code == evidence.OutsideRange && a.Models[i].ID == "custom-enthalpy-table" ||
				remark.Code == evidence.OutsideRange && a.Models[i].ID == q.liquor.ID()+"-rise" ||
				remark.Code == evidence.HeldBeyondStrength && (a.Models[i].ID == "custom-rise-duhring" || a.Models[i].ID == "custom-rise-table") {
				a.Models[i].Inside = false
			}
		}
	}
	return a, nil
}

// check asks the liquor whether its figures hold where they were used.
func (q *question) check(v *state, a *Answer) error {
	const largestRise = 200 // K
	if !(a.Rise >= -1e-9 && a.Rise <= largestRise) {
		return &fault.Range{Quantity: "boiling-point rise of the custom liquor", Unit: "K difference", Source: fmt.Sprintf("custom_liquor at solids %.4g kg/kg", v[SolidsOut]), Value: a.Rise, Min: 0, Max: largestRise}
	}
	if a.CondensateTemperature < quantity.Zero {
		return &fault.Infeasible{
			Effect: "effect", Cause: fault.OutOfBounds, Field: Subcooling.Path(), Amount: quantity.Zero - a.CondensateTemperature, Unit: "K difference",
			Detail: fmt.Sprintf("The condensate would leave at %.2f degC, below its freezing point.", a.CondensateTemperature-quantity.Zero),
		}
	}
	a.Advisories = append(a.Advisories, q.liquor.CheckRise(v[SolidsOut])...)
	for _, w := range [...]float64{v[FeedSolids], v[SolidsOut]} {
		if err := q.liquor.CheckDensity(w); err != nil {
			return err
		}
	}
	feed, err := q.liquor.CheckEnthalpy(v[FeedSolids], v[FeedTemperature])
	if err != nil {
		return err
	}
	product, err := q.liquor.CheckEnthalpy(v[SolidsOut], v[BoilingTemperature])
	if err != nil {
		return err
	}
	a.Advisories = append(a.Advisories, product...)
	for _, remark := range feed {
		if remark.Code != evidence.NoHeatOfDilution {
			a.Advisories = append(a.Advisories, remark)
		}
	}
	return nil
}

// closure recomputes the balances of the whole effect, chest included, from
// its streams. It shares no equation with the solver: the vapour is taken at
// its pressure, and the live steam from its pressure, dryness and superheat.
func (q *question) closure(v *state, a *Answer) error {
	vapour, _, _, err := steam.VapourEnthalpy(quantity.Pressure(v[EffectPressure]), quantity.Temperature(v[BoilingTemperature]))
	if err != nil {
		return err
	}
	a.VapourEnthalpy = vapour
	live, err := liveSteam(quantity.Pressure(v[SteamPressure]), v[Superheat], v[Dryness])
	if err != nil {
		return err
	}
	condensate, _, err := steam.LiquidEnthalpy(quantity.Temperature(a.CondensateTemperature))
	if err != nil {
		return err
	}
	feed, _, _ := q.liquor.Enthalpy(v[FeedSolids], v[FeedTemperature])
	product, _, _ := q.liquor.Enthalpy(v[SolidsOut], v[BoilingTemperature])

	in := v[FeedFlow]
	out := v[ProductFlow] + v[VapourFlow] + a.Entrained
	a.Closure.Mass = math.Abs(in-out) / in
	if in := v[FeedFlow] * v[FeedSolids]; in > 0 {
		a.Closure.Solids = math.Abs(in-(v[ProductFlow]+a.Entrained)*v[SolidsOut]) / in
	}
	in = v[FeedFlow]*feed + v[SteamFlow]*live
	out = v[VapourFlow]*vapour + (v[ProductFlow]+a.Entrained)*product + a.Condensate*condensate + a.VentFlow*live + a.HeatLossRate
	a.Closure.Energy = math.Abs(in-out) / (math.Abs(v[FeedFlow]*feed) + v[SteamFlow]*math.Abs(live))
	for _, c := range [...]struct {
		name  string
		value float64
	}{{"mass balance", a.Closure.Mass}, {"solids balance", a.Closure.Solids}, {"energy balance", a.Closure.Energy}} {
		if !(c.value <= closes) {
			return &fault.NotConverged{Residual: c.value, Where: c.name}
		}
	}
	return nil
}

// liveSteam is the enthalpy in J/kg of steam as it is supplied.
func liveSteam(p quantity.Pressure, superheat, dryness float64) (float64, error) {
	t, err := steam.SaturationTemperature(p)
	if err != nil {
		return 0, err
	}
	dry, _, _, err := steam.VapourEnthalpy(p, t+quantity.Temperature(superheat))
	if err != nil || dryness == 1 {
		return dry, err
	}
	saturated, _, _, err := steam.VapourEnthalpy(p, t)
	if err != nil {
		return 0, err
	}
	liquid, _, err := steam.LiquidEnthalpy(t)
	return dry - (1-dryness)*(saturated-liquid), err
}

// remark adds what a person should know beside the numbers.
func (q *question) remark(v *state, a *Answer) {
	const smallForce = 2.0 // K
	if v[FeedTemperature] > v[BoilingTemperature] {
		a.Advisories = append(a.Advisories, evidence.Advisory{
			Code: evidence.FeedFlashes, Field: FeedTemperature.Path(),
			Message: fmt.Sprintf("The feed enters at %.2f degC, hotter than the liquor boils (%.2f degC), and flashes.", v[FeedTemperature]-quantity.Zero, v[BoilingTemperature]-quantity.Zero),
		})
	}
	if v[drivingForce] < smallForce {
		a.Advisories = append(a.Advisories, evidence.Advisory{
			Code: evidence.SmallDrivingForce, Warning: true, Field: "effect.driving_force_k",
			Message: fmt.Sprintf("The driving force is only %.3g K: an error of 0.1 K in any temperature moves area or duty by %.0f %%.", v[drivingForce], 10/v[drivingForce]),
			Limit:   "2 K",
		})
	}
}

// nameOther adds that another physical answer exists.
func (a *Answer) nameOther(other *Answer) {
	a.Advisories = append(a.Advisories, evidence.Advisory{
		Code: evidence.SecondAnswer, Warning: true, Field: ProductSolids.Path(),
		Message: fmt.Sprintf("Another physical answer exists, with product solids of %.6g kg/kg, %.6g kg/h evaporated and %.6g kg/h of live steam.",
			other.Value[SolidsOut], quantity.MassFlow(other.Value[VapourFlow]).KilogramsPerHour(), quantity.MassFlow(other.Value[SteamFlow]).KilogramsPerHour()),
	})
}
