package convert

import (
	"errors"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

var phases = map[steam.Phase]calandriav1.Phase{
	steam.CompressedLiquid:  calandriav1.Phase_PHASE_COMPRESSED_LIQUID,
	steam.SaturatedLiquid:   calandriav1.Phase_PHASE_SATURATED_LIQUID,
	steam.WetSteam:          calandriav1.Phase_PHASE_WET_STEAM,
	steam.SaturatedVapour:   calandriav1.Phase_PHASE_SATURATED_VAPOUR,
	steam.SuperheatedVapour: calandriav1.Phase_PHASE_SUPERHEATED_VAPOUR,
	steam.Supercritical:     calandriav1.Phase_PHASE_SUPERCRITICAL,
}

const (
	pressureField    = "pressure_kpa_abs"
	temperatureField = "temperature_c"
	drynessField     = "dryness_fraction"
)

// SteamRequest computes the state that a request asks for.
func SteamRequest(m *calandriav1.GetSteamStateRequest) (steam.State, error) {
	var s steam.State
	var err error
	p, t, x := m.PressureKpaAbs, m.TemperatureC, m.DrynessFraction
	given := present(map[string]*float64{pressureField: p, temperatureField: t, drynessField: x}, pressureField, temperatureField, drynessField)
	switch {
	case len(given) > 2:
		return s, tooMany(given...)
	case len(given) == 0:
		return s, tooFew(2, pressureField, temperatureField, drynessField)
	case len(given) == 1:
		return s, tooFew(1, others(given[0])...)
	case x == nil:
		s, err = steam.AtPressureTemperature(quantity.Kilopascals(*p), quantity.Celsius(*t))
	case p != nil:
		s, err = steam.AtPressureDryness(quantity.Kilopascals(*p), quantity.Fraction(*x))
	default:
		s, err = steam.AtTemperatureDryness(quantity.Celsius(*t), quantity.Fraction(*x))
	}
	return s, inFields(err)
}

func tooMany(fields ...string) error {
	return &fault.Specification{Over: true, Conflict: fields, Missing: 0, Closers: nil}
}

func tooFew(missing int, fields ...string) error {
	return &fault.Specification{Over: false, Conflict: nil, Missing: missing, Closers: fields}
}

func present(values map[string]*float64, order ...string) []string {
	var names []string
	for _, name := range order {
		if values[name] != nil {
			names = append(names, name)
		}
	}
	return names
}

func others(given string) []string {
	var names []string
	for _, name := range []string{pressureField, temperatureField, drynessField} {
		if name != given {
			names = append(names, name)
		}
	}
	return names
}

// inFields names a steam fault's quantity by the field that it came from.
func inFields(err error) error {
	var outside *fault.Range
	if !errors.As(err, &outside) {
		return err
	}
	named := *outside
	switch outside.Quantity {
	case "pressure":
		named.Quantity = pressureField
	case "temperature":
		named.Quantity = temperatureField
	case "dryness":
		named.Quantity = drynessField
	}
	return &named
}

// SaturationRequest computes both saturated phases that a request asks for.
func SaturationRequest(m *calandriav1.GetSaturationRequest) (liquid, vapour steam.State, err error) {
	p, t := m.PressureKpaAbs, m.TemperatureC
	switch {
	case p != nil && t != nil:
		return liquid, vapour, tooMany(pressureField, temperatureField)
	case p == nil && t == nil:
		return liquid, vapour, tooFew(1, pressureField, temperatureField)
	case t != nil:
		liquid, vapour, err = steam.Saturation(quantity.Celsius(*t))
		return liquid, vapour, inFields(err)
	}
	if liquid, err = steam.AtPressureDryness(quantity.Kilopascals(*p), 0); err == nil {
		vapour, err = steam.AtPressureDryness(quantity.Kilopascals(*p), 1)
	}
	return liquid, vapour, inFields(err)
}

// SteamState makes the answer for one state.
func SteamState(s steam.State) *calandriav1.SteamState {
	m := steamState(s)
	m.Provenance = provenance(steam.Models())
	return m
}

func steamState(s steam.State) *calandriav1.SteamState {
	m := &calandriav1.SteamState{
		Region:                 int32(s.Region),
		Phase:                  phases[s.Phase],
		PressureKpaAbs:         s.Pressure.Kilopascals(),
		TemperatureC:           s.Temperature.Celsius(),
		DrynessFraction:        nil,
		SpecificVolumeM3PerKg:  s.Volume,
		DensityKgPerM3:         1 / s.Volume,
		EnthalpyKjPerKg:        s.Enthalpy / 1e3,
		InternalEnergyKjPerKg:  s.InternalEnergy / 1e3,
		EntropyKjPerKgK:        s.Entropy / 1e3,
		SpecificHeatCpKjPerKgK: nil,
		SpecificHeatCvKjPerKgK: nil,
		SpeedOfSoundMPerS:      nil,
		Advisories:             nil,
		Provenance:             nil,
	}
	if s.Saturated {
		m.DrynessFraction = pointer(float64(s.Dryness))
	}
	if s.OnePhase {
		m.SpecificHeatCpKjPerKgK = pointer(s.Cp / 1e3)
		m.SpecificHeatCvKjPerKgK = pointer(s.Cv / 1e3)
		m.SpeedOfSoundMPerS = pointer(s.SpeedOfSound)
	}
	return m
}

func pointer(v float64) *float64 { return &v }

// Saturation makes the answer for both phases.
func Saturation(liquid, vapour steam.State) *calandriav1.Saturation {
	return &calandriav1.Saturation{
		TemperatureC:      liquid.Temperature.Celsius(),
		PressureKpaAbs:    liquid.Pressure.Kilopascals(),
		Liquid:            steamState(liquid),
		Vapour:            steamState(vapour),
		LatentHeatKjPerKg: (vapour.Enthalpy - liquid.Enthalpy) / 1e3,
		Advisories:        nil,
		Provenance:        provenance(steam.Models()),
	}
}
