package train

import (
	"math"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/liquor"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
)

// relation names one of the equations of the plant.
type relation int

const (
	massBalance relation = iota
	solidsBalance
	energyBalance
	chestBalance
	rateEquation
	boilingEquilibrium
	vapourPressure
	steamPressure
	chestTemperature
	temperatureDifference
	productSolids
	productTemperature
	evaporationSum
	economyDefinition
	feedVolume
	productVolume
	relations
)

var relationNames = [relations]string{
	massBalance:           "mass balance",
	solidsBalance:         "solids balance",
	energyBalance:         "energy balance of the liquor",
	chestBalance:          "energy balance of the steam chest",
	rateEquation:          "heat-transfer rate",
	boilingEquilibrium:    "boiling-point rise",
	vapourPressure:        "saturation line of the vapour",
	steamPressure:         "saturation line of the live steam",
	chestTemperature:      "chest temperature",
	temperatureDifference: "driving force",
	productSolids:         "solids of the product",
	productTemperature:    "temperature of the product",
	evaporationSum:        "evaporation",
	economyDefinition:     "economy",
	feedVolume:            "volume flow of the feed",
	productVolume:         "volume flow of the product",
}

// equation is a relation with the numbers that stand in it.
type equation struct {
	relation relation
	in       []Number
}

// standIn lists the numbers that stand in each relation, for a liquor whose
// rise and enthalpy depend on solids.
var standIn = [relations][]Number{
	massBalance:           {FeedFlow, ProductFlow, VapourFlow, Entrainment},
	solidsBalance:         {FeedFlow, FeedSolids, VapourFlow, SolidsOut},
	energyBalance:         {FeedFlow, FeedTemperature, Duty, HeatLoss, VapourFlow, VapourSaturationTemperature, BoilingTemperature, FeedSolids, SolidsOut},
	chestBalance:          {Duty, SteamFlow, Vent, SteamTemperature, Superheat, Dryness, ChestTemperature, Subcooling},
	rateEquation:          {Duty, Area, Coefficient, GasSideResistance, drivingForce},
	boilingEquilibrium:    {BoilingTemperature, VapourSaturationTemperature, SolidsOut},
	vapourPressure:        {EffectPressure, VapourSaturationTemperature},
	steamPressure:         {SteamPressure, SteamTemperature},
	chestTemperature:      {ChestTemperature, SteamTemperature},
	temperatureDifference: {drivingForce, ChestTemperature, BoilingTemperature},
	productSolids:         {ProductSolids, SolidsOut},
	productTemperature:    {ProductTemperature, BoilingTemperature},
	evaporationSum:        {Evaporation, VapourFlow},
	economyDefinition:     {Economy, VapourFlow, SteamFlow},
	feedVolume:            {FeedVolumeFlow, FeedFlow, FeedTemperature, FeedSolids},
	productVolume:         {ProductVolumeFlow, ProductFlow, BoilingTemperature, SolidsOut},
}

// parts are what a plant has only if the question gives a number of it.
type parts struct{ feedVolume, productVolume, level, circulation bool }

// driving lists the numbers that stand in the driving force of a plant with
// parts.
func (p parts) driving() []Number {
	switch {
	case p.circulation:
		return []Number{drivingForce, ChestTemperature, BoilingTemperature, Duty, Circulation, SolidsOut}
	case p.level:
		return []Number{drivingForce, ChestTemperature, BoilingTemperature, VapourSaturationTemperature, LiquorLevel, SolidsOut}
	}
	return standIn[temperatureDifference]
}

// equationsOf returns the equations of a plant with parts that concentrates l.
// A number stands in an equation only where it can change it, so that the
// structure of a question tells the truth.
func equationsOf(l *liquor.Liquor, p parts) []equation {
	list := make([]equation, 0, relations)
	for r := range relations {
		in := standIn[r]
		switch {
		case r == boilingEquilibrium && !l.RiseDependsOnSolids():
			in = in[:2]
		case r == energyBalance && !l.EnthalpyDependsOnSolids():
			in = in[:7]
		case r == temperatureDifference:
			in = p.driving()
			depends := l.RiseDependsOnSolids() || l.DensityDependsOnSolids()
			if p.circulation {
				depends = l.EnthalpyDependsOnSolids()
			}
			if len(in) > len(standIn[r]) && !depends {
				in = in[:len(in)-1]
			}
		case r == feedVolume || r == productVolume:
			if r == feedVolume && !p.feedVolume || r == productVolume && !p.productVolume {
				continue
			}
			if !l.DensityDependsOnSolids() {
				in = in[:3]
			}
		}
		list = append(list, equation{r, in})
	}
	return list
}

// state holds a value for every number of the plant.
type state [unknowns]float64

// gradient holds the derivatives of one equation by every number.
type gradient [unknowns]float64

