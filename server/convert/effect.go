package convert

import (
	"errors"
	"fmt"
	"strconv"

	"calandria.example/calandria/engine"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/train"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// EffectRequest makes the engine's question from a request.
func EffectRequest(m *calandriav1.SolveEffectRequest) (train.Plant, error) {
	l, err := Liquor(m.GetLiquor(), m.GetCustomLiquor())
	if err != nil {
		return train.Plant{}, err
	}
	p := train.Plant{Liquor: l, Given: nil, Find: nil}
	give := func(n train.Number, v *float64) {
		if v != nil {
			p.Given = append(p.Given, train.Given{Number: n, Value: toSI(n.Path(), *v)})
		}
	}
	if s := m.GetFeed(); s != nil {
		give(train.FeedFlow, s.FlowKgPerH)
		give(train.FeedSolids, s.SolidsFraction)
		give(train.FeedTemperature, s.TemperatureC)
		give(train.FeedVolumeFlow, s.VolumeFlowM3PerH)
	}
	if s := m.GetProduct(); s != nil {
		give(train.ProductFlow, s.FlowKgPerH)
		give(train.ProductSolids, s.SolidsFraction)
		give(train.ProductTemperature, s.TemperatureC)
		give(train.ProductVolumeFlow, s.VolumeFlowM3PerH)
	}
	if s := m.GetSteam(); s != nil {
		give(train.SteamPressure, s.PressureKpaAbs)
		give(train.SteamTemperature, s.TemperatureC)
		give(train.Superheat, s.SuperheatK)
		give(train.Dryness, s.DrynessFraction)
		give(train.SteamFlow, s.FlowKgPerH)
	}
	if e := m.GetEffect(); e != nil {
		give(train.Area, e.AreaM2)
		give(train.Coefficient, e.CoefficientWPerM2K)
		give(train.EffectPressure, e.PressureKpaAbs)
		give(train.BoilingTemperature, e.BoilingTemperatureC)
		give(train.VapourSaturationTemperature, e.VapourSaturationTemperatureC)
		give(train.ChestTemperature, e.ChestTemperatureC)
		give(train.VapourFlow, e.VapourKgPerH)
		give(train.Duty, e.DutyKw)
		give(train.SolidsOut, e.SolidsFractionOut)
		give(train.HeatLoss, e.HeatLossFraction)
		give(train.Vent, e.VentFraction)
		give(train.GasSideResistance, e.GasSideResistanceM2KPerW)
		give(train.Entrainment, e.EntrainmentKgPerKg)
		give(train.Subcooling, e.CondensateSubcoolingK)
		give(train.LiquorLevel, e.LiquorLevelM)
		give(train.Circulation, e.CirculationKgPerH)
	}
	give(train.Evaporation, m.EvaporationKgPerH)
	give(train.Economy, m.Economy)
	for _, path := range m.GetFind() {
		n, ok := train.NumberAt(path)
		if !ok {
			return p, unknownFind(path)
		}
		p.Find = append(p.Find, n)
	}
	return p, nil
}

// EffectSolution makes the answer from the engine's.
func EffectSolution(a *train.Answer) *calandriav1.EffectSolution {
	read := func(n train.Number) float64 { return FromSI(n.Path(), a.Value[n]) }
	shown := func(n train.Number) *float64 { v := read(n); return &v }
	// A part that the plant does not have is absent.
	part := func(n train.Number) *float64 { return existing(FromSI(n.Path(), a.At(n)), a.At(n) > 0) }
	solution := &calandriav1.EffectSolution{
		Feed: &calandriav1.Stream{
			FlowKgPerH:     shown(train.FeedFlow),
			SolidsFraction: shown(train.FeedSolids),
			TemperatureC:   shown(train.FeedTemperature),

			VolumeFlowM3PerH: part(train.FeedVolumeFlow),
		},
		Product: &calandriav1.Stream{
			FlowKgPerH:     shown(train.ProductFlow),
			SolidsFraction: shown(train.ProductSolids),
			TemperatureC:   shown(train.ProductTemperature),

			VolumeFlowM3PerH: part(train.ProductVolumeFlow),
		},
		Steam: &calandriav1.LiveSteam{
			PressureKpaAbs:  shown(train.SteamPressure),
			TemperatureC:    shown(train.SteamTemperature),
			SuperheatK:      shown(train.Superheat),
			DrynessFraction: shown(train.Dryness),
			FlowKgPerH:      shown(train.SteamFlow),
		},
		Effect: &calandriav1.SolvedEffect{
			AreaM2:                       read(train.Area),
			CoefficientWPerM2K:           read(train.Coefficient),
			PressureKpaAbs:               read(train.EffectPressure),
			BoilingTemperatureC:          read(train.BoilingTemperature),
			VapourSaturationTemperatureC: read(train.VapourSaturationTemperature),
			ChestTemperatureC:            read(train.ChestTemperature),
			VapourKgPerH:                 read(train.VapourFlow),
			DutyKw:                       read(train.Duty),
			SolidsFractionOut:            read(train.SolidsOut),
			HeatLossFraction:             read(train.HeatLoss),
			VentFraction:                 read(train.Vent),
			GasSideResistanceM2KPerW:     read(train.GasSideResistance),
			EntrainmentKgPerKg:           read(train.Entrainment),
			CondensateSubcoolingK:        read(train.Subcooling),
			LiquorInKgPerH:               read(train.FeedFlow),
			LiquorOutKgPerH:              read(train.ProductFlow),
			BoilingPointRiseK:            a.Rise,
			DrivingForceK:                a.DrivingForce,
			VapourEnthalpyKjPerKg:        FromSI("_kj_per_kg", a.VapourEnthalpy),
			CondensateKgPerH:             FromSI("_kg_per_h", a.Condensate),
			CondensateTemperatureC:       FromSI("_c", a.CondensateTemperature),
			HeatLossKw:                   FromSI("_kw", a.HeatLossRate),
			VentKgPerH:                   FromSI("_kg_per_h", a.VentFlow),
			EntrainedKgPerH:              FromSI("_kg_per_h", a.Entrained),
			LiquorLevelM:                 a.LiquorLevel,
			StaticHeadK:                  a.StaticHead,
			CirculationKgPerH:            part(train.Circulation),
			LiquorHeatingK:               existing(a.LiquorHeating, a.Circulation > 0),
			CrystalsFraction:             existing(a.Crystals, a.SolubilityKnown),
		},
		EvaporationKgPerH:               read(train.Evaporation),
		Economy:                         read(train.Economy),
		SpecificSteamConsumptionKgPerKg: nil,
		Closure: &calandriav1.Closure{
			Mass: a.Closure.Mass, Solids: a.Closure.Solids, Energy: a.Closure.Energy,
		},
		DefaultsApplied: nil,
		Advisories:      advisories(a.Advisories),
		Provenance:      provenance(a.Models),
		Sensitivities:   nil,
	}
	if solution.GetEconomy() > 0 {
		specific := 1 / solution.GetEconomy()
		solution.SpecificSteamConsumptionKgPerKg = &specific
	}
	solution.DefaultsApplied = defaultsApplied(a.Defaults)
	return solution
}

func defaultsApplied(list []train.Given) []*calandriav1.DefaultApplied {
	var messages []*calandriav1.DefaultApplied
	for _, d := range list {
		messages = append(messages, &calandriav1.DefaultApplied{Field: d.Number.Path(), Value: FromSI(d.Number.Path(), d.Value)})
	}
	return messages
}

// SensitivitiesOf reads whose sensitivities a request asks for.
func SensitivitiesOf(m *calandriav1.SolveEffectRequest) ([]train.Number, error) {
	var of []train.Number
	var problems []error
	for i, path := range m.GetSensitivitiesOf() {
		n, ok := train.NumberAt(path)
		if !ok {
			problems = append(problems, &fault.Invalid{
				Field: fmt.Sprintf("sensitivities_of[%d]", i), Value: strconv.Quote(path), Limit: "a path of the request, such as effect.area_m2",
				WayOut: "name a number that the request leaves out",
			})
		}
		of = append(of, n)
	}
	return of, errors.Join(problems...)
}

// Sensitivities makes messages of sensitivities at an answer, each in the units
// of its two fields.
func Sensitivities(a *train.Answer, list []train.Sensitivity) []*calandriav1.Sensitivity {
	messages := make([]*calandriav1.Sensitivity, len(list))
	for i, s := range list {
		of, by := unitOf(s.Of.Path()), unitOf(s.By.Path())
		m := &calandriav1.Sensitivity{Of: s.Of.Path(), By: s.By.Path(), Value: s.Value * by.factor / of.factor, Relative: nil}
		x, y := a.At(s.By), a.At(s.Of)
		if x != 0 && y != 0 && of.offset == 0 && by.offset == 0 {
			m.Relative = pointer(s.Value * x / y)
		}
		messages[i] = m
	}
	return messages
}

// EffectCheck makes the answer about a question's structure; too many or too
// few numbers are part of it, any other fault is an error.
func EffectCheck(c train.Check, err error) (*calandriav1.EffectCheck, error) {
	m := &calandriav1.EffectCheck{
		Determined: err == nil, Unknowns: nil, DefaultsApplied: defaultsApplied(c.Defaults),
		Conflict: nil, Missing: 0, Closers: nil, EngineVersion: engine.Version,
	}
	for _, n := range c.Unknowns {
		m.Unknowns = append(m.Unknowns, n.Path())
	}
	var specification *fault.Specification
	switch {
	case errors.As(err, &specification):
		m.Conflict, m.Missing, m.Closers = specification.Conflict, int32(specification.Missing), specification.Closers
	case err != nil:
		return nil, err
	}
	return m, nil
}
