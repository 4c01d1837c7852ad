package convert

import (
	"errors"
	"strings"

	"calandria.example/calandria/engine/evidence"
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
	enthalpyField    = "enthalpy_kj_per_kg"
	entropyField     = "entropy_kj_per_kg_k"
)

// coordinates are the fields that a state can be asked by, in their order.
var coordinates = []string{pressureField, temperatureField, drynessField, enthalpyField, entropyField}

// pair is two coordinates that tell a state, first and second in their order,
// and how.
type pair struct {
	first, second string
	state         func(a, b float64) (steam.State, error)
}

var pairs = []pair{
	{pressureField, temperatureField, func(p, t float64) (steam.State, error) {
		return steam.AtPressureTemperature(quantity.Kilopascals(p), quantity.Celsius(t))
	}},
	{pressureField, drynessField, func(p, x float64) (steam.State, error) {
		return steam.AtPressureDryness(quantity.Kilopascals(p), quantity.Fraction(x))
	}},
	{pressureField, enthalpyField, func(p, h float64) (steam.State, error) {
		return steam.AtPressureEnthalpy(quantity.Kilopascals(p), quantity.KilojoulesPerKilogram(h))
	}},
	{pressureField, entropyField, func(p, s float64) (steam.State, error) {
		return steam.AtPressureEntropy(quantity.Kilopascals(p), quantity.KilojoulesPerKilogramKelvin(s))
	}},
	{temperatureField, drynessField, func(t, x float64) (steam.State, error) {
		return steam.AtTemperatureDryness(quantity.Celsius(t), quantity.Fraction(x))
	}},
	{enthalpyField, entropyField, func(h, s float64) (steam.State, error) {
		return steam.AtEnthalpyEntropy(quantity.KilojoulesPerKilogram(h), quantity.KilojoulesPerKilogramKelvin(s))
	}},
}

// SteamRequest computes the state that a request asks for.
func SteamRequest(m *calandriav1.GetSteamStateRequest) (steam.State, error) {
	values := map[string]*float64{
		pressureField: m.PressureKpaAbs, temperatureField: m.TemperatureC, drynessField: m.DrynessFraction,
		enthalpyField: m.EnthalpyKjPerKg, entropyField: m.EntropyKjPerKgK,
	}
	chosen, err := pairOf(present(values, coordinates...))
	if err != nil {
		return steam.State{}, err
	}
	return chosen.at(*values[chosen.first], *values[chosen.second])
}

// at computes the state at two values.
func (p pair) at(a, b float64) (steam.State, error) {
	s, err := p.state(a, b)
	if err != nil {
		return s, inFields(err)
	}
	return s, nil
}

// pairOf finds the pair that the given fields are.
func pairOf(given []string) (pair, error) {
	switch len(given) {
	case 0:
		return pair{}, tooFew(2, coordinates...)
	case 1:
		return pair{}, tooFew(1, partners(given[0])...)
	case 2:
	default:
		// Two fix a state: any three are an irreducible conflict, more are not.
		return pair{}, tooMany(given[:3]...)
	}
	var names []string
	for _, p := range pairs {
		if p.first == given[0] && p.second == given[1] {
			return p, nil
		}
		names = append(names, p.first+" with "+p.second)
	}
	return pair{}, &fault.Invalid{
		Field: given[1], Value: "given with " + given[0], Limit: strings.Join(names, "; "),
		WayOut: "that pair may have no state or two: give one of the pairs that have one",
	}
}

// partners are the coordinates that make a pair with one.
func partners(given string) []string {
	var names []string
	for _, name := range coordinates {
		for _, p := range pairs {
			if p.first == given && p.second == name || p.second == given && p.first == name {
				names = append(names, name)
			}
		}
	}
	return names
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
	case "enthalpy":
		named.Quantity = enthalpyField
	case "entropy":
		named.Quantity = entropyField
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
	liquid, vapour, err = steam.SaturationAtPressure(quantity.Kilopascals(*p))
	return liquid, vapour, inFields(err)
}

// SteamState makes the answer for one state.
func SteamState(s steam.State) *calandriav1.SteamState {
	m := steamState(s)
	m.Advisories = advisories(s.Advisories())
	m.Provenance = provenance(steamModels(m.ViscosityPaS != nil, m.ConductivityWPerMK != nil, m.SurfaceTensionNPerM != nil))
	return m
}

// SteamModels are all models of the steam properties.
func SteamModels() []evidence.Model { return steamModels(true, true, true) }

// steamModels are the models that an answer rests on, by what stands in it.
func steamModels(viscosity, conductivity, tension bool) []evidence.Model {
	list := steam.Models()
	for i, used := range []bool{viscosity, conductivity, tension} {
		if used {
			list = append(list, steam.TransportModels()[i])
		}
	}
	return list
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
		ViscosityPaS:           nil,
		ConductivityWPerMK:     nil,
		SurfaceTensionNPerM:    nil,
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
	m.ViscosityPaS = existing(s.Viscosity())
	m.ConductivityWPerMK = existing(s.Conductivity())
	m.SurfaceTensionNPerM = existing(s.SurfaceTension())
	return m
}

func existing(v float64, exists bool) *float64 {
	if !exists {
		return nil
	}
	return &v
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
		Provenance:        provenance(SteamModels()),
	}
}
