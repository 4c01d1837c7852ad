package main

import "calandria.example/calandria/engine/steam/release"

// kernel is one generated function.
type kernel struct {
	name    string
	doc     string
	inputs  []string
	results []string
	formula *formula
	lanes   bool // whether a form for many points at once is made too
}

// Reducing constants of IAPWS R7-97(2012).
const (
	gas = 461.526 // J/(kg K), Eq. 1

	pressure1, temperature1 = 16.53e6, 1386.0
	pressure2, temperature2 = 1e6, 540.0
	density3, temperature3  = 322.0, 647.096
	pressure5, temperature5 = 1e6, 1000.0
)

var (
	value = order{0, 0}
	x, xx = order{1, 0}, order{2, 0}
	y, yy = order{0, 1}, order{0, 2}
	xy    = order{1, 1}
)

// kernels lists what is generated.
func kernels() []kernel {
	list := gibbsKernels("1", "IAPWS R7-97(2012) Eq. 7", temperature1, region1)
	list = append(list, gibbsKernels("2", "IAPWS R7-97(2012) Eqs. 15 to 17", temperature2, region2)...)
	list = append(list, gibbsKernels("5", "IAPWS R7-97(2012) Eqs. 32 to 34", temperature5, region5)...)
	list = append(list, helmholtzKernels()...)
	for _, b := range []struct {
		name, doc string
		equation  release.Backward
	}{
		{"backwardTemperature1ByEnthalpy", "IAPWS R7-97(2012) Eq. 11", release.TemperatureByEnthalpy1},
		{"backwardTemperature1ByEntropy", "IAPWS R7-97(2012) Eq. 13", release.TemperatureByEntropy1},
		{"backwardTemperature2aByEnthalpy", "IAPWS R7-97(2012) Eq. 22", release.TemperatureByEnthalpy2a},
		{"backwardTemperature2bByEnthalpy", "IAPWS R7-97(2012) Eq. 23", release.TemperatureByEnthalpy2b},
		{"backwardTemperature2cByEnthalpy", "IAPWS R7-97(2012) Eq. 24", release.TemperatureByEnthalpy2c},
		{"backwardTemperature2aByEntropy", "IAPWS R7-97(2012) Eq. 25, of the fourth root of the pressure,", release.TemperatureByEntropy2a},
		{"backwardTemperature2bByEntropy", "IAPWS R7-97(2012) Eq. 26", release.TemperatureByEntropy2b},
		{"backwardTemperature2cByEntropy", "IAPWS R7-97(2012) Eq. 27", release.TemperatureByEntropy2c},
		{"backwardVolume3aByEnthalpy", "IAPWS SR3-03(2014)", release.VolumeByEnthalpy3a},
		{"backwardVolume3bByEnthalpy", "IAPWS SR3-03(2014)", release.VolumeByEnthalpy3b},
		{"backwardTemperature3aByEnthalpy", "IAPWS SR3-03(2014)", release.TemperatureByEnthalpy3a},
		{"backwardTemperature3bByEnthalpy", "IAPWS SR3-03(2014)", release.TemperatureByEnthalpy3b},
		{"backwardVolume3aByEntropy", "IAPWS SR3-03(2014)", release.VolumeByEntropy3a},
		{"backwardVolume3bByEntropy", "IAPWS SR3-03(2014)", release.VolumeByEntropy3b},
		{"backwardTemperature3aByEntropy", "IAPWS SR3-03(2014)", release.TemperatureByEntropy3a},
		{"backwardTemperature3bByEntropy", "IAPWS SR3-03(2014)", release.TemperatureByEntropy3b},
	} {
		list = append(list, backward(b.name, b.doc, b.equation))
	}
	return append(list,
		series("viscosity0", "the sum in IAPWS R12-08 Eq. 11 at Tc/T", release.Viscosity0),
		double("viscosity1", "the sum in IAPWS R12-08 Eq. 12 at Tc/T - 1 and rho/rhoc - 1", release.Viscosity1),
		series("conductivity0", "the sum in IAPWS R15-11 Eq. 16 at Tc/T", release.Conductivity0),
		double("conductivity1", "the sum in IAPWS R15-11 Eq. 17 at Tc/T - 1 and rho/rhoc - 1", release.Conductivity1),
	)
}