// temperatureSize is what a residual in K is measured against, so that its
// tolerance stays above the rounding of absolute temperatures.
const temperatureSize = 100

// residual returns by how much an equation is not met, the size of its terms
// to measure that against, and the derivatives.
func residual(r relation, l *liquor.Liquor, v *state, d *gradient) (miss, size float64, err error) {
	*d = gradient{}
	switch r {
	case massBalance:
		// F = L + V (1 + e)
		d[FeedFlow], d[ProductFlow] = 1, -1
		d[VapourFlow], d[Entrainment] = -(1 + v[Entrainment]), -v[VapourFlow]
		out := v[ProductFlow] + v[VapourFlow]*(1+v[Entrainment])
		return v[FeedFlow] - out, math.Abs(v[FeedFlow]) + math.Abs(v[ProductFlow]) + math.Abs(v[VapourFlow]), nil

	case solidsBalance:
		// F wF = (F - V) w: product and entrained liquor have the same
		// strength, and only the mass balance divides them.
		leaving := v[FeedFlow] - v[VapourFlow]
		d[FeedFlow], d[FeedSolids] = v[FeedSolids]-v[SolidsOut], v[FeedFlow]
		d[VapourFlow], d[SolidsOut] = v[SolidsOut], -leaving
		in, out := v[FeedFlow]*v[FeedSolids], leaving*v[SolidsOut]
		return in - out, math.Abs(in) + math.Abs(out) + 1e-6*(math.Abs(v[FeedFlow])+math.Abs(leaving)), nil

	case energyBalance:
		return energyResidual(l, v, d)

	case chestBalance:
		return chestResidual(v, d)

	case rateEquation:
		// Q = A dT U / (1 + U R)
		by := 1 + v[Coefficient]*v[GasSideResistance]
		u := v[Coefficient] / by
		d[Duty] = 1
		d[Area] = -u * v[drivingForce]
		d[Coefficient] = -v[Area] * v[drivingForce] / (by * by)
		d[GasSideResistance] = v[Area] * v[drivingForce] * u * u
		d[drivingForce] = -u * v[Area]
		q := u * v[Area] * v[drivingForce]
		return v[Duty] - q, math.Abs(v[Duty]) + math.Abs(q), nil

	case boilingEquilibrium:
		rise, byW, byTw := l.Rise(v[SolidsOut], v[VapourSaturationTemperature])
		d[BoilingTemperature], d[VapourSaturationTemperature], d[SolidsOut] = 1, -1-byTw, -byW
		return v[BoilingTemperature] - v[VapourSaturationTemperature] - rise, temperatureSize, nil

	case vapourPressure:
		return saturationResidual(EffectPressure, VapourSaturationTemperature, v, d)

	case steamPressure:
		return saturationResidual(SteamPressure, SteamTemperature, v, d)

	case chestTemperature:
		d[ChestTemperature], d[SteamTemperature] = 1, -1
		return v[ChestTemperature] - v[SteamTemperature], temperatureSize, nil

	case temperatureDifference:
		return drivingResidual(l, v, d)

	case feedVolume:
		return volumeResidual(l, FeedFlow, FeedVolumeFlow, FeedSolids, FeedTemperature, v, d)

	case productVolume:
		return volumeResidual(l, ProductFlow, ProductVolumeFlow, SolidsOut, BoilingTemperature, v, d)

	case productSolids:
		d[ProductSolids], d[SolidsOut] = 1, -1
		return v[ProductSolids] - v[SolidsOut], 1, nil

	case productTemperature:
		d[ProductTemperature], d[BoilingTemperature] = 1, -1
		return v[ProductTemperature] - v[BoilingTemperature], temperatureSize, nil

	case evaporationSum:
		d[Evaporation], d[VapourFlow] = 1, -1
		return v[Evaporation] - v[VapourFlow], math.Abs(v[Evaporation]) + math.Abs(v[VapourFlow]), nil

	default: // economyDefinition: V = economy S
		d[VapourFlow], d[Economy], d[SteamFlow] = 1, -v[SteamFlow], -v[Economy]
		made := v[Economy] * v[SteamFlow]
		return v[VapourFlow] - made, math.Abs(v[VapourFlow]) + math.Abs(made), nil
	}
}

