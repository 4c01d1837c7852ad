package vetting

import (
	"fmt"

	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
)

// viscosities is IAPWS R12-08 Table 4: K, kg/m3, uPa s.
var viscosities = [][3]float64{
	{298.15, 998, 889.735100},
	{298.15, 1200, 1437.649467},
	{373.15, 1000, 307.883622},
	{433.15, 1, 14.538324},
	{433.15, 1000, 217.685358},
	{873.15, 1, 32.619287},
	{873.15, 100, 35.802262},
	{873.15, 600, 77.430195},
	{1173.15, 1, 44.217245},
	{1173.15, 100, 47.640433},
	{1173.15, 400, 64.154608},
}

// backgrounds is IAPWS R15-11 Table 4: K, kg/m3, mW/(m K).
var backgrounds = [][3]float64{
	{298.15, 0, 18.4341883},
	{298.15, 998, 607.712868},
	{298.15, 1200, 799.038144},
	{873.15, 0, 79.1034659},
}

// ratios are lambda1 of IAPWS R15-11 Table 5, at 647.35 K: kg/m3, 1.
var ratios = [][2]float64{
	{1, 1.0068497},
	{122, 2.1445173},
	{222, 3.4840736},
	{272, 4.2233708},
	{322, 4.9681953},
	{372, 5.6961250},
	{422, 6.3973429},
	{750, 11.5870532},
}

// conductivityRow is one column of IAPWS R15-11 Tables 7 to 9, for industrial
// use with R7-97.
type conductivityRow struct {
	t, p               float64 // K, MPa
	lambda, dilute     float64 // mW/(m K)
	factor             float64
	enhancement        float64 // mW/(m K)
	rho                float64 // kg/m3
	slope, atReference float64 // (drho/dp)_T at T and at the reference temperature, kg/(m3 MPa)
	xi                 float64 // nm
	cp, cv             float64 // kJ/(kg K)
	crossover          float64
	mu                 float64 // uPa s
	table              string
}

// conductivities are Tables 7 and 8 at p and T, and Table 9 at rho and T.
var conductivities = []conductivityRow{
	{620, 20, 0.481485195e3, 0.484911627e2, 0.966869008e1, 0.126391714e2, 0.613227777e3, 0.520937820e1, 0.935037951, 0.377694973, 0.763433705e1, 0.303793441e1, 0.166942638, 0.709051068e2, "Table 7"},
	{620, 50, 0.545038940e3, 0.484911627e2, 0.111212177e2, 0.575816285e1, 0.699226043e3, 0.184869007e1, 0.639306277, 0.189692422, 0.532047725e1, 0.291692653e1, 0.113592223, 0.841527945e2, "Table 7"},
	{650, 0.3, 0.522311024e2, 0.518787461e2, 0.100678943e1, 0.129246457e-3, 0.100452141e1, 0.336351419e1, 0.223819386e1, 0.104305448e-2, 0.207010035e1, 0.159675313e1, 0.121437275e-2, 0.234877453e2, "Table 8"},
	{800, 50, 0.177709914e3, 0.698329394e2, 0.244965343e1, 0.664341394e1, 0.218030012e3, 0.661484493e1, 0.312182530e1, 0.193491903, 0.590718707e1, 0.252343426e1, 0.137263826, 0.393727534e2, "Table 8"},
	{647.35, 0, 0.366879411e3, 0.515764797e2, 0.348407362e1, 0.187183159e3, 222, 0.177778595e3, 0.311832789e1, 0.158223683e1, 0.101054488e3, 0.437466458e1, 0.217577777, 0.312204749e2, "Table 9"},
	{647.35, 0, 0.124182415e4, 0.515764797e2, 0.496819532e1, 0.985582122e3, 322, 0.692651138e4, 0.275192511e1, 0.124722016e2, 0.312090124e4, 0.452163449e1, 0.322306729e-1, 0.393455495e2, "Table 9"},
}

// tensions are of IAPWS R1-76(2014) Table 1, calculated: degC, mN/m.
var tensions = [][2]float64{
	{0.01, 75.65}, {5, 74.94}, {10, 74.22}, {15, 73.49}, {20, 72.74}, {25, 71.97}, {30, 71.19}, {40, 69.60},
	{50, 67.94}, {60, 66.24}, {70, 64.48}, {80, 62.67}, {90, 60.82}, {100, 58.91}, {120, 54.97}, {140, 50.86},
	{150, 48.74}, {160, 46.59}, {180, 42.19}, {200, 37.67}, {250, 26.04}, {300, 14.36}, {350, 3.67}, {370, 0.39},
}

// enhanced is IAPWS R12-08 Table 5, at 647.35 K: kg/m3, the critical enhancement
// mu2, which takes IAPWS-95 and industrial use leaves out, and uPa s.
var enhanced = [][3]float64{
	{122, 1.00000289, 25.520677},
	{222, 1.00375120, 31.337589},
	{272, 1.03416789, 36.228143},
	{322, 1.09190440, 42.961579},
	{372, 1.03665871, 45.688204},
	{422, 1.00596332, 49.436256},
}