// gibbs makes, in a formula, derivatives by pi and tau of the dimensionless
// Gibbs energy of one region, without the logarithm of pi.
type gibbs func(f *formula, p, t int, orders ...order) (pi, tau int, derivatives []int)

func region1(f *formula, p, t int, orders ...order) (pi, tau int, derivatives []int) {
	pi = f.scaled(1/pressure1, p)
	tau = f.divide(f.constant(temperature1), t)
	sums := f.sum(release.Region1, f.subtract(f.constant(7.1), pi), f.subtract(tau, f.constant(1.222)), orders...)
	for i, o := range orders {
		if o.x == 1 { // the base falls as pi rises
			sums[i] = f.scaled(-1, sums[i])
		}
	}
	return pi, tau, sums
}

func region2(f *formula, p, t int, orders ...order) (pi, tau int, derivatives []int) {
	pi = f.scaled(1/pressure2, p)
	tau = f.divide(f.constant(temperature2), t)
	return pi, tau, withIdeal(f, release.Region2Ideal, release.Region2Residual, pi, tau, f.subtract(tau, f.constant(0.5)), orders)
}

func region5(f *formula, p, t int, orders ...order) (pi, tau int, derivatives []int) {
	pi = f.scaled(1/pressure5, p)
	tau = f.divide(f.constant(temperature5), t)
	return pi, tau, withIdeal(f, release.Region5Ideal, release.Region5Residual, pi, tau, tau, orders)
}

// withIdeal adds the ideal part, which knows no pi, to the residual part.
func withIdeal(f *formula, ideal, residual []release.Term, pi, tau, shifted int, orders []order) []int {
	sums := f.sum(residual, pi, shifted, orders...)
	var inTau []order
	for _, o := range orders {
		if o.x == 0 {
			inTau = append(inTau, o)
		}
	}
	if len(inTau) == 0 {
		return sums
	}
	parts := f.sum(ideal, tau, tau, inTau...)
	for i, o := range orders {
		if o.x == 0 {
			sums[i] = f.add(sums[i], parts[0])
			parts = parts[1:]
		}
	}
	return sums
}

func gibbsKernels(region, source string, star float64, derivatives gibbs) []kernel {
	in := []string{"p", "t"}
	begin := func() (f *formula, p, t int) {
		f = newFormula()
		return f, f.input("p"), f.input("t")
	}
	// h = R T tau gamma_tau and cp = -R tau^2 gamma_tautau.
	enthalpy := func(f *formula, byTau int) int { return f.scaled(gas*star, byTau) }
	heat := func(f *formula, tau, byTauTau int) int {
		return f.multiply(f.scaled(-gas, f.multiply(tau, tau)), byTauTau)
	}
	logarithm := ""
	if region != "1" {
		logarithm = ", without the logarithm of the pressure"
	}
	var list []kernel
	f, p, t := begin()
	_, _, d := derivatives(f, p, t, y)
	f.results = []int{enthalpy(f, d[0])}
	list = append(list, kernel{"region" + region + "Enthalpy", "returns h in J/kg at p in Pa and t in K: " + source, in, []string{"h"}, f, region != "5"})

	f, p, t = begin()
	_, tau, d := derivatives(f, p, t, y, yy)
	f.results = []int{enthalpy(f, d[0]), heat(f, tau, d[1])}
	list = append(list, kernel{"region" + region + "EnthalpyHeat", "returns h in J/kg and cp in J/(kg K) at p in Pa and t in K: " + source, in, []string{"h", "cp"}, f, false})

	f, p, t = begin()
	_, tau, d = derivatives(f, p, t, value, y, yy)
	f.results = []int{f.scaled(gas, f.subtract(f.multiply(tau, d[1]), d[0])), heat(f, tau, d[2])}
	list = append(list, kernel{"region" + region + "EntropyHeat", "returns s in J/(kg K)" + logarithm + ", and cp in J/(kg K) at p in Pa and t in K: " + source, in, []string{"s", "cp"}, f, false})

	f, p, t = begin()
	_, _, d = derivatives(f, p, t, x)
	if region == "1" { // v = R T/p pi gamma_pi
		f.results = []int{f.multiply(f.scaled(gas/pressure1, t), d[0])}
	} else { // whose ideal part is R T/p
		f.results = []int{f.scaled(gas, f.multiply(t, f.fused(f.constant(1/pressure2), d[0], f.divide(f.constant(1), p))))}
	}
	list = append(list, kernel{"region" + region + "Volume", "returns v in m3/kg at p in Pa and t in K: " + source, in, []string{"v"}, f, false})

	f, p, t = begin()
	_, _, d = derivatives(f, p, t, value, x, xx, y, yy, xy)
	f.results = d
	part := "the dimensionless Gibbs energy"
	if region != "1" {
		part += ", without the logarithm of pi,"
	}
	list = append(list, kernel{"region" + region + "Gibbs", "returns " + part + " and its derivatives at p in Pa and t in K: " + source, in, []string{"value", "byPi", "byPiPi", "byTau", "byTauTau", "byPiTau"}, f, false})
	return list
}

