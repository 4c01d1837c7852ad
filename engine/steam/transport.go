package steam

import (
	"math"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam/release"
)

// hottestTransport is where IAPWS R12-08 and R15-11 end, in K. They begin at
// 273.16 K; the 10 mK down to the start of R7-97 are taken along.
const hottestTransport = 1173.15

// Viscosity returns the dynamic viscosity in Pa s, by IAPWS R12-08 without its
// critical enhancement, as that release recommends for industrial use. It does
// not exist (ok is false) in wet steam and above 1173.15 K.
func (s State) Viscosity() (mu float64, ok bool) {
	if s.Region == 4 || s.Temperature > hottestTransport {
		return 0, false
	}
	return viscosity(1/s.Volume, float64(s.Temperature)), true
}

// Conductivity returns the thermal conductivity in W/(m K), by IAPWS R15-11
// with the critical enhancement for industrial use. It does not exist (ok is
// false) in wet steam, above 1173.15 K and at the critical point.
func (s State) Conductivity() (lambda float64, ok bool) {
	parts, ok := s.ConductivityParts()
	return parts.Total(), ok
}

// SurfaceTension returns the surface tension between the saturated phases in
// N/m, by IAPWS R1-76(2014). It exists (ok is true) on the saturation line.
func (s State) SurfaceTension() (sigma float64, ok bool) {
	if !s.Saturated {
		return 0, false
	}
	tau := 1 - float64(s.Temperature)/critical
	return 235.8e-3 * math.Pow(tau, 1.256) * (1 - 0.625*tau), true
}

// Viscosity returns the dynamic viscosity in Pa s at p and t, off the
// saturation line and up to 1173.15 K, as State.Viscosity does.
func Viscosity(p quantity.Pressure, t quantity.Temperature) (float64, error) {
	if t > hottestTransport {
		return 0, outsideTransport(t, "IAPWS R12-08")
	}
	rho, err := Density(p, t)
	if err != nil {
		return 0, err
	}
	return viscosity(rho, float64(t)), nil
}

// Conductivity returns the thermal conductivity in W/(m K) at p and t, off the
// saturation line and up to 1173.15 K, as State.Conductivity does.
func Conductivity(p quantity.Pressure, t quantity.Temperature) (float64, error) {
	if t > hottestTransport {
		return 0, outsideTransport(t, "IAPWS R15-11")
	}
	at, err := placeOf(float64(p), float64(t))
	if err != nil {
		return 0, err
	}
	if at.region == 3 {
		rho, err := densityAt(float64(p), float64(t), at.dense)
		if err != nil {
			return 0, err
		}
		return conductivity3(rho, float64(t))
	}
	g := response(at.region, float64(p), float64(t))
	mixed := g.byPi - g.byPiTau
	cp := -gasConstant * g.byTauTau
	rho := float64(p) / (gasConstant * float64(t) * g.byPi)
	return conductivity(rho, float64(t), cp, cp+gasConstant*mixed*mixed/g.byPiPi, -rho*g.byPiPi/(float64(p)*g.byPi)).Total(), nil
}

// response returns the derivatives of a region other than 3 that its volume,
// heat capacities and compressibility take.
func response(region int, p, t float64) (g gibbs) {
	switch region {
	case 1:
		g.byPi, g.byPiPi, g.byTauTau, g.byPiTau = region1Response(p, t)
	case 2:
		g.byPi, g.byPiPi, g.byTauTau, g.byPiTau = region2Response(p, t)
	default:
		g.byPi, g.byPiPi, g.byTauTau, g.byPiTau = region5Response(p, t)
	}
	return g
}

// conductivity3 is the conductivity of region 3 at a density. At the critical
// point it does not exist.
func conductivity3(rho, t float64) (float64, error) {
	byDelta, byDeltaDelta, byTauTau, byDeltaTau := region3Response(rho, t)
	first := release.Region3Log + byDelta
	stiffness := 2*first + byDeltaDelta - release.Region3Log // (dp/drho)_T over R T
	if !(stiffness > leastStiffness) {
		return 0, &fault.Invalid{
			Field: "temperature", Value: "that of the critical point", Limit: "off the critical point",
			WayOut: "conductivity grows without bound there: give another pressure or temperature",
		}
	}
	mixed := first - byDeltaTau
	cv := -gasConstant * byTauTau
	return conductivity(rho, t, cv+gasConstant*mixed*mixed/stiffness, cv, 1/(gasConstant*t*stiffness)).Total(), nil
}

// ViscosityAtDensity returns the dynamic viscosity in Pa s at a density in kg/m3
// and t: IAPWS R12-08 without critical enhancement, up to 1173.15 K and, as the
// release's own tables go, 1200 kg/m3.
func ViscosityAtDensity(rho float64, t quantity.Temperature) (float64, error) {
	if err := insideTransport(rho, t, "IAPWS R12-08"); err != nil {
		return 0, err
	}
	return viscosity(rho, float64(t)), nil
}

// BackgroundConductivity returns the thermal conductivity in W/(m K) at a
// density in kg/m3 and t without its critical enhancement, which takes a state:
// IAPWS R15-11 Eqs. 16 and 17, up to 1173.15 K and 1200 kg/m3.
func BackgroundConductivity(rho float64, t quantity.Temperature) (float64, error) {
	if err := insideTransport(rho, t, "IAPWS R15-11"); err != nil {
		return 0, err
	}
	return background(rho, float64(t)), nil
}

