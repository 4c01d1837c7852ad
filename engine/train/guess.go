package train

import (
	"math"

	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
)

// strengths are where between the feed's solids and dry solids the attempts
// start to look for the product: first from both ends of what is possible.
// forces are the driving forces in K that they start from, one for each round
// of strengths.
var (
	strengths = [...]float64{0.05, 0.9, 0.5, 0.2}
	forces    = [...]float64{20, 5, 50, 100}
)

// guess sets first values for the numbers of a block: what the numbers
// already known imply, completed by what is usual.
func (s *search) guess(b *block, attempt int, v *state) {
	strength := strengths[attempt%len(strengths)]
	usualForce := forces[attempt/len(strengths)%len(forces)]
	w := *v
	known := func(n Number) bool { return !math.IsNaN(w[n]) }
	set := func(n Number, value float64) {
		if !known(n) && !math.IsNaN(value) && !math.IsInf(value, 0) {
			w[n] = value
		}
	}
	tie := func(a, c Number) {
		set(a, w[c])
		set(c, w[a])
	}
	boilingAt := func(p, t Number) {
		if known(p) {
			if saturation, err := steam.SaturationTemperature(quantity.Pressure(w[p])); err == nil {
				set(t, float64(saturation))
			}
		}
	}
	const (
		latent    = 2.25e6 // J/kg
		usualHeat = 3.8e3  // J/(kg K)
		usualU    = 1.5e3  // W/(m2 K)
		usualSize = 1.0    // kg/s
	)

	// Solids: those of feed and product are tied by their flows.
	tie(ProductSolids, SolidsOut)
	left := math.NaN() // product per feed
	if known(FeedFlow) && known(ProductFlow) && w[FeedFlow] > 0 {
		left = math.Min(math.Max(w[ProductFlow]/w[FeedFlow], 0.01), 0.99)
	}
	if !known(FeedSolids) && !known(SolidsOut) {
		set(SolidsOut, strength)
	}
	set(FeedSolids, w[SolidsOut]*left)
	set(FeedSolids, w[SolidsOut]*(1-strength))
	set(SolidsOut, math.Min(0.99, w[FeedSolids]/left))
	set(SolidsOut, w[FeedSolids]+(1-w[FeedSolids])*strength)
	tie(ProductSolids, SolidsOut)

	// Temperatures.
	tie(ProductTemperature, BoilingTemperature)
	boilingAt(EffectPressure, VapourSaturationTemperature)
	boilingAt(SteamPressure, SteamTemperature)
	tie(SteamTemperature, ChestTemperature)
	if known(VapourSaturationTemperature) {
		rise, _, _ := s.question.liquor.Rise(w[SolidsOut], w[VapourSaturationTemperature])
		set(BoilingTemperature, w[VapourSaturationTemperature]+math.Max(rise, 0))
	}
	force := usualForce
	if known(Duty) && known(Area) && known(Coefficient) {
		force = w[Duty] / (w[Area] * w[Coefficient])
	}
	if known(drivingForce) {
		force = w[drivingForce]
	}
	force = math.Min(math.Max(force, 0.1), 100)
	set(BoilingTemperature, w[ChestTemperature]-force)
	set(BoilingTemperature, quantity.Zero+80)
	set(ChestTemperature, w[BoilingTemperature]+force)
	tie(SteamTemperature, ChestTemperature)
	if !known(VapourSaturationTemperature) {
		rise, _, _ := s.question.liquor.Rise(w[SolidsOut], w[BoilingTemperature])
		set(VapourSaturationTemperature, w[BoilingTemperature]-math.Max(rise, 0))
	}
	for _, n := range [...]Number{BoilingTemperature, ChestTemperature, SteamTemperature, VapourSaturationTemperature} {
		w[n] = math.Min(math.Max(w[n], coldest+1), hottest-1)
	}
	tie(ProductTemperature, BoilingTemperature)
	set(FeedTemperature, math.Max(w[BoilingTemperature]-usualForce, coldest+1))
	set(drivingForce, w[ChestTemperature]-w[BoilingTemperature])
	for _, pair := range [...][2]Number{{EffectPressure, VapourSaturationTemperature}, {SteamPressure, SteamTemperature}} {
		if p, err := steam.SaturationPressure(quantity.Temperature(w[pair[1]])); err == nil {
			set(pair[0], float64(p))
		}
	}

	// Volumes tell their masses.
	for _, pair := range [...][4]Number{{FeedFlow, FeedVolumeFlow, FeedSolids, FeedTemperature}, {ProductFlow, ProductVolumeFlow, SolidsOut, BoilingTemperature}} {
		if rho, _, _, ok := s.question.liquor.Density(w[pair[2]], w[pair[3]]); ok {
			set(pair[0], w[pair[1]]*rho)
		}
	}

	// Flows: whichever is known sets the size of the others.
	tie(Evaporation, VapourFlow)
	ratio := 1 - w[FeedSolids]/math.Max(w[SolidsOut], 1e-6)
	if !(ratio > 0.01) {
		ratio = 0.01
	}
	if known(Area) && known(Coefficient) {
		set(Duty, w[Area]*w[Coefficient]*math.Max(w[drivingForce], 1))
	}
	if known(SteamFlow) {
		set(Duty, w[SteamFlow]*latent)
	}
	set(VapourFlow, w[Economy]*w[SteamFlow])
	if known(FeedFlow) {
		set(VapourFlow, w[FeedFlow]-w[ProductFlow])
		set(VapourFlow, w[FeedFlow]*ratio)
	}
	if known(ProductFlow) {
		set(VapourFlow, w[ProductFlow]*ratio/math.Max(1-ratio, 0.01))
	}
	warming := usualHeat * (w[BoilingTemperature] - w[FeedTemperature]) / ratio
	perVapour := math.Max(latent+warming, 0.1*latent)
	set(VapourFlow, w[Duty]/perVapour)
	set(VapourFlow, usualSize)
	set(FeedFlow, w[VapourFlow]/ratio)
	set(ProductFlow, math.Max(w[FeedFlow]-w[VapourFlow], 1e-3*w[FeedFlow]))
	set(Duty, w[VapourFlow]*perVapour)
	set(SteamFlow, w[Duty]/latent)
	tie(Evaporation, VapourFlow)
	set(Economy, w[VapourFlow]/w[SteamFlow])
	set(Coefficient, w[Duty]/(w[Area]*math.Max(w[drivingForce], 0.1)))
	set(Coefficient, usualU)
	set(Area, w[Duty]/(w[Coefficient]*math.Max(w[drivingForce], 0.1)))

	// What usually takes its default, when it is sought.
	set(Dryness, 0.95)
	set(Superheat, 10)
	set(Subcooling, 5)
	set(HeatLoss, 0.02)
	set(Vent, 0.02)
	set(Entrainment, 0.01)
	set(GasSideResistance, 1e-5)
	set(LiquorLevel, 1)

	for _, n := range b.numbers {
		v[n] = w[n]
	}
}
