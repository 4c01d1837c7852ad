// Package quantity holds the physical quantities that cross the engine's
// doors, as distinct types in SI units, with a constructor and a reader for
// every practical unit that callers use.
package quantity

// Zero is the Celsius zero in kelvin (ITS-90).
const Zero = 273.15

const (
	pascalPerKilopascal = 1e3
	pascalPerMegapascal = 1e6
	joulePerKilojoule   = 1e3
	secondsPerHour      = 3600
)

// Pressure is an absolute pressure in Pa.
type Pressure float64

// Kilopascals makes a Pressure from kPa absolute.
func Kilopascals(v float64) Pressure { return Pressure(v * pascalPerKilopascal) }

// Megapascals makes a Pressure from MPa absolute.
func Megapascals(v float64) Pressure { return Pressure(v * pascalPerMegapascal) }

// Kilopascals reads p in kPa absolute.
func (p Pressure) Kilopascals() float64 { return float64(p) / pascalPerKilopascal }

// Megapascals reads p in MPa absolute.
func (p Pressure) Megapascals() float64 { return float64(p) / pascalPerMegapascal }

// Temperature is a thermodynamic temperature in K.
type Temperature float64

// Celsius makes a Temperature from degC.
func Celsius(v float64) Temperature { return Temperature(v + Zero) }

// Celsius reads t in degC.
func (t Temperature) Celsius() float64 { return float64(t) - Zero }

// MassFlow is a mass flow in kg/s.
type MassFlow float64

// KilogramsPerHour reads m in kg/h.
func (m MassFlow) KilogramsPerHour() float64 { return float64(m) * secondsPerHour }

// Enthalpy is a specific enthalpy in J/kg.
type Enthalpy float64

// KilojoulesPerKilogram makes an Enthalpy from kJ/kg.
func KilojoulesPerKilogram(v float64) Enthalpy { return Enthalpy(v * joulePerKilojoule) }

// Fraction is a mass fraction in kg/kg, 0 to 1: solids of a liquor, dryness
// of steam.
type Fraction float64

// Entropy is a specific entropy in J/(kg K), 0 for saturated liquid at the
// triple point.
type Entropy float64

// KilojoulesPerKilogramKelvin makes a specific entropy from kJ/(kg K).
func KilojoulesPerKilogramKelvin(v float64) Entropy { return Entropy(v * joulePerKilojoule) }