// energyResidual: F hF + Q (1 - loss) = V Hv + (F - V) hL.
func energyResidual(l *liquor.Liquor, v *state, d *gradient) (miss, size float64, err error) {
	hf, hfByW, hfByT := l.Enthalpy(v[FeedSolids], v[FeedTemperature])
	hl, hlByW, hlByT := l.Enthalpy(v[SolidsOut], v[BoilingTemperature])
	hv, hvByTw, hvByT, err := vapourEnthalpy(v[VapourSaturationTemperature], v[BoilingTemperature])
	if err != nil {
		return 0, 0, err
	}
	leaving := v[FeedFlow] - v[VapourFlow]
	d[FeedFlow] = hf - hl
	d[FeedSolids] = v[FeedFlow] * hfByW
	d[FeedTemperature] = v[FeedFlow] * hfByT
	d[Duty], d[HeatLoss] = 1-v[HeatLoss], -v[Duty]
	d[VapourFlow] = hl - hv
	d[VapourSaturationTemperature] = -v[VapourFlow] * hvByTw
	d[BoilingTemperature] = -v[VapourFlow]*hvByT - leaving*hlByT
	d[SolidsOut] = -leaving * hlByW
	in := v[FeedFlow]*hf + v[Duty]*(1-v[HeatLoss])
	out := v[VapourFlow]*hv + leaving*hl
	size = math.Abs(v[FeedFlow]*hf) + math.Abs(v[Duty]) + math.Abs(v[VapourFlow]*hv) + math.Abs(leaving*hl)
	return in - out, size, nil
}

// chestResidual: Q = S (1 - vent) (hS - hc).
func chestResidual(v *state, d *gradient) (miss, size float64, err error) {
	hs, by, err := liveSteamEnthalpy(v[SteamTemperature], v[Superheat], v[Dryness])
	if err != nil {
		return 0, 0, err
	}
	hc, hcByT, err := steam.LiquidEnthalpy(quantity.Temperature(max(v[ChestTemperature]-v[Subcooling], quantity.Zero)))
	if err != nil {
		return 0, 0, err
	}
	condensing := v[SteamFlow] * (1 - v[Vent])
	q := condensing * (hs - hc)
	d[Duty] = -1
	d[SteamFlow] = (1 - v[Vent]) * (hs - hc)
	d[Vent] = -v[SteamFlow] * (hs - hc)
	d[SteamTemperature] = condensing * by.temperature
	d[Superheat] = condensing * by.superheat
	d[Dryness] = condensing * by.dryness
	d[ChestTemperature], d[Subcooling] = -condensing*hcByT, condensing*hcByT
	return q - v[Duty], math.Abs(q) + math.Abs(v[Duty]), nil
}

// volumeResidual: F = rho V.
func volumeResidual(l *liquor.Liquor, mass, volume, solids, t Number, v *state, d *gradient) (miss, size float64, err error) {
	rho, byW, byT, _ := l.Density(v[solids], v[t])
	d[mass], d[volume] = 1, -rho
	d[solids], d[t] = -byW*v[volume], -byT*v[volume]
	return v[mass] - rho*v[volume], math.Abs(v[mass]) + math.Abs(rho*v[volume]), nil
}

// drivingResidual: what is left of the difference between chest and boiling
// liquor after the static head, or its logarithmic mean over the heating of
// liquor that is pumped around.
func drivingResidual(l *liquor.Liquor, v *state, d *gradient) (miss, size float64, err error) {
	d[drivingForce] = 1
	if v[Circulation] > 0 {
		mean, by, err := logarithmicMean(l, v)
		if err != nil {
			return 0, 0, err
		}
		d[ChestTemperature], d[BoilingTemperature] = -by.chest, -by.boiling
		d[Duty], d[Circulation], d[SolidsOut] = -by.duty, -by.circulation, -by.solids
		return v[drivingForce] - mean, temperatureSize, nil
	}
	d[ChestTemperature], d[BoilingTemperature] = -1, 1
	miss = v[drivingForce] - v[ChestTemperature] + v[BoilingTemperature]
	if level := v[LiquorLevel]; level != 0 && !math.IsNaN(level) {
		head, by, err := staticHead(l, v)
		if err != nil {
			return 0, 0, err
		}
		d[BoilingTemperature] += by.boiling
		d[VapourSaturationTemperature], d[LiquorLevel], d[SolidsOut] = by.water, by.level, by.solids
		miss += head
	}
	return miss, temperatureSize, nil
}

// standardGravity in m/s2.
const standardGravity = 9.80665

type headSlopes struct{ boiling, water, level, solids float64 }

// staticHead is by how much hotter, in K, liquor boils at half the level than at
// the surface, with the density of clear liquor.
func staticHead(l *liquor.Liquor, v *state) (head float64, by headSlopes, err error) {
	tw, w := v[VapourSaturationTemperature], v[SolidsOut]
	p, slope, err := steam.SaturationSlope(quantity.Temperature(tw))
	if err != nil {
		return 0, by, err
	}
	rho, rhoByW, rhoByT, _ := l.Density(w, v[BoilingTemperature])
	half := standardGravity * v[LiquorLevel] / 2
	below, err := steam.SaturationTemperature(p + quantity.Pressure(rho*half))
	if err != nil {
		return 0, by, err
	}
	_, slopeBelow, err := steam.SaturationSlope(below)
	if err != nil {
		return 0, by, err
	}
	rise, riseByW, riseByTw := l.Rise(w, tw)
	riseBelow, belowByW, belowByTw := l.Rise(w, float64(below))
	// Everything below moves with the boiling temperature of water there.
	move := (1 + belowByTw) / slopeBelow // K/Pa
	by.water = move*slope - 1 - riseByTw
	by.level = move * rho * standardGravity / 2
	by.solids = move*rhoByW*half + belowByW - riseByW
	by.boiling = move * rhoByT * half
	return float64(below) + riseBelow - tw - rise, by, nil
}

