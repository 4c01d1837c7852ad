package liquor

import (
	"errors"
	"math"
	"testing"

	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
)

func byID(t testing.TB, id string) *Liquor {
	t.Helper()
	l, err := ByID(id)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// boiling is the boiling temperature of water at a pressure, in K.
func boiling(t *testing.T, kilopascals float64) float64 {
	t.Helper()
	tw, err := steam.SaturationTemperature(quantity.Kilopascals(kilopascals))
	if err != nil {
		t.Fatal(err)
	}
	return float64(tw)
}

// TestSucrosePublished: isopiestic water activities at 25 degC by molality (from
// memory), boiling-point rises of another published model (Crapiste and Lozano,
// 1988), densities of the CRC handbook at 20 degC and solubilities of Mohos
// (2010), found in public copies.
func TestSucrosePublished(t *testing.T) {
	for molality, want := range map[float64]float64{1: 0.9806, 2: 0.9581, 3: 0.9328, 4: 0.9057, 5: 0.8776, 6: 0.8493} {
		grams := molality * 342.297
		logarithm, _, _ := sucroseActivity(grams/(1000+grams), 298.15)
		if got := math.Exp(logarithm); math.Abs(got-want) > 0.001 {
			t.Errorf("water activity at %g mol/kg is %.4f, want %.4f", molality, got, want)
		}
	}
	l := byID(t, "sucrose")
	for solids, want := range map[float64]float64{0.6: 2.82, 0.7: 4.87} {
		if rise, _, _ := l.Rise(solids, boiling(t, 101.325)); math.Abs(rise-want) > 0.15 {
			t.Errorf("rise at %g is %.3f K, the other model has %.2f", solids, rise, want)
		}
	}
	for solids, want := range map[float64]float64{0.1: 1038.1, 0.3: 1127.0, 0.5: 1229.5, 0.6: 1286.4, 0.8: 1411.7} {
		if rho, _, _, _ := l.Density(solids, quantity.Zero+20); math.Abs(rho/want-1) > 0.002 {
			t.Errorf("density at %g is %.1f kg/m3, CRC has %.1f", solids, rho, want)
		}
	}
	for celsius, want := range map[float64]float64{20: 0.6709, 40: 0.7042, 60: 0.7418, 80: 0.7836, 100: 0.8297} {
		if got, _ := sucroseSolubility(quantity.Zero + celsius); math.Abs(got-want) > 0.005 {
			t.Errorf("solubility at %g degC is %.4f, want %.4f", celsius, got, want)
		}
	}
}

// TestCausticPublished: a producer's boiling point, charts as textbooks read
// them (Dutta ex. 9.6, Geankoplis ex. 8.4-3, Kern), which spread by 3 K at 50 %,
// and handbook densities at 20 degC (from memory).
func TestCausticPublished(t *testing.T) {
	l := byID(t, "sodium-hydroxide")
	tw := boiling(t, 101.325)
	if rise, _, _ := l.Rise(0.5, tw); math.Abs(tw+rise-quantity.Zero-145) > 3 {
		t.Errorf("50 %% boils at %.1f degC at 101.325 kPa, a producer has 145", tw+rise-quantity.Zero)
	}
	for water, want := range map[float64]float64{37: 39, 46.1: 42.8, 76.1: 42.8} {
		if rise, _, _ := l.Rise(0.5, quantity.Zero+water); math.Abs(rise-want) > 3 {
			t.Errorf("rise of 50 %% where water boils at %g degC is %.1f K, want %g", water, rise, want)
		}
	}
	for _, c := range []struct{ solids, celsius, kilojoules, tolerance float64 }{
		{0.2, 60, 214, 3}, {0.5, 89.5, 505, 5}, {0.095, 40, 145, 7}, {0.5, 76, 460, 6},
	} {
		if h, _, _ := l.Enthalpy(c.solids, quantity.Zero+c.celsius); math.Abs(h/1e3-c.kilojoules) > c.tolerance {
			t.Errorf("enthalpy at %g and %g degC is %.1f kJ/kg, charts have %g", c.solids, c.celsius, h/1e3, c.kilojoules)
		}
	}
	for solids, want := range map[float64]float64{0.1: 1108.9, 0.2: 1219.1, 0.3: 1327.7, 0.4: 1429.9} {
		if rho, _, _, _ := l.Density(solids, quantity.Zero+20); math.Abs(rho/want-1) > 0.003 {
			t.Errorf("density at %g is %.1f kg/m3, want %.1f", solids, rho, want)
		}
	}
}

// TestIdealSolution: the limit of a dilute solution is the ebullioscopic
// constant of water, 0.513 K kg/mol at 100 degC (handbooks, from memory), less
// the 1.6 % by which vapour is no ideal gas there: the model takes pressures for
// fugacities.
func TestIdealSolution(t *testing.T) {
	l, err := New(Custom{Solute: &Solute{MolarMass: 58.44, Factor: 2}, SpecificHeat: []float64{4000}})
	if err != nil {
		t.Fatal(err)
	}
	const molality = 0.01
	grams := molality * 58.44
	if rise, _, _ := l.Rise(grams/(1000+grams), boiling(t, 101.325)); math.Abs(rise/(2*molality)/0.513-1) > 0.02 {
		t.Errorf("%.4f K kg/mol, want 0.513", rise/(2*molality))
	}
}

// TestRiseTable: a table is met at its points, and held beyond them.
func TestRiseTable(t *testing.T) {
	table := Custom{SpecificHeat: []float64{4000}}
	for _, w := range []float64{0.1, 0.3, 0.6} {
		row := RiseRow{Solids: w}
		for c := 40.0; c <= 120; c += 20 {
			row.Points = append(row.Points, RisePoint{quantity.Celsius(c), 10 * w * w * (1 + c/200)})
		}
		table.RiseTable = append(table.RiseTable, row)
	}
	l, err := New(table)
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range table.RiseTable {
		for _, point := range row.Points {
			if rise, _, _ := l.Rise(row.Solids, float64(point.Water)); math.Abs(rise-point.Rise) > 1e-12 {
				t.Errorf("%g at %g K: %g, want %g", row.Solids, point.Water, rise, point.Rise)
			}
		}
	}
	end, _, _ := l.Rise(0.6, quantity.Zero+120)
	if beyond, byW, byTw := l.Rise(0.9, quantity.Zero+150); beyond != end || byW != 0 || byTw != 0 || len(l.CheckRise(0.9)) != 1 {
		t.Errorf("beyond the table %g (%g, %g), at its end %g", beyond, byW, byTw, end)
	}
}

// TestCatalogueLaws: at zero solids a liquor is IAPWS water, its rise grows with
// solids, and every derivative is that of its value.
func TestCatalogueLaws(t *testing.T) {
	for _, id := range IDs() {
		l := byID(t, id)
		strongest := map[string]float64{"water": 0, "sucrose": 0.65, "sodium-hydroxide": 0.6}[id]
		for c := 30.0; c <= 140; c += 5 {
			tk := quantity.Zero + c
			h, _, _ := l.Enthalpy(0, tk)
			want, _, err := steam.LiquidEnthalpy(quantity.Temperature(tk))
			rise, _, _ := l.Rise(0, tk)
			if err != nil || math.Abs(h-want) > 1e-6 || math.Abs(rise) > 1e-9 {
				t.Errorf("%s at %g degC without solids: h %g, water %g, rise %g", id, c, h, want, rise)
			}
			before := -1.0
			for w := 0.0; w <= strongest; w += 0.025 {
				rise, byW, byTw := l.Rise(w, tk)
				if !(rise > before) || !l.Pure() && w > 0 && byW <= 0 {
					t.Errorf("%s at %g degC: rise %g at %g, after %g", id, c, rise, w, before)
				}
				before = rise
				const dw, dt = 1e-5, 1e-2
				difference := func(read func(w, t float64) float64, dw, dt float64) float64 {
					return (read(w+dw, tk+dt) - read(w-dw, tk-dt)) / (2 * (dw + dt))
				}
				riseOf := func(w, t float64) float64 { v, _, _ := l.Rise(w, t); return v }
				heatOf := func(w, t float64) float64 { v, _, _ := l.Enthalpy(w, t); return v }
				densityOf := func(w, t float64) float64 { v, _, _, _ := l.Density(w, t); return v }
				_, hByW, hByT := l.Enthalpy(w, tk)
				rho, rhoByW, rhoByT, ok := l.Density(w, tk)
				if !ok || !(rho > 900 && rho < 1800) {
					t.Errorf("%s: density %g", id, rho)
				}
				near := func(what string, got, want, scale float64) {
					if math.Abs(got-want) > 1e-5*(math.Abs(want)+scale) {
						t.Errorf("%s at %g and %g degC: %s is %g, by differences %g", id, w, c, what, got, want)
					}
				}
				near("rise by temperature", byTw, difference(riseOf, 0, dt), 0.01)
				near("enthalpy by temperature", hByT, difference(heatOf, 0, dt), 1)
				near("density by temperature", rhoByT, difference(densityOf, 0, dt), 1)
				if w > 0.02 && !l.Pure() {
					near("rise by solids", byW, difference(riseOf, dw, 0), 1)
					near("enthalpy by solids", hByW, difference(heatOf, dw, 0), 1e3)
					near("density by solids", rhoByW, difference(densityOf, dw, 0), 10)
				}
			}
		}
	}
}

// TestSaturation: above its solubility sucrose boils like the saturated liquor,
// with the crystals beside; on either side the rise is smooth.
func TestSaturation(t *testing.T) {
	l := byID(t, "sucrose")
	tw := quantity.Zero + 60
	rise, _, _ := l.Rise(0.9, tw)
	soluble, _ := sucroseSolubility(tw + rise)
	if at, _, _ := l.Rise(soluble, tw); math.Abs(at-rise) > 1e-9 {
		t.Errorf("rise %g above saturation, %g at it", rise, at)
	}
	if fraction, known := l.Crystals(0.9, tw+rise); !known || math.Abs(fraction*(1)+(1-fraction)*soluble-0.9) > 1e-12 {
		t.Errorf("%g of crystals at %g, saturated at %g", fraction, 0.9, soluble)
	}
	if fraction, _ := l.Crystals(0.5, tw); fraction != 0 {
		t.Errorf("%g of crystals in thin liquor", fraction)
	}
	const d = 1e-3
	for _, w := range []float64{soluble - 0.01, soluble + 0.01} {
		_, byW, byTw := l.Rise(w, tw)
		above, _, _ := l.Rise(w, tw+d)
		below, _, _ := l.Rise(w, tw-d)
		strong, _, _ := l.Rise(w+1e-5, tw)
		weak, _, _ := l.Rise(w-1e-5, tw)
		if math.Abs(byTw-(above-below)/(2*d)) > 1e-6 || math.Abs(byW-(strong-weak)/2e-5) > 1e-3*(1+math.Abs(byW)) {
			t.Errorf("at %g: slopes %g and %g, by differences %g and %g", w, byW, byTw, (strong-weak)/2e-5, (above-below)/(2*d))
		}
	}
}

// TestCatalogueChecks: what lies outside of a liquor's range is refused or
// remarked on.
func TestCatalogueChecks(t *testing.T) {
	var invalid *fault.Invalid
	if _, err := ByID("honey"); !errors.As(err, &invalid) {
		t.Error(err)
	}
	for _, c := range []struct {
		id        string
		w, kelvin float64
	}{{"water", 0.1, 350}, {"sucrose", 0.97, 350}, {"sucrose", 0.5, 450}, {"sodium-hydroxide", 0.75, 380}, {"sodium-hydroxide", 0.5, 283}, {"sodium-hydroxide", 0.3, 490}, {"sucrose", math.NaN(), 350}} {
		var outside *fault.Range
		if _, err := byID(t, c.id).CheckEnthalpy(c.w, c.kelvin); !errors.As(err, &outside) {
			t.Errorf("%+v: %v", c, err)
		}
	}
	remarks, err := byID(t, "sucrose").CheckEnthalpy(0.8, quantity.Zero+60)
	if err != nil || len(remarks) != 1 || remarks[0].Code != evidence.Crystallisation {
		t.Errorf("crystals: %v %v", remarks, err)
	}
	if len(byID(t, "sucrose").CheckRise(0.75)) != 1 || len(byID(t, "sodium-hydroxide").CheckRise(0.5)) != 1 || len(byID(t, "sucrose").CheckRise(0.6)) != 0 {
		t.Error("remarks on a rise that sources differ about")
	}
}

func BenchmarkLiquors(b *testing.B) {
	for _, id := range IDs() {
		l := byID(b, id)
		b.Run(id+"/rise", func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				l.Rise(0.4, 340)
			}
		})
		b.Run(id+"/enthalpy", func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				l.Enthalpy(0.4, 340)
			}
		})
	}
}