func insideTransport(rho float64, t quantity.Temperature, source string) error {
	const heaviest = 1200.0
	if !(t >= coldest && t <= hottestTransport) {
		return outsideTransport(t, source)
	}
	if !(rho >= 0 && rho <= heaviest) {
		return outsideBy("density", "kg/m3", source, rho, 0, heaviest)
	}
	return nil
}

// viscosity is IAPWS R12-08 Eqs. 10 to 12 with mu2 = 1.
func viscosity(rho, t float64) float64 {
	inverse, delta := critical/t, rho/criticalDensity
	mu0 := 100e-6 / (math.Sqrt(inverse) * viscosity0(inverse))
	return mu0 * math.Exp(delta*viscosity1(inverse-1, delta-1))
}

// background is IAPWS R15-11 Eqs. 16 and 17.
func background(rho, t float64) float64 {
	inverse, delta := critical/t, rho/criticalDensity
	lambda0 := 1e-3 / (math.Sqrt(inverse) * conductivity0(inverse))
	return lambda0 * math.Exp(delta*conductivity1(inverse-1, delta-1))
}

// ConductivityParts is a thermal conductivity with what it is made of: the
// quantities that IAPWS R15-11 prints beside it in its Tables 7 to 9.
type ConductivityParts struct {
	Dilute            float64 // W/(m K), lambda0
	DensityFactor     float64 // lambda1
	Enhancement       float64 // W/(m K), lambda2
	CorrelationLength float64 // m, xi
	Crossover         float64 // Z(y)
	ReferenceSlope    float64 // kg/(m3 Pa), (drho/dp)_T at the reference temperature
}

// Total is the thermal conductivity in W/(m K).
func (c ConductivityParts) Total() float64 { return c.Dilute*c.DensityFactor + c.Enhancement }

// ConductivityParts returns the thermal conductivity with its parts. It exists
// where Conductivity does.
func (s State) ConductivityParts() (parts ConductivityParts, ok bool) {
	if !s.OnePhase || s.Temperature > hottestTransport {
		return parts, false
	}
	rho := 1 / s.Volume
	return conductivity(rho, float64(s.Temperature), s.Cp, s.Cv, -rho*rho*s.VolumeByPressure), true
}

// conductivity is IAPWS R15-11 Eqs. 15 to 25, with cp and cv in J/(kg K) and
// the derivative of density by pressure at constant temperature in kg/(m3 Pa).
func conductivity(rho, t, cp, cv, byPressure float64) ConductivityParts {
	const (
		amplitude    = 177.8514      // Lambda
		reach        = 1 / 0.40      // 1/nm
		correlation  = 0.13          // nm
		susceptible  = 0.06          // Gamma0
		reference    = 1.5           // reduced temperature
		exponent     = 0.630 / 1.239 // nu/gamma
		cpUnit       = 461.51805     // J/(kg K)
		pressureUnit = 22.064e6      // Pa
		smallest     = 1.2e-7        // of y, below which the enhancement vanishes
	)
	inverse, delta := critical/t, rho*(1/criticalDensity)
	root := math.Sqrt(inverse)
	zeta := byPressure * (pressureUnit / criticalDensity)
	zetaReference := referenceCompressibility(delta)
	parts := ConductivityParts{
		Dilute:         1e-3 / (root * conductivity0(inverse)),
		DensityFactor:  math.Exp(delta * conductivity1(inverse-1, delta-1)),
		ReferenceSlope: zetaReference * (criticalDensity / pressureUnit),
	}
	excess := delta * (zeta - zetaReference*reference*inverse)
	if excess <= 0 {
		return parts
	}
	xi := correlation * math.Exp(exponent*math.Log(excess*(1/susceptible)))
	parts.CorrelationLength = xi * 1e-9
	y := reach * xi
	if y < smallest {
		return parts
	}
	ratio := cv / cp
	// 1/(1/y + y^2/(3 delta^2)), with one division.
	square := 3 * delta * delta
	damping := y * square / (square + y*y*y)
	parts.Crossover = (2 / math.Pi) / y * ((1-ratio)*math.Atan(y) + ratio*y - 1 + math.Exp(-damping))
	fluidity := root * viscosity0(inverse) * math.Exp(-delta*viscosity1(inverse-1, delta-1)) // of 100 uPa s
	parts.Enhancement = 1e-5 * amplitude / cpUnit * delta * cp * fluidity * parts.Crossover / inverse
	return parts
}

// referenceCompressibility is IAPWS R15-11 Eq. 25: the compressibility at the
// reference temperature, where there is no enhancement.
func referenceCompressibility(delta float64) float64 {
	i := 0
	for i < len(release.CompressibilityEnds) && delta > release.CompressibilityEnds[i] {
		i++
	}
	a := &release.Compressibility[i]
	sum := a[5]
	for j := 4; j >= 0; j-- {
		sum = float64(sum*delta) + a[j]
	}
	return 1 / sum
}

func outsideTransport(t quantity.Temperature, source string) error {
	return outsideBy("temperature", "K", source, float64(t), coldest, hottestTransport)
}