type meanSlopes struct{ chest, boiling, duty, circulation, solids float64 }

// logarithmicMean is the mean difference in K between chest and liquor that is
// heated, all of it together, from its boiling temperature by the duty.
func logarithmicMean(l *liquor.Liquor, v *state) (mean float64, by meanSlopes, err error) {
	w, t := v[SolidsOut], v[BoilingTemperature]
	_, _, cp := l.Enthalpy(w, t)
	heating := v[Duty] / (v[Circulation] * cp)
	cold := v[ChestTemperature] - t // the difference where the liquor enters
	hot := cold - heating           // and where it leaves
	if !(cold > 0 && hot > 0) {
		return 0, by, &fault.Range{Quantity: "heating of the circulating liquor", Unit: "K difference", Source: "circulation", Value: heating, Min: 0, Max: cold}
	}
	var byCold, byHot float64
	mean = (cold + hot) / 2
	const alike = 1e-4 // relative difference below which the series is exact to rounding
	if gap := heating / mean; gap < alike {
		mean -= heating * gap / 12
		byCold, byHot = 0.5-gap/6, 0.5+gap/6
	} else {
		logarithm := math.Log(cold / hot)
		mean = heating / logarithm
		byCold = (1 - mean/cold) / logarithm
		byHot = (mean/hot - 1) / logarithm
	}
	// cp moves with solids and temperature; its own slopes by differences.
	const dw, dt = 1e-5, 1e-2
	_, _, stronger := l.Enthalpy(w+dw, t)
	_, _, weaker := l.Enthalpy(w-dw, t)
	_, _, hotter := l.Enthalpy(w, t+dt)
	_, _, colder := l.Enthalpy(w, t-dt)
	byHeating := -byHot
	by.chest = byCold + byHot
	by.duty = byHeating * heating / v[Duty]
	by.circulation = -byHeating * heating / v[Circulation]
	by.solids = -byHeating * heating / cp * (stronger - weaker) / (2 * dw)
	by.boiling = -by.chest - byHeating*heating/cp*(hotter-colder)/(2*dt)
	return mean, by, nil
}

// saturationResidual: ln p = ln psat(t), which is nearly straight in 1/t.
func saturationResidual(p, t Number, v *state, d *gradient) (miss, size float64, err error) {
	saturation, slope, err := steam.SaturationSlope(quantity.Temperature(v[t]))
	if err != nil {
		return 0, 0, err
	}
	d[p], d[t] = 1/v[p], -slope/float64(saturation)
	return math.Log(v[p] / float64(saturation)), 1, nil
}

// vapourEnthalpy is the enthalpy in J/kg of vapour at t and at the pressure
// at which water boils at tw, both in K, with its derivatives.
func vapourEnthalpy(tw, t float64) (h, byTw, byT float64, err error) {
	p, slope, err := steam.SaturationSlope(quantity.Temperature(tw))
	if err != nil {
		return 0, 0, 0, err
	}
	h, byP, byT, err := steam.VapourEnthalpy(p, quantity.Temperature(t))
	return h, byP * slope, byT, err
}

type liveSteamSlopes struct{ temperature, superheat, dryness float64 }

// liveSteamEnthalpy is the enthalpy in J/kg of steam with saturation
// temperature ts in K: superheated vapour less the latent heat of the water
// in it. Superheat and wetness never occur together in an answer, but a
// solver may look for either.
func liveSteamEnthalpy(ts, superheat, dryness float64) (h float64, by liveSteamSlopes, err error) {
	hot, hotByTs, hotByT, err := vapourEnthalpy(ts, ts+superheat)
	if err != nil {
		return 0, by, err
	}
	dry, dryByTs, dryByT := hot, hotByTs, hotByT
	if superheat != 0 {
		if dry, dryByTs, dryByT, err = vapourEnthalpy(ts, ts); err != nil {
			return 0, by, err
		}
	}
	wet, wetByTs, err := steam.LiquidEnthalpy(quantity.Temperature(ts))
	if err != nil {
		return 0, by, err
	}
	by.temperature = hotByTs + hotByT - (1-dryness)*(dryByTs+dryByT-wetByTs)
	by.superheat = hotByT
	by.dryness = dry - wet
	return hot - (1-dryness)*(dry-wet), by, nil
}