func transportChecks() []Check {
	var checks []Check
	put := func(id, what, unit, source string, published, tolerance float64, compute func() (float64, error)) {
		checks = append(checks, Check{ID: id, Quantity: what, Unit: unit, Source: source, Published: published, Tolerance: tolerance, compute: compute})
	}
	const sixDecimals, sevenDecimals, twoDecimals = 0.5e-6, 0.5e-7, 0.5e-2
	for _, row := range viscosities {
		put(fmt.Sprintf("viscosity-%gK-%gkg/m3", row[0], row[1]), fmt.Sprintf("viscosity at %g K and %g kg/m3", row[0], row[1]), "uPa s", "IAPWS R12-08 Table 4", row[2], sixDecimals,
			func() (float64, error) {
				mu, err := steam.ViscosityAtDensity(row[1], quantity.Temperature(row[0]))
				return mu * 1e6, err
			})
	}
	for _, row := range enhanced {
		put(fmt.Sprintf("viscosity-647.35K-%gkg/m3", row[0]), fmt.Sprintf("viscosity at 647.35 K and %g kg/m3, with the printed critical enhancement", row[0]), "uPa s", "IAPWS R12-08 Table 5", row[2], sixDecimals,
			func() (float64, error) {
				mu, err := steam.ViscosityAtDensity(row[0], 647.35)
				return mu * 1e6 * row[1], err
			})
	}
	background := func(rho, t float64) (float64, error) {
		lambda, err := steam.BackgroundConductivity(rho, quantity.Temperature(t))
		return lambda * 1e3, err
	}
	for _, row := range backgrounds {
		put(fmt.Sprintf("conductivity-background-%gK-%gkg/m3", row[0], row[1]), fmt.Sprintf("conductivity without enhancement at %g K and %g kg/m3", row[0], row[1]), "mW/(m K)", "IAPWS R15-11 Table 4", row[2], printed(row[2], figures),
			func() (float64, error) { return background(row[1], row[0]) })
	}
	const nearCritical = 647.35
	put("conductivity-dilute-647.35K", "conductivity of dilute vapour at 647.35 K", "mW/(m K)", "IAPWS R15-11 Table 5", 51.5764797, sevenDecimals,
		func() (float64, error) { return background(0, nearCritical) })
	for _, row := range ratios {
		put(fmt.Sprintf("conductivity-ratio-647.35K-%gkg/m3", row[0]), fmt.Sprintf("conductivity without enhancement over that of dilute vapour, at 647.35 K and %g kg/m3", row[0]), "", "IAPWS R15-11 Table 5", row[1], sevenDecimals,
			func() (float64, error) {
				dilute, err := background(0, nearCritical)
				if err != nil {
					return 0, err
				}
				whole, err := background(row[0], nearCritical)
				return whole / dilute, err
			})
	}
	for _, row := range conductivities {
		checks = append(checks, conductivityChecks(row)...)
	}
	for _, row := range tensions {
		put(fmt.Sprintf("surface-tension-%gC", row[0]), fmt.Sprintf("surface tension at %g degC", row[0]), "mN/m", "IAPWS R1-76(2014) Table 1", row[1], twoDecimals,
			func() (float64, error) {
				liquid, _, err := steam.Saturation(quantity.Celsius(row[0]))
				sigma, _ := liquid.SurfaceTension()
				return sigma * 1e3, err
			})
	}
	return checks
}

func conductivityChecks(row conductivityRow) []Check {
	at := fmt.Sprintf("%gK-%gMPa", row.t, row.p)
	state := func() (steam.State, error) {
		return steam.AtPressureTemperature(quantity.Megapascals(row.p), quantity.Temperature(row.t))
	}
	if row.p == 0 {
		at = fmt.Sprintf("%gK-%gkg/m3", row.t, row.rho)
		state = func() (steam.State, error) {
			return steam.AtDensityTemperature(row.rho, quantity.Temperature(row.t))
		}
	}
	parts := func(s steam.State) steam.ConductivityParts {
		p, _ := s.ConductivityParts()
		return p
	}
	var checks []Check
	for _, c := range []struct {
		name, unit string
		published  float64
		read       func(s steam.State) float64
	}{
		{"conductivity", "mW/(m K)", row.lambda, func(s steam.State) float64 { return parts(s).Total() * 1e3 }},
		{"conductivity-dilute", "mW/(m K)", row.dilute, func(s steam.State) float64 { return parts(s).Dilute * 1e3 }},
		{"conductivity-factor", "", row.factor, func(s steam.State) float64 { return parts(s).DensityFactor }},
		{"conductivity-enhancement", "mW/(m K)", row.enhancement, func(s steam.State) float64 { return parts(s).Enhancement * 1e3 }},
		{"density", "kg/m3", row.rho, func(s steam.State) float64 { return 1 / s.Volume }},
		{"density-by-pressure", "kg/(m3 MPa)", row.slope, func(s steam.State) float64 { return -s.VolumeByPressure / (s.Volume * s.Volume) * 1e6 }},
		{"density-by-pressure-at-reference", "kg/(m3 MPa)", row.atReference, func(s steam.State) float64 { return parts(s).ReferenceSlope * 1e6 }},
		{"correlation-length", "nm", row.xi, func(s steam.State) float64 { return parts(s).CorrelationLength * 1e9 }},
		{"cp", "kJ/(kg K)", row.cp, func(s steam.State) float64 { return s.Cp / 1e3 }},
		{"cv", "kJ/(kg K)", row.cv, func(s steam.State) float64 { return s.Cv / 1e3 }},
		{"crossover", "", row.crossover, func(s steam.State) float64 { return parts(s).Crossover }},
		{"viscosity", "uPa s", row.mu, func(s steam.State) float64 { mu, _ := s.Viscosity(); return mu * 1e6 }},
	} {
		checks = append(checks, Check{
			ID: "industrial-" + c.name + "-" + at, Quantity: c.name + " at " + at, Unit: c.unit, Source: "IAPWS R15-11 " + row.table,
			Published: c.published, Tolerance: printed(c.published, figures),
			compute: func() (float64, error) {
				s, err := state()
				return c.read(s), err
			},
		})
	}
	return checks
}
