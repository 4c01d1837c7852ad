package steam

import "math"

// gasConstant is the specific gas constant of water in J/(kg K), IAPWS
// R7-97(2012) Eq. 1.
const gasConstant = 461.526

// term is one term n x^i y^j of a printed sum.
type term struct {
	i, j int
	n    float64
}

// gibbs is a dimensionless Gibbs energy and its derivatives.
type gibbs struct {
	pi, tau                                       float64
	value, byPi, byPiPi, byTau, byTauTau, byPiTau float64
}

// power is x to a whole power, by repeated squaring.
func power(x float64, n int) float64 {
	if n < 0 {
		x, n = 1/x, -n
	}
	result := 1.0
	for ; n > 0; n >>= 1 {
		if n&1 == 1 {
			result *= x
		}
		x *= x
	}
	return result
}

// fill sets the properties of s from g: the relations of Table 3, which hold
// for the whole Gibbs energy of either region.
func (g gibbs) fill(s *State, p, t float64) {
	rt := gasConstant * t
	mixed := g.byPi - g.tau*g.byPiTau
	s.Volume = rt / p * g.pi * g.byPi
	s.Enthalpy = rt * g.tau * g.byTau
	s.InternalEnergy = rt * (g.tau*g.byTau - g.pi*g.byPi)
	s.Entropy = gasConstant * (g.tau*g.byTau - g.value)
	s.Cp = -gasConstant * g.tau * g.tau * g.byTauTau
	s.Cv = s.Cp + gasConstant*mixed*mixed/g.byPiPi
	s.SpeedOfSound = math.Sqrt(rt * g.byPi * g.byPi / (mixed*mixed/(g.tau*g.tau*g.byTauTau) - g.byPiPi))
	s.VolumeByTemperature = gasConstant / p * g.pi * mixed
	s.VolumeByPressure = rt / (p * p) * g.pi * g.pi * g.byPiPi
	s.OnePhase = true
}
