package vetting

import (
	"fmt"
	"math"

	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
	"calandria.example/calandria/engine/steam/release"
)

// printed is half a unit of the last of the figures that a table prints.
func printed(value float64, figures int) float64 {
	return 0.5 * math.Pow(10, math.Floor(math.Log10(math.Abs(value)))+1-float64(figures))
}

// figures is how many significant figures the releases' tables print, moreFigures
// those of the supplementary releases.
const (
	figures     = 9
	moreFigures = 10
)

// stateRow is one column of a verification table of states. Of region 3 the
// coordinate beside the temperature is the density, and v stands for p in MPa.
type stateRow struct {
	t, at                 float64 // K; MPa or kg/m3
	v, h, u, s, cp, sound float64 // m3/kg, kJ/kg, kJ/kg, kJ/(kg K), kJ/(kg K), m/s
}

var (
	// table5 is IAPWS R7-97(2012) Table 5, region 1.
	table5 = []stateRow{
		{300, 3, 0.100215168e-2, 0.115331273e3, 0.112324818e3, 0.392294792, 0.417301218e1, 0.150773921e4},
		{300, 80, 0.971180894e-3, 0.184142828e3, 0.106448356e3, 0.368563852, 0.401008987e1, 0.163469054e4},
		{500, 3, 0.120241800e-2, 0.975542239e3, 0.971934985e3, 0.258041912e1, 0.465580682e1, 0.124071337e4},
	}
	// table15 is IAPWS R7-97(2012) Table 15, region 2.
	table15 = []stateRow{
		{300, 0.0035, 0.394913866e2, 0.254991145e4, 0.241169160e4, 0.852238967e1, 0.191300162e1, 0.427920172e3},
		{700, 0.0035, 0.923015898e2, 0.333568375e4, 0.301262819e4, 0.101749996e2, 0.208141274e1, 0.644289068e3},
		{700, 30, 0.542946619e-2, 0.263149474e4, 0.246861076e4, 0.517540298e1, 0.103505092e2, 0.480386523e3},
	}
	// table18 is IAPWS R7-97(2012) Table 18, metastable vapour.
	table18 = []stateRow{
		{450, 1, 0.192516540, 0.276881115e4, 0.257629461e4, 0.656660377e1, 0.276349265e1, 0.498408101e3},
		{440, 1, 0.186212297, 0.274015123e4, 0.255393894e4, 0.650218759e1, 0.298166443e1, 0.489363295e3},
		{450, 1.5, 0.121685206, 0.272134539e4, 0.253881758e4, 0.629170440e1, 0.362795578e1, 0.481941819e3},
	}
	// table33 is IAPWS R7-97(2012) Table 33, region 3.
	table33 = []stateRow{
		{650, 500, 0.255837018e2, 0.186343019e4, 0.181226279e4, 0.405427273e1, 0.138935717e2, 0.502005554e3},
		{650, 200, 0.222930643e2, 0.237512401e4, 0.226365868e4, 0.485438792e1, 0.446579342e2, 0.383444594e3},
		{750, 500, 0.783095639e2, 0.225868845e4, 0.210206932e4, 0.446971906e1, 0.634165359e1, 0.760696041e3},
	}
	// table42 is IAPWS R7-97(2012) Table 42, region 5.
	table42 = []stateRow{
		{1500, 0.5, 0.138455090e1, 0.521976855e4, 0.452749310e4, 0.965408875e1, 0.261609445e1, 0.917068690e3},
		{1500, 30, 0.230761299e-1, 0.516723514e4, 0.447495124e4, 0.772970133e1, 0.272724317e1, 0.928548002e3},
		{2000, 30, 0.311385219e-1, 0.657122604e4, 0.563707038e4, 0.853640523e1, 0.288569882e1, 0.106736948e4},
	}
)

// backwardRow is one value of a backward equation at p in MPa and h in kJ/kg or
// s in kJ/(kg K).
type backwardRow struct {
	equation  release.Backward
	p, at     float64
	published float64
}

