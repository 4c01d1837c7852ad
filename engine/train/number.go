// Package train holds the plant: its numbers, the equations between them, the
// structure of a question, and the solver that answers it.
//
// A question fixes some numbers and leaves others out; what is left out is
// solved for. Design, rating and the coefficient of a test are therefore the
// same call with other numbers given.
package train

// Number is a number of the plant that a question can fix, in SI units.
type Number int

// The numbers. The last seven are losses and the like: left out of a question
// they take a default instead of being solved for.
const (
	FeedFlow                    Number = iota // kg/s
	FeedSolids                                // kg/kg
	FeedTemperature                           // K
	ProductFlow                               // kg/s
	ProductSolids                             // kg/kg
	ProductTemperature                        // K
	SteamPressure                             // Pa
	SteamTemperature                          // K, saturation temperature of the live steam
	SteamFlow                                 // kg/s
	Area                                      // m2
	Coefficient                               // W/(m2 K)
	EffectPressure                            // Pa, in the vapour space
	BoilingTemperature                        // K, at the surface and at outlet solids
	VapourSaturationTemperature               // K, of water at the effect's pressure
	ChestTemperature                          // K, at which the chest condenses
	VapourFlow                                // kg/s, without entrained liquor
	Duty                                      // W, through the heating area
	SolidsOut                                 // kg/kg
	Evaporation                               // kg/s
	Economy                                   // kg evaporated per kg of live steam
	Superheat                                 // K, of the live steam
	Dryness                                   // kg/kg, of the live steam
	HeatLoss                                  // fraction of the duty, lost from the liquor side
	Vent                                      // fraction of the steam to the chest
	GasSideResistance                         // m2 K/W
	Entrainment                               // kg liquor per kg vapour
	Subcooling                                // K, of the condensate
	numbers                                   // how many there are

	drivingForce = numbers // K; not to be fixed, but solved with the rest

	// The numbers from here on belong to parts that a plant has only if the
	// question gives them.
	FeedVolumeFlow    = numbers + 1 // m3/s
	ProductVolumeFlow = numbers + 2 // m3/s
	Circulation       = numbers + 3 // kg/s, liquor pumped through the heater
	LiquorLevel       = numbers + 4 // m, from the bottom of the heating surface to the liquor's
	unknowns          = numbers + 5
)

// kind groups numbers that share bounds and sizes.
type kind int

const (
	flow kind = iota
	fraction
	temperature
	pressure
	difference
	positive
	resistance
	length
)

// detail is what the solver and its messages need to know of a number.
type detail struct {
	path string // field path in a request
	kind kind
	unit string // SI unit
}

var details = [unknowns]detail{
	FeedFlow:                    {"feed.flow_kg_per_h", flow, "kg/s"},
	FeedSolids:                  {"feed.solids_fraction", fraction, ""},
	FeedTemperature:             {"feed.temperature_c", temperature, "K"},
	ProductFlow:                 {"product.flow_kg_per_h", flow, "kg/s"},
	ProductSolids:               {"product.solids_fraction", fraction, ""},
	ProductTemperature:          {"product.temperature_c", temperature, "K"},
	SteamPressure:               {"steam.pressure_kpa_abs", pressure, "Pa"},
	SteamTemperature:            {"steam.temperature_c", temperature, "K"},
	SteamFlow:                   {"steam.flow_kg_per_h", flow, "kg/s"},
	Area:                        {"effect.area_m2", positive, "m2"},
	Coefficient:                 {"effect.coefficient_w_per_m2_k", positive, "W/(m2 K)"},
	EffectPressure:              {"effect.pressure_kpa_abs", pressure, "Pa"},
	BoilingTemperature:          {"effect.boiling_temperature_c", temperature, "K"},
	VapourSaturationTemperature: {"effect.vapour_saturation_temperature_c", temperature, "K"},
	ChestTemperature:            {"effect.chest_temperature_c", temperature, "K"},
	VapourFlow:                  {"effect.vapour_kg_per_h", flow, "kg/s"},
	Duty:                        {"effect.duty_kw", positive, "W"},
	SolidsOut:                   {"effect.solids_fraction_out", fraction, ""},
	Evaporation:                 {"evaporation_kg_per_h", flow, "kg/s"},
	Economy:                     {"economy", positive, ""},
	Superheat:                   {"steam.superheat_k", difference, "K"},
	Dryness:                     {"steam.dryness_fraction", fraction, ""},
	HeatLoss:                    {"effect.heat_loss_fraction", fraction, ""},
	Vent:                        {"effect.vent_fraction", fraction, ""},
	GasSideResistance:           {"effect.gas_side_resistance_m2_k_per_w", resistance, "m2 K/W"},
	Entrainment:                 {"effect.entrainment_kg_per_kg", fraction, ""},
	Subcooling:                  {"effect.condensate_subcooling_k", difference, "K"},
	drivingForce:                {"effect.driving_force_k", difference, "K"},
	FeedVolumeFlow:              {"feed.volume_flow_m3_per_h", flow, "m3/s"},
	ProductVolumeFlow:           {"product.volume_flow_m3_per_h", flow, "m3/s"},
	Circulation:                 {"effect.circulation_kg_per_h", flow, "kg/s"},
	LiquorLevel:                 {"effect.liquor_level_m", length, "m"},
}

// Path returns the field path of n in a request.
func (n Number) Path() string { return details[n].path }

// NumberAt returns the number with a field path.
func NumberAt(path string) (Number, bool) {
	for n := range unknowns {
		if details[n].path == path && n != drivingForce {
			return n, true
		}
	}
	return 0, false
}

// defaultOf returns what a number takes that is left out, if it has a
// default.
func defaultOf(n Number) (float64, bool) {
	switch n {
	case Dryness:
		return 1, true
	case Superheat, HeatLoss, Vent, GasSideResistance, Entrainment, Subcooling, LiquorLevel:
		return 0, true
	}
	return 0, false
}

// coldest and hottest are the temperatures in K between which the equations
// of a plant are solved: the triple point of water, and the upper end of
// IAPWS R7-97 regions 1 and 2 on the saturation line.
const (
	coldest = 273.16
	hottest = 623.15
)

// bounds are the ends of what is physically possible.
func bounds(n Number) (low, high float64) {
	switch details[n].kind {
	case flow, positive, resistance:
		return 0, 1e15
	case fraction:
		return 0, 1
	case temperature:
		return coldest, hottest
	case pressure:
		return 500, 17e6
	case length:
		return 0, 100
	default: // difference
		return 0, 500
	}
}
