// Package convert is the one place where messages become the engine's
// quantities and back. The unit of a field stands in its name; this file knows
// what each suffix means.
package convert

import (
	"strings"

	"calandria.example/calandria/engine/quantity"
)

// unit is a practical unit: SI = (practical + offset) * factor.
type unit struct {
	suffix string
	words  string
	factor float64
	offset float64
}

// units in the order in which suffixes are tried: longer before shorter.
var units = []unit{
	{"_m2_k_per_w", "m2 K/W", 1, 0},
	{"_w_per_m2_k", "W/(m2 K)", 1, 0},
	{"_kj_per_kg_k", "kJ/(kg K)", 1e3, 0},
	{"_kj_per_kg", "kJ/kg", 1e3, 0},
	{"_kg_per_h", "kg/h", 1. / 3600, 0},
	{"_m3_per_h", "m3/h", 1. / 3600, 0},
	{"_kg_per_kg", "kg/kg", 1, 0},
	{"_kg_per_m3", "kg/m3", 1, 0},
	{"_w_per_m_k", "W/(m K)", 1, 0},
	{"_n_per_m", "N/m", 1, 0},
	{"_pa_s", "Pa s", 1, 0},
	{"_m3_per_kg", "m3/kg", 1, 0},
	{"_m_per_s", "m/s", 1, 0},
	{"_kpa_abs", "kPa absolute", 1e3, 0},
	{"_fraction", "kg/kg", 1, 0},
	{"_fraction_out", "kg/kg", 1, 0},
	{"_m2", "m2", 1, 0},
	{"_kw", "kW", 1e3, 0},
	{"_m", "m", 1, 0},
	{"_c", "degC", 1, quantity.Zero},
	{"_k", "K", 1, 0},
}

func unitOf(field string) unit {
	for _, u := range units {
		if strings.HasSuffix(field, u.suffix) {
			return u
		}
	}
	return unit{"", "", 1, 0}
}

// Unit returns the unit that a field's name carries, in words; "" for none.
func Unit(field string) string { return unitOf(field).words }

// toSI reads a field's value into SI.
func toSI(field string, v float64) float64 {
	u := unitOf(field)
	return (v + u.offset) * u.factor
}

// FromSI reads an SI value into the unit of a field.
func FromSI(field string, v float64) float64 {
	u := unitOf(field)
	return v/u.factor - u.offset
}

// Practical words an SI value in the unit that people use: the unit is the
// engine's own word for it.
func Practical(value float64, si string) (float64, string) {
	switch si {
	case "K":
		return value - quantity.Zero, "degC"
	case "K difference":
		return value, "K"
	case "Pa":
		return value / 1e3, "kPa absolute"
	case "J/kg":
		return value / 1e3, "kJ/kg"
	case "J/(kg K)":
		return value / 1e3, "kJ/(kg K)"
	case "kg/s":
		return value * 3600, "kg/h"
	case "m3/s":
		return value * 3600, "m3/h"
	case "W":
		return value / 1e3, "kW"
	case "":
		return value, "kg/kg"
	}
	return value, si
}