var backwardTables = []struct {
	table, name, coordinate, unit string
	figures                       int
	rows                          []backwardRow
}{
	{"IAPWS R7-97(2012) Table 7", "backward-temperature-1", "kJ/kg", "K", figures, []backwardRow{
		{release.TemperatureByEnthalpy1, 3, 500, 0.391798509e3},
		{release.TemperatureByEnthalpy1, 80, 500, 0.378108626e3},
		{release.TemperatureByEnthalpy1, 80, 1500, 0.611041229e3},
	}},
	{"IAPWS R7-97(2012) Table 9", "backward-temperature-1", "kJ/(kg K)", "K", figures, []backwardRow{
		{release.TemperatureByEntropy1, 3, 0.5, 0.307842258e3},
		{release.TemperatureByEntropy1, 80, 0.5, 0.309979785e3},
		{release.TemperatureByEntropy1, 80, 3, 0.565899909e3},
	}},
	{"IAPWS R7-97(2012) Table 24", "backward-temperature-2", "kJ/kg", "K", figures, []backwardRow{
		{release.TemperatureByEnthalpy2a, 0.001, 3000, 0.534433241e3},
		{release.TemperatureByEnthalpy2a, 3, 3000, 0.575373370e3},
		{release.TemperatureByEnthalpy2a, 3, 4000, 0.101077577e4},
		{release.TemperatureByEnthalpy2b, 5, 3500, 0.801299102e3},
		{release.TemperatureByEnthalpy2b, 5, 4000, 0.101531583e4},
		{release.TemperatureByEnthalpy2b, 25, 3500, 0.875279054e3},
		{release.TemperatureByEnthalpy2c, 40, 2700, 0.743056411e3},
		{release.TemperatureByEnthalpy2c, 60, 2700, 0.791137067e3},
		{release.TemperatureByEnthalpy2c, 60, 3200, 0.882756860e3},
	}},
	{"IAPWS R7-97(2012) Table 29", "backward-temperature-2", "kJ/(kg K)", "K", figures, []backwardRow{
		{release.TemperatureByEntropy2a, 0.1, 7.5, 0.399517097e3},
		{release.TemperatureByEntropy2a, 0.1, 8, 0.514127081e3},
		{release.TemperatureByEntropy2a, 2.5, 8, 0.103984917e4},
		{release.TemperatureByEntropy2b, 8, 6, 0.600484040e3},
		{release.TemperatureByEntropy2b, 8, 7.5, 0.106495556e4},
		{release.TemperatureByEntropy2b, 90, 6, 0.103801126e4},
		{release.TemperatureByEntropy2c, 20, 5.75, 0.697992849e3},
		{release.TemperatureByEntropy2c, 80, 5.25, 0.854011484e3},
		{release.TemperatureByEntropy2c, 80, 5.75, 0.949017998e3},
	}},
	{"IAPWS SR3-03(2014) Table 5", "backward-temperature-3", "kJ/kg", "K", moreFigures, []backwardRow{
		{release.TemperatureByEnthalpy3a, 20, 1700, 6.293083892e2},
		{release.TemperatureByEnthalpy3a, 50, 2000, 6.905718338e2},
		{release.TemperatureByEnthalpy3a, 100, 2100, 7.336163014e2},
		{release.TemperatureByEnthalpy3b, 20, 2500, 6.418418053e2},
		{release.TemperatureByEnthalpy3b, 50, 2400, 7.351848618e2},
		{release.TemperatureByEnthalpy3b, 100, 2700, 8.420460876e2},
	}},
	{"IAPWS SR3-03(2014) Table 8", "backward-volume-3", "kJ/kg", "m3/kg", moreFigures, []backwardRow{
		{release.VolumeByEnthalpy3a, 20, 1700, 1.749903962e-3},
		{release.VolumeByEnthalpy3a, 50, 2000, 1.908139035e-3},
		{release.VolumeByEnthalpy3a, 100, 2100, 1.676229776e-3},
		{release.VolumeByEnthalpy3b, 20, 2500, 6.670547043e-3},
		{release.VolumeByEnthalpy3b, 50, 2400, 2.801244590e-3},
		{release.VolumeByEnthalpy3b, 100, 2700, 2.404234998e-3},
	}},
	{"IAPWS SR3-03(2014) Table 12", "backward-temperature-3", "kJ/(kg K)", "K", moreFigures, []backwardRow{
		{release.TemperatureByEntropy3a, 20, 3.8, 6.282959869e2},
		{release.TemperatureByEntropy3a, 50, 3.6, 6.297158726e2},
		{release.TemperatureByEntropy3a, 100, 4, 7.056880237e2},
		{release.TemperatureByEntropy3b, 20, 5, 6.401176443e2},
		{release.TemperatureByEntropy3b, 50, 4.5, 7.163687517e2},
		{release.TemperatureByEntropy3b, 100, 5, 8.474332825e2},
	}},
	{"IAPWS SR3-03(2014) Table 15", "backward-volume-3", "kJ/(kg K)", "m3/kg", moreFigures, []backwardRow{
		{release.VolumeByEntropy3a, 20, 3.8, 1.733791463e-3},
		{release.VolumeByEntropy3a, 50, 3.6, 1.469680170e-3},
		{release.VolumeByEntropy3a, 100, 4, 1.555893131e-3},
		{release.VolumeByEntropy3b, 20, 5, 6.262101987e-3},
		{release.VolumeByEntropy3b, 50, 4.5, 2.332634294e-3},
		{release.VolumeByEntropy3b, 100, 5, 2.449610757e-3},
	}},
}