func helmholtzKernels() []kernel {
	in := []string{"rho", "t"}
	begin := func() (f *formula, rho, t, delta, tau int) {
		f = newFormula()
		rho, t = f.input("rho"), f.input("t")
		return f, rho, t, f.scaled(1/density3, rho), f.divide(f.constant(temperature3), t)
	}
	// p = rho R T delta phi_delta; ln delta adds n1 to delta phi_delta.
	f, rho, t, delta, tau := begin()
	d := f.sum(release.Region3, delta, tau, x, xx)
	first := f.fused(delta, d[0], f.constant(release.Region3Log))
	second := f.fused(f.multiply(delta, delta), d[1], f.constant(-release.Region3Log))
	rt := f.scaled(gas, t)
	f.results = []int{
		f.multiply(f.multiply(rho, rt), first),
		f.multiply(rt, f.fused(f.constant(2), first, second)),
	}
	list := []kernel{{"region3Pressure", "returns p in Pa and its derivative by density in Pa m3/kg at rho in kg/m3 and t in K: IAPWS R7-97(2012) Eq. 28", in, []string{"p", "byDensity"}, f, false}}

	f, _, _, delta, tau = begin()
	f.results = f.sum(release.Region3, delta, tau, value, x, xx, y, yy, xy)
	return append(list, kernel{"region3Helmholtz", "returns the dimensionless Helmholtz energy, without its term in ln delta, and its derivatives at rho in kg/m3 and t in K: IAPWS R7-97(2012) Eq. 28", in, []string{"value", "byDelta", "byDeltaDelta", "byTau", "byTauTau", "byDeltaTau"}, f, false})
}

func backward(name, doc string, b release.Backward) kernel {
	f := newFormula()
	p, c := f.input("p"), f.input("c")
	first := p
	if b.Roots == 0 {
		first = f.fused(f.constant(1e-6/b.Pressure), p, f.constant(b.PressureShift))
	}
	second := f.fused(f.constant(1e-3/b.Coordinate), c, f.constant(b.CoordinateShift))
	total := f.sum(b.Terms, first, second, value)[0]
	if b.Scale != 1 {
		total = f.scaled(b.Scale, total)
	}
	f.results = []int{total}
	unit := "p in Pa"
	if b.Roots != 0 {
		unit = "p in MPa^(1/4)"
	}
	return kernel{name, "is " + doc + " at " + unit + " and c in J/kg or J/(kg K)", []string{"p", "c"}, []string{"result"}, f, false}
}

func series(name, doc string, coefficients []float64) kernel {
	f := newFormula()
	at := f.input("at")
	total := f.constant(coefficients[len(coefficients)-1])
	for i := len(coefficients) - 2; i >= 0; i-- {
		total = f.fused(total, at, f.constant(coefficients[i]))
	}
	f.results = []int{total}
	return kernel{name, "is " + doc, []string{"at"}, []string{"sum"}, f, false}
}

func double(name, doc string, terms []release.Term) kernel {
	f := newFormula()
	a, b := f.input("a"), f.input("b")
	f.results = f.sum(terms, a, b, value)
	return kernel{name, "is " + doc, []string{"a", "b"}, []string{"sum"}, f, false}
}
