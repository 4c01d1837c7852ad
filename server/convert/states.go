package convert

import (
	"fmt"
	"slices"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/steam"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// SteamColumns is a request for many states on its way to its answer.
type SteamColumns struct {
	pair          pair
	first, second []float64
	answer        *calandriav1.SteamStates
	state         *steam.State // at work: one for all, so that none needs memory of its own
	put           []func(index int32, s *steam.State)
	remarked      map[string]*calandriav1.StatesAdvisory
}

// SteamStatesRequest reads a request for many states. What is wrong with the
// columns as such is wrong with the request; their numbers are looked at one by
// one.
func SteamStatesRequest(m *calandriav1.ComputeSteamStatesRequest) (*SteamColumns, error) {
	columns := map[string][]float64{
		pressureField: m.GetPressureKpaAbs(), temperatureField: m.GetTemperatureC(), drynessField: m.GetDrynessFraction(),
		enthalpyField: m.GetEnthalpyKjPerKg(), entropyField: m.GetEntropyKjPerKgK(),
	}
	var given []string
	for _, name := range coordinates {
		if len(columns[name]) > 0 {
			given = append(given, name)
		}
	}
	chosen, err := pairOf(given)
	if err != nil {
		return nil, err
	}
	c := &SteamColumns{
		pair: chosen, first: columns[chosen.first], second: columns[chosen.second],
		state: new(steam.State), answer: nil, put: nil, remarked: map[string]*calandriav1.StatesAdvisory{},
	}
	if len(c.first) != len(c.second) {
		return nil, &fault.Invalid{
			Field: chosen.second, Value: fmt.Sprintf("%d long", len(c.second)),
			Limit:  fmt.Sprintf("as many as %s has, %d", chosen.first, len(c.first)),
			WayOut: "give both numbers of every state",
		}
	}
	c.answer = &calandriav1.SteamStates{
		Index: make([]int32, 0, len(c.first)), Region: nil, Phase: nil,
		PressureKpaAbs: nil, TemperatureC: nil, SpecificVolumeM3PerKg: nil, DensityKgPerM3: nil, EnthalpyKjPerKg: nil,
		InternalEnergyKjPerKg: nil, EntropyKjPerKgK: nil, DrynessFraction: nil, SpecificHeatCpKjPerKgK: nil, SpecificHeatCvKjPerKgK: nil,
		SpeedOfSoundMPerS: nil, ViscosityPaS: nil, ConductivityWPerMK: nil, SurfaceTensionNPerM: nil,
		Advisories: nil, Failures: nil, Provenance: nil,
	}
	c.columns(m.GetWant())
	return c, nil
}

// columns prepares the columns that are wanted; all if none is named.
func (c *SteamColumns) columns(want []string) {
	a, rows := c.answer, len(c.first)
	wanted := func(name string) bool { return len(want) == 0 || slices.Contains(want, name) }
	full := func(name string, column *[]float64, read func(s *steam.State) float64) {
		if wanted(name) {
			*column = make([]float64, 0, rows)
			c.put = append(c.put, func(_ int32, s *steam.State) { *column = append(*column, read(s)) })
		}
	}
	sparse := func(name string, column **calandriav1.SparseColumn, read func(s *steam.State) (float64, bool)) bool {
		if !wanted(name) {
			return false
		}
		*column = &calandriav1.SparseColumn{Index: nil, Value: nil}
		c.put = append(c.put, func(index int32, s *steam.State) {
			if v, exists := read(s); exists {
				(*column).Index = append((*column).Index, index)
				(*column).Value = append((*column).Value, v)
			}
		})
		return true
	}
	if wanted("region") {
		a.Region = make([]int32, 0, rows)
		c.put = append(c.put, func(_ int32, s *steam.State) { a.Region = append(a.Region, int32(s.Region)) })
	}
	if wanted("phase") {
		a.Phase = make([]calandriav1.Phase, 0, rows)
		c.put = append(c.put, func(_ int32, s *steam.State) { a.Phase = append(a.Phase, phases[s.Phase]) })
	}
	full(pressureField, &a.PressureKpaAbs, func(s *steam.State) float64 { return s.Pressure.Kilopascals() })
	full(temperatureField, &a.TemperatureC, func(s *steam.State) float64 { return s.Temperature.Celsius() })
	full("specific_volume_m3_per_kg", &a.SpecificVolumeM3PerKg, func(s *steam.State) float64 { return s.Volume })
	full("density_kg_per_m3", &a.DensityKgPerM3, func(s *steam.State) float64 { return 1 / s.Volume })
	full(enthalpyField, &a.EnthalpyKjPerKg, func(s *steam.State) float64 { return s.Enthalpy / 1e3 })
	full("internal_energy_kj_per_kg", &a.InternalEnergyKjPerKg, func(s *steam.State) float64 { return s.InternalEnergy / 1e3 })
	full(entropyField, &a.EntropyKjPerKgK, func(s *steam.State) float64 { return s.Entropy / 1e3 })
	sparse(drynessField, &a.DrynessFraction, func(s *steam.State) (float64, bool) { return float64(s.Dryness), s.Saturated })
	sparse("specific_heat_cp_kj_per_kg_k", &a.SpecificHeatCpKjPerKgK, func(s *steam.State) (float64, bool) { return s.Cp / 1e3, s.OnePhase })
	sparse("specific_heat_cv_kj_per_kg_k", &a.SpecificHeatCvKjPerKgK, func(s *steam.State) (float64, bool) { return s.Cv / 1e3, s.OnePhase })
	sparse("speed_of_sound_m_per_s", &a.SpeedOfSoundMPerS, func(s *steam.State) (float64, bool) { return s.SpeedOfSound, s.OnePhase })
	viscosity := sparse("viscosity_pa_s", &a.ViscosityPaS, func(s *steam.State) (float64, bool) { return s.Viscosity() })
	conductivity := sparse("conductivity_w_per_m_k", &a.ConductivityWPerMK, func(s *steam.State) (float64, bool) { return s.Conductivity() })
	tension := sparse("surface_tension_n_per_m", &a.SurfaceTensionNPerM, func(s *steam.State) (float64, bool) { return s.SurfaceTension() })
	a.Provenance = provenance(steamModels(viscosity, conductivity, tension))
}

// Len is how many states are asked for.
func (c *SteamColumns) Len() int { return len(c.first) }

// Item is the request for one of the states alone.
func (c *SteamColumns) Item(i int) *calandriav1.GetSteamStateRequest {
	value := func(name string) *float64 {
		switch name {
		case c.pair.first:
			return &c.first[i]
		case c.pair.second:
			return &c.second[i]
		}
		return nil
	}
	return &calandriav1.GetSteamStateRequest{
		PressureKpaAbs: value(pressureField), TemperatureC: value(temperatureField), DrynessFraction: value(drynessField),
		EnthalpyKjPerKg: value(enthalpyField), EntropyKjPerKgK: value(entropyField),
		RequireEngineVersion: nil, // looked at for all of them
	}
}

// Values are the two numbers of one of the states, and their fields.
func (c *SteamColumns) Values(i int) (first, second string, a, b float64) {
	return c.pair.first, c.pair.second, c.first[i], c.second[i]
}

// Compute puts one of the states into the answer, or returns why it has none.
func (c *SteamColumns) Compute(i int) error {
	var err error
	if *c.state, err = c.pair.at(c.first[i], c.second[i]); err != nil {
		return err
	}
	index := int32(i)
	c.answer.Index = append(c.answer.Index, index)
	for _, put := range c.put {
		put(index, c.state)
	}
	remarks := c.state.Advisories()
	for k, remark := range remarks {
		group, ok := c.remarked[remark.Message]
		if !ok {
			group = &calandriav1.StatesAdvisory{Advisory: advisories(remarks)[k], Index: nil}
			c.remarked[remark.Message] = group
			c.answer.Advisories = append(c.answer.Advisories, group)
		}
		group.Index = append(group.Index, index)
	}
	return nil
}

// An answer that is all failures must still pass the 4 MiB that gRPC clients
// take unless told otherwise: words cost up to 700 bytes a state, numbers 135.
const (
	failuresInWords = 2000
	withoutWords    = "The first 2000 failures are put into words; ask for this state alone."
)

// Fail puts into the answer that one of the states has none.
func (c *SteamColumns) Fail(i int, reason calandriav1.Reason, message string, violations []*calandriav1.Violation) {
	if len(c.answer.Failures) >= failuresInWords {
		message, violations = withoutWords, nil
	}
	c.answer.Failures = append(c.answer.Failures, &calandriav1.StateFailure{Index: int32(i), Reason: reason, Message: message, Violations: violations})
}

// Answer is the answer so far.
func (c *SteamColumns) Answer() *calandriav1.SteamStates { return c.answer }
