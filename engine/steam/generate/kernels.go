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
	xxx   = order{3, 0}
	y, yy = order{0, 1}, order{0, 2}
	xy    = order{1, 1}
)

// kernels lists what is generated.
func kernels() []kernel {
	var list []kernel
	for _, r := range regions {
		list = append(list, r.kernels()...)
	}
	metastable := region{name: "Metastable", source: "IAPWS R7-97(2012) Eqs. 18 and 19", pressure: pressure2, star: temperature2, shiftY: 0.5, residual: release.MetastableResidual, ideal: release.MetastableIdeal}
	list = append(list, metastable.gibbs())
	list = append(list, region3()...)
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

// region is a region whose equation is one of the Gibbs energy.
type region struct {
	name, source    string
	pressure, star  float64 // reducing constants
	shiftX, shiftY  float64 // of the bases shiftX -+ pi and tau - shiftY
	residual, ideal []release.Term
}

var regions = []region{
	{name: "1", source: "IAPWS R7-97(2012) Eq. 7", pressure: pressure1, star: temperature1, shiftX: 7.1, shiftY: 1.222, residual: release.Region1},
	{name: "2", source: "IAPWS R7-97(2012) Eqs. 15 to 17", pressure: pressure2, star: temperature2, shiftY: 0.5, residual: release.Region2Residual, ideal: release.Region2Ideal},
	{name: "5", source: "IAPWS R7-97(2012) Eqs. 32 to 34", pressure: pressure5, star: temperature5, residual: release.Region5Residual, ideal: release.Region5Ideal},
}

// bases returns the two bases of the residual part, tau, and what turns a
// derivative reduced by the bases into one reduced by pi and tau; -1 for 1.
func (r region) bases(f *formula, p, t int) (x, y, tau, byX, byY int) {
	x, tau = f.scaled(1/r.pressure, p), f.divide(f.constant(r.star), t)
	y, byX, byY = tau, -1, -1
	if r.shiftX != 0 {
		pi := x
		x = f.subtract(f.constant(r.shiftX), pi)
		byX = f.divide(f.scaled(-1, pi), x)
	}
	if r.shiftY != 0 {
		y = f.subtract(tau, f.constant(r.shiftY))
		rest := f.subtract(f.constant(r.star), f.scaled(r.shiftY, t)) // y t
		f.reciprocals[y] = f.divide(t, rest)
		byY = f.divide(f.constant(r.star), rest)
	}
	f.reciprocals[tau] = f.scaled(1/r.star, t)
	return x, y, tau, byX, byY
}

// byTau is the derivative of the whole Gibbs energy by tau.
func (r region) byTau(f *formula, p, t int) int {
	x, y, tau, _, _ := r.bases(f, p, t)
	total := f.sum(r.residual, x, y, order{0, 1})[0]
	if r.ideal != nil {
		total = f.add(total, f.sum(r.ideal, tau, tau, order{0, 1})[0])
	}
	return total
}

// reduced are derivatives of the Gibbs energy, times pi and tau as often as it
// is derived by them. ln pi, the ideal part's own, is in all but the value.
func (r region) reduced(f *formula, p, t int, orders ...order) []int {
	x, y, tau, byX, byY := r.bases(f, p, t)
	sums := f.reduced(r.residual, x, y, orders...)
	var inTau []order
	for i, o := range orders {
		for range o.x {
			if byX >= 0 {
				sums[i] = f.multiply(sums[i], byX)
			}
		}
		for range o.y {
			if byY >= 0 {
				sums[i] = f.multiply(sums[i], byY)
			}
		}
		if o.x == 0 {
			inTau = append(inTau, o)
		}
	}
	if r.ideal == nil {
		return sums
	}
	parts := map[order]int{{1, 0}: f.constant(1), {2, 0}: f.constant(-1)} // of ln pi
	if len(inTau) > 0 {
		for i, part := range f.reduced(r.ideal, tau, tau, inTau...) {
			parts[inTau[i]] = part
		}
	}
	for i, o := range orders {
		if part, ok := parts[o]; ok {
			sums[i] = f.add(sums[i], part)
		}
	}
	return sums
}

// kernels are the functions of one region.
func (r region) kernels() []kernel {
	var list []kernel
	begin := func() (f *formula, p, t int) {
		f = newFormula()
		return f, f.input("p"), f.input("t")
	}
	at, besides := " at p in Pa and t in K: "+r.source, ""
	if r.ideal != nil {
		besides = ", without the logarithm of pi,"
	}
	put := func(name, doc string, f *formula, lanes bool, results ...string) {
		list = append(list, kernel{"region" + r.name + name, "returns " + doc + at, []string{"p", "t"}, results, f, lanes})
	}

	f, p, t := begin()
	f.results = []int{f.scaled(gas*r.star, r.byTau(f, p, t))} // h = R T tau gamma_tau
	put("Enthalpy", "h in J/kg", f, r.name != "5", "h")

	f, p, t = begin()
	d := r.reduced(f, p, t, y, yy)
	f.results = []int{f.scaled(gas, f.multiply(t, d[0])), f.scaled(-gas, d[1])}
	put("EnthalpyHeat", "h in J/kg and cp in J/(kg K)", f, false, "h", "cp")

	if r.name != "5" {
		// (dh/dp)_T = v - T (dv/dT)_p = R T/p times pi tau gamma_pitau.
		f, p, t = begin()
		d = r.reduced(f, p, t, y, yy, xy)
		rt := f.scaled(gas, t)
		f.results = []int{f.multiply(rt, d[0]), f.divide(f.multiply(rt, d[2]), p), f.scaled(-gas, d[1])}
		put("EnthalpySlopes", "h in J/kg, its derivative by p in J/(kg Pa) and cp in J/(kg K)", f, false, "h", "byP", "cp")
	}

	f, p, t = begin()
	d = r.reduced(f, p, t, value, y, yy)
	f.results = []int{f.scaled(gas, f.subtract(d[1], d[0])), f.scaled(-gas, d[2])}
	put("EntropyHeat", "s"+besides+" in J/(kg K) and cp in J/(kg K)", f, false, "s", "cp")

	f, p, t = begin()
	f.results = []int{f.divide(f.scaled(gas, f.multiply(t, r.reduced(f, p, t, x)[0])), p)} // v = R T/p pi gamma_pi
	put("Volume", "v in m3/kg", f, false, "v")

	f, p, t = begin()
	f.results = r.reduced(f, p, t, x, xx, yy, xy)
	put("Response", "derivatives of the Gibbs energy over R T, times pi and tau as often as derived by them,", f, false, "byPi", "byPiPi", "byTauTau", "byPiTau")

	return append(list, r.gibbs())
}

// gibbs is the function of the whole Gibbs energy.
func (r region) gibbs() kernel {
	f := newFormula()
	f.results = r.reduced(f, f.input("p"), f.input("t"), value, x, xx, y, yy, xy)
	besides := ""
	if r.ideal != nil {
		besides = ", without the logarithm of pi,"
	}
	return kernel{
		"region" + r.name + "Gibbs",
		"returns the Gibbs energy over R T" + besides + " and derivatives, times pi and tau as often as derived by them, at p in Pa and t in K: " + r.source,
		[]string{"p", "t"}, []string{"value", "byPi", "byPiPi", "byTau", "byTauTau", "byPiTau"}, f, false,
	}
}

// region3 are the functions of region 3, whose equation is one of the Helmholtz
// energy. All its derivatives are taken times delta and tau as often as derived
// by them; its term in ln delta is left out, since only the value needs a
// logarithm for it.
func region3() []kernel {
	var list []kernel
	begin := func() (f *formula, rho, t, delta, tau int) {
		f = newFormula()
		rho, t = f.input("rho"), f.input("t")
		return f, rho, t, f.scaled(1/density3, rho), f.divide(f.constant(temperature3), t)
	}
	put := func(name, doc string, f *formula, results ...string) {
		list = append(list, kernel{"region3" + name, "returns " + doc + " at rho in kg/m3 and t in K: IAPWS R7-97(2012) Eq. 28", []string{"rho", "t"}, results, f, false})
	}
	// p = rho R T F with F = delta phi_delta, and delta F' = F + delta^2 phi_deltadelta,
	// delta^2 F'' = 2 delta^2 phi_deltadelta + delta^3 phi_deltadeltadelta.
	curve := func(f *formula, rho, t, delta, tau int, orders ...order) {
		d := f.reduced(release.Region3, delta, tau, orders...)
		first := f.add(d[0], f.constant(release.Region3Log))
		second := f.add(d[1], f.constant(-release.Region3Log))
		rt := f.scaled(gas, t)
		rise := f.add(first, second)
		f.results = []int{f.multiply(f.multiply(rho, rt), first), f.multiply(rt, f.add(first, rise))}
		if len(d) > 2 {
			third := f.add(d[2], f.constant(2*release.Region3Log))
			f.results = append(f.results, f.multiply(rt, f.add(f.weighted(f.constant(2), rise, f.scaled(2, second)), third)))
		}
	}
	f, rho, t, delta, tau := begin()
	curve(f, rho, t, delta, tau, x, xx)
	put("Pressure", "p in Pa and its derivative by density in Pa m3/kg", f, "p", "byDensity")

	f, rho, t, delta, tau = begin()
	curve(f, rho, t, delta, tau, x, xx, xxx)
	put("PressureCurve", "p in Pa, its derivative by density in Pa m3/kg, and density times the next derivative,", f, "p", "byDensity", "bend")

	const reduced = "derivatives of the Helmholtz energy over R T without its term in ln delta, times delta and tau as often as derived by them,"
	f, _, _, delta, tau = begin()
	f.results = f.reduced(release.Region3, delta, tau, x, xx, yy, xy)
	put("Response", reduced, f, "byDelta", "byDeltaDelta", "byTauTau", "byDeltaTau")

	f, _, _, delta, tau = begin()
	f.results = f.reduced(release.Region3, delta, tau, x, xx, y, yy, xy)
	put("Slopes", reduced, f, "byDelta", "byDeltaDelta", "byTau", "byTauTau", "byDeltaTau")

	f, _, _, delta, tau = begin()
	f.results = f.reduced(release.Region3, delta, tau, value, x, xx, y, yy, xy)
	put("Helmholtz", "the Helmholtz energy over R T and its derivatives, as region3Slopes does,", f, "value", "byDelta", "byDeltaDelta", "byTau", "byTauTau", "byDeltaTau")
	return list
}

func backward(name, doc string, b release.Backward) kernel {
	f := newFormula()
	p, c := f.input("p"), f.input("c")
	first := p
	if b.Roots == 0 {
		first = f.weighted(f.constant(1e-6/b.Pressure), p, f.constant(b.PressureShift))
	}
	second := f.weighted(f.constant(1e-3/b.Coordinate), c, f.constant(b.CoordinateShift))
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
		total = f.weighted(total, at, f.constant(coefficients[i]))
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
