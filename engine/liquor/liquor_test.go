package liquor

import (
	"errors"
	"math"
	"testing"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/quantity"
)

func point(v float64) *float64 { return &v }

func row(solids float64, points ...float64) EnthalpyRow {
	r := EnthalpyRow{Solids: solids}
	for i := 0; i < len(points); i += 2 {
		r.Points = append(r.Points, EnthalpyPoint{quantity.Celsius(points[i]), quantity.KilojoulesPerKilogram(points[i+1])})
	}
	return r
}

// caustic holds enthalpies of sodium hydroxide solutions in kJ/kg at 20, 60,
// 100 and 140 degC by Olsson, Jernqvist & Aly, Int. J. Thermophys. 18 (1997)
// 779, and Duhring lines of the same source; it only serves as a shape here.
func caustic(t testing.TB) *Liquor {
	l, err := New(Custom{
		Duhring: []DuhringLine{{0, 1, 0}, {0.3, 1.03, 15}, {0.5, 1.0896, 37.446}},
		EnthalpyTable: []EnthalpyRow{
			row(0, 20, 83.3, 60, 252.1, 100, 419.6, 140, 591.9),
			row(0.2, 20, 65.6, 60, 213.3, 100, 361.2, 140, 510.2),
			row(0.4, 20, 156.3, 60, 295.0, 100, 433.6, 140, 572.0),
			row(0.5, 20, 284.0, 60, 413.0, 100, 541.2, 140, 668.8),
		},
	})
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func kinds(t testing.TB) map[string]*Liquor {
	polynomial, err := New(Custom{RisePolynomial: []float64{0, 1.78, 6.22}, SpecificHeat: []float64{4190, -2350}})
	if err != nil {
		t.Fatal(err)
	}
	constant, err := New(Custom{RiseConstant: point(5), SpecificHeat: []float64{4000}})
	if err != nil {
		t.Fatal(err)
	}
	return map[string]*Liquor{"polynomial": polynomial, "constant": constant, "caustic": caustic(t)}
}

// TestDerivatives compares the derivatives of every kind with differences,
// and steps over every node to see that height and slope go on.
func TestDerivatives(t *testing.T) {
	for name, l := range kinds(t) {
		for w := 0.01; w < 0.5; w += 0.0147 {
			for temperature := 280.0; temperature < 420; temperature += 7.3 {
				const dw, dt = 1e-6, 1e-4
				_, byW, byT := l.Enthalpy(w, temperature)
				up, _, _ := l.Enthalpy(w+dw, temperature)
				down, _, _ := l.Enthalpy(w-dw, temperature)
				if d := (up - down) / (2 * dw); math.Abs(d-byW) > 1e-5*math.Abs(byW)+10 {
					t.Errorf("%s: dh/dw at %g, %g K is %g, by differences %g", name, w, temperature, byW, d)
				}
				up, _, _ = l.Enthalpy(w, temperature+dt)
				down, _, _ = l.Enthalpy(w, temperature-dt)
				if d := (up - down) / (2 * dt); math.Abs(d-byT) > 1e-5*math.Abs(byT)+1e-2 {
					t.Errorf("%s: dh/dT at %g, %g K is %g, by differences %g", name, w, temperature, byT, d)
				}
				_, byW, byTw := l.Rise(w, temperature)
				up, _, _ = l.Rise(w+dw, temperature)
				down, _, _ = l.Rise(w-dw, temperature)
				if d := (up - down) / (2 * dw); math.Abs(d-byW) > 1e-4*math.Abs(byW)+1e-3 {
					t.Errorf("%s: rise by w at %g, %g K is %g, by differences %g", name, w, temperature, byW, d)
				}
				up, _, _ = l.Rise(w, temperature+dt)
				down, _, _ = l.Rise(w, temperature-dt)
				if d := (up - down) / (2 * dt); math.Abs(d-byTw) > 1e-6 {
					t.Errorf("%s: rise by Tw at %g, %g K is %g, by differences %g", name, w, temperature, byTw, d)
				}
			}
		}
	}
}

// TestFiguresComeBack: at its own points a table gives its own figures, and
// the classroom polynomials what their book prints.
func TestFiguresComeBack(t *testing.T) {
	l := caustic(t)
	for _, c := range []struct{ w, celsius, want float64 }{{0.2, 60, 213.3}, {0.4, 100, 433.6}, {0.5, 20, 284.0}, {0, 140, 591.9}} {
		h, _, _ := l.Enthalpy(c.w, quantity.Zero+c.celsius)
		if math.Abs(h/1e3-c.want) > 1e-9 {
			t.Errorf("h(%g, %g degC) is %g, want %g kJ/kg", c.w, c.celsius, h/1e3, c.want)
		}
	}
	// 50 % caustic where water boils at 50 degC: 1.0896 x 50 + 37.446 - 50.
	if rise, _, _ := l.Rise(0.5, quantity.Zero+50); math.Abs(rise-41.926) > 1e-9 {
		t.Errorf("rise %g, want 41.926 K", rise)
	}
	// Geankoplis ex. 8.5-1, from memory: at 13.66 % the rise is 0.36 K and the
	// specific heat 3.869 kJ/(kg K); at 50 % 2.45 K and 3.015.
	sugar := kinds(t)["polynomial"]
	for _, c := range []struct{ w, rise, cp float64 }{{0.1366, 0.36, 3.869}, {0.5, 2.45, 3.015}} {
		rise, _, _ := sugar.Rise(c.w, 373)
		_, _, cp := sugar.Enthalpy(c.w, 373)
		if math.Abs(rise-c.rise) > 0.005+1e-12 || math.Abs(cp/1e3-c.cp) > 0.0005+1e-12 {
			t.Errorf("at %g: rise %.4g K, cp %.5g, want %g and %g", c.w, rise, cp/1e3, c.rise, c.cp)
		}
	}
}

func TestChecks(t *testing.T) {
	l := caustic(t)
	var outside *fault.Range
	if remarks, err := l.CheckEnthalpy(0.3, quantity.Zero+80); err != nil || len(remarks) != 0 {
		t.Errorf("inside: %v %v", remarks, err)
	}
	if remarks, err := l.CheckEnthalpy(0.51, quantity.Zero+142); err != nil || len(remarks) != 2 {
		t.Errorf("a little outside of both: %v %v", remarks, err)
	}
	if _, err := l.CheckEnthalpy(0.6, quantity.Zero+80); !errors.As(err, &outside) {
		t.Errorf("far too strong: %v", err)
	}
	if _, err := l.CheckEnthalpy(0.3, quantity.Zero+160); !errors.As(err, &outside) {
		t.Errorf("far too hot: %v", err)
	}
	if len(l.CheckRise(0.5)) != 0 || len(l.CheckRise(0.55)) != 1 {
		t.Error("a rise beyond the last line must be remarked on, and only there")
	}
	negative, err := New(Custom{RiseConstant: point(0), SpecificHeat: []float64{1000, -2000}})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := negative.CheckEnthalpy(0.7, 300); !errors.As(err, &outside) {
		t.Errorf("negative specific heat: %v", err)
	}
}

func TestRefusedFigures(t *testing.T) {
	nan := math.NaN()
	fine := []float64{4000}
	for _, c := range []struct {
		name   string
		custom Custom
		want   int // problems named
	}{
		{"nothing", Custom{}, 2},
		{"rise NaN", Custom{RiseConstant: &nan, SpecificHeat: fine}, 1},
		{"rise negative", Custom{RiseConstant: point(-1), SpecificHeat: fine}, 1},
		{"coefficients", Custom{RisePolynomial: []float64{nan, 1, math.Inf(1)}, SpecificHeat: fine}, 2},
		{"specific heat NaN", Custom{RiseConstant: point(0), SpecificHeat: []float64{nan}}, 1},
		{"line", Custom{Duhring: []DuhringLine{{50, -1, 900}}, SpecificHeat: fine}, 3},
		{"lines out of order", Custom{Duhring: []DuhringLine{{0.5, 1, 0}, {0.5, 1, 0}}, SpecificHeat: fine}, 1},
		{"rows out of order", Custom{RiseConstant: point(0), EnthalpyTable: []EnthalpyRow{row(0.5, 20, 80), row(0.4, 20, 80)}}, 1},
		{"points out of order", Custom{RiseConstant: point(0), EnthalpyTable: []EnthalpyRow{row(0.5, 20, 80, 10, 50)}}, 1},
		{"enthalpy NaN", Custom{RiseConstant: point(0), EnthalpyTable: []EnthalpyRow{row(0.5, 20, nan)}}, 1},
		{"empty row", Custom{RiseConstant: point(0), EnthalpyTable: []EnthalpyRow{row(0.5)}}, 1},
	} {
		l, err := New(c.custom)
		joined, ok := err.(interface{ Unwrap() []error })
		if l != nil || !ok || len(joined.Unwrap()) != c.want {
			t.Errorf("%s: %v, want %d problems", c.name, err, c.want)
			continue
		}
		for _, e := range joined.Unwrap() {
			var f *fault.Invalid
			if !errors.As(e, &f) || f.Field == "" || f.WayOut == "" {
				t.Errorf("%s: %v", c.name, e)
			}
		}
	}
}
