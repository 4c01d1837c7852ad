package convert

import (
	"calandria.example/calandria/engine/train"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// EffectRequest makes the engine's question from a request.
func EffectRequest(m *calandriav1.SolveEffectRequest) (train.Plant, error) {
	l, err := CustomLiquor(m.GetCustomLiquor())
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
	}
	if s := m.GetProduct(); s != nil {
		give(train.ProductFlow, s.FlowKgPerH)
		give(train.ProductSolids, s.SolidsFraction)
		give(train.ProductTemperature, s.TemperatureC)
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
	solution := &calandriav1.EffectSolution{
		Feed: &calandriav1.Stream{
			FlowKgPerH:     shown(train.FeedFlow),
			SolidsFraction: shown(train.FeedSolids),
			TemperatureC:   shown(train.FeedTemperature),
		},
		Product: &calandriav1.Stream{
			FlowKgPerH:     shown(train.ProductFlow),
			SolidsFraction: shown(train.ProductSolids),
			TemperatureC:   shown(train.ProductTemperature),
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
	}
	if solution.GetEconomy() > 0 {
		specific := 1 / solution.GetEconomy()
		solution.SpecificSteamConsumptionKgPerKg = &specific
	}
	for _, d := range a.Defaults {
		solution.DefaultsApplied = append(solution.DefaultsApplied, &calandriav1.DefaultApplied{
			Field: d.Number.Path(), Value: FromSI(d.Number.Path(), d.Value),
		})
	}
	return solution
}