func steamChecks() []Check {
	byPressure := func(row stateRow) (steam.State, error) {
		return steam.AtPressureTemperature(quantity.Megapascals(row.at), quantity.Temperature(row.t))
	}
	byDensity := func(row stateRow) (steam.State, error) {
		return steam.AtDensityTemperature(row.at, quantity.Temperature(row.t))
	}
	metastable := func(row stateRow) (steam.State, error) {
		return steam.MetastableVapour(quantity.Megapascals(row.at), quantity.Temperature(row.t))
	}
	checks := stateChecks("region-1", "IAPWS R7-97(2012) Table 5", "MPa", table5, byPressure)
	checks = append(checks, stateChecks("region-2", "IAPWS R7-97(2012) Table 15", "MPa", table15, byPressure)...)
	checks = append(checks, stateChecks("metastable", "IAPWS R7-97(2012) Table 18", "MPa", table18, metastable)...)
	checks = append(checks, stateChecks("region-3", "IAPWS R7-97(2012) Table 33", "kg/m3", table33, byDensity)...)
	checks = append(checks, stateChecks("region-5", "IAPWS R7-97(2012) Table 42", "MPa", table42, byPressure)...)
	for _, row := range []struct{ t, p float64 }{{300, 0.353658941e-2}, {500, 0.263889776e1}, {600, 0.123443146e2}} {
		checks = append(checks, Check{
			ID: fmt.Sprintf("saturation-pressure-%gK", row.t), Quantity: fmt.Sprintf("saturation pressure at %g K", row.t), Unit: "MPa",
			Source: "IAPWS R7-97(2012) Table 35", Published: row.p, Tolerance: printed(row.p, figures),
			compute: func() (float64, error) {
				p, err := steam.SaturationPressure(quantity.Temperature(row.t))
				return p.Megapascals(), err
			},
		})
	}
	for _, row := range []struct{ p, t float64 }{{0.1, 0.372755919e3}, {1, 0.453035632e3}, {10, 0.584149488e3}} {
		checks = append(checks, Check{
			ID: fmt.Sprintf("saturation-temperature-%gMPa", row.p), Quantity: fmt.Sprintf("saturation temperature at %g MPa", row.p), Unit: "K",
			Source: "IAPWS R7-97(2012) Table 36", Published: row.t, Tolerance: printed(row.t, figures),
			compute: func() (float64, error) {
				t, err := steam.SaturationTemperature(quantity.Megapascals(row.p))
				return float64(t), err
			},
		})
	}
	checks = append(checks, boundaryChecks()...)
	for _, table := range backwardTables {
		for _, row := range table.rows {
			checks = append(checks, Check{
				ID:       fmt.Sprintf("%s-%gMPa-%g", table.name, row.p, row.at),
				Quantity: fmt.Sprintf("backward equation at %g MPa and %g %s, a starting value", row.p, row.at, table.coordinate),
				Unit:     table.unit, Source: table.table, Published: row.published, Tolerance: printed(row.published, table.figures),
				compute: func() (float64, error) { return row.equation.At(row.p, row.at), nil },
			})
		}
	}
	return append(checks, transportChecks()...)
}

func boundaryChecks() []Check {
	check := func(id, what, unit, source string, published float64, figures int, compute func() float64) Check {
		return Check{
			ID: id, Quantity: what, Unit: unit, Source: source, Published: published, Tolerance: printed(published, figures),
			compute: func() (float64, error) { return compute(), nil },
		}
	}
	return []Check{
		check("boundary-2-3-pressure-623.15K", "pressure of the boundary between regions 2 and 3 at 623.15 K", "MPa", "IAPWS R7-97(2012) section 4", 0.165291643e2, figures,
			func() float64 { return steam.Boundary23Pressure(623.15).Megapascals() }),
		check("boundary-2-3-temperature-16.5291643MPa", "temperature of the boundary between regions 2 and 3 at 16.5291643 MPa", "K", "IAPWS R7-97(2012) section 4", 0.623150000e3, figures,
			func() float64 { return float64(steam.Boundary23Temperature(quantity.Megapascals(16.5291643))) }),
		check("boundary-2b-2c-3516.004323kJ/kg", "pressure of the boundary between regions 2b and 2c at 3516.004323 kJ/kg", "MPa", "IAPWS R7-97(2012) section 6.3", 100, figures,
			func() float64 { return release.Boundary2bc(3516.004323) }),
		check("boundary-3a-3b-25MPa", "enthalpy of the boundary between regions 3a and 3b at 25 MPa", "kJ/kg", "IAPWS SR3-03(2014) section 3.2", 2.095936454e3, moreFigures,
			func() float64 { return release.Boundary3ab(25) }),
	}
}

func stateChecks(name, source, unit string, rows []stateRow, state func(row stateRow) (steam.State, error)) []Check {
	first := "v"
	if unit == "kg/m3" {
		first = "p"
	}
	var checks []Check
	for _, row := range rows {
		for _, c := range []struct {
			symbol, unit string
			published    float64
			read         func(s steam.State) float64
		}{
			{first, map[string]string{"v": "m3/kg", "p": "MPa"}[first], row.v, func(s steam.State) float64 {
				if first == "p" {
					return s.Pressure.Megapascals()
				}
				return s.Volume
			}},
			{"h", "kJ/kg", row.h, func(s steam.State) float64 { return s.Enthalpy / 1e3 }},
			{"u", "kJ/kg", row.u, func(s steam.State) float64 { return s.InternalEnergy / 1e3 }},
			{"s", "kJ/(kg K)", row.s, func(s steam.State) float64 { return s.Entropy / 1e3 }},
			{"cp", "kJ/(kg K)", row.cp, func(s steam.State) float64 { return s.Cp / 1e3 }},
			{"w", "m/s", row.sound, func(s steam.State) float64 { return s.SpeedOfSound }},
		} {
			checks = append(checks, Check{
				ID:       fmt.Sprintf("%s-%s-%gK-%g%s", name, c.symbol, row.t, row.at, unit),
				Quantity: fmt.Sprintf("%s at %g K and %g %s", c.symbol, row.t, row.at, unit),
				Unit:     c.unit, Source: source, Published: c.published, Tolerance: printed(c.published, figures),
				compute: func() (float64, error) {
					s, err := state(row)
					return c.read(s), err
				},
			})
		}
	}
	return checks
}
