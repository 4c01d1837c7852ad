package train

import (
	"errors"
	"math"
	"testing"

	"calandria.example/calandria/engine/fault"
)

// TestSensitivities holds every sensitivity of several questions to the
// difference between two solved plants.
func TestSensitivities(t *testing.T) {
	l := sugar(t)
	for name, p := range map[string]Plant{
		"design":            design(l),
		"rating":            design(l, without(ProductSolids), Given{Area, 40}),
		"steam limited":     design(l, without(ProductSolids), Given{SteamFlow, 1}),
		"with its losses":   design(l, Given{HeatLoss, 0.02}, Given{Vent, 0.01}, Given{GasSideResistance, 1e-5}, Given{Entrainment, 0.001}, Given{Subcooling, 3}),
		"superheated steam": design(l, Given{Superheat, 20}),
	} {
		a, err := Solve(p)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		fixed := map[Number]bool{}
		for _, g := range append(p.Given, a.Defaults...) {
			fixed[g.Number] = true
		}
		var of []Number
		for n := range numbers {
			if !fixed[n] {
				of = append(of, n)
			}
		}
		list, err := Sensitivities(p, a, of)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if len(list) != len(of)*len(fixed) {
			t.Errorf("%s: %d sensitivities of %d numbers by %d", name, len(list), len(of), len(fixed))
		}
		for _, s := range list {
			if s.By == Dryness && a.Value[Superheat] > 0 {
				continue // superheated steam is dry
			}
			step := 1e-5 * reachOf(s.By, a)
			moved := func(by float64) float64 {
				other := Plant{Liquor: p.Liquor, Find: p.Find}
				for _, g := range append(p.Given, a.Defaults...) {
					if g.Number == s.By {
						g.Value += by
					}
					other.Given = append(other.Given, g)
				}
				b, err := Solve(other)
				if err != nil {
					t.Fatalf("%s: %v by %g: %v", name, s.By.Path(), by, err)
				}
				return b.Value[s.Of]
			}
			var difference float64
			sign := 0.0 // of the only way to move for what stands at an end of its range
			switch {
			case s.By == Dryness:
				sign = -1
			case a.Value[s.By] == 0:
				sign = 1
			}
			if sign == 0 {
				difference = (moved(step) - moved(-step)) / (2 * step)
			} else {
				difference = sign * (4*moved(sign*step) - 3*a.Value[s.Of] - moved(2*sign*step)) / (2 * step)
			}
			if scale := reachOf(s.Of, a) / reachOf(s.By, a); math.Abs(s.Value-difference) > 2e-5*scale+1e-5*math.Abs(difference) {
				t.Errorf("%s: d(%s)/d(%s) is %g, by differences %g", name, s.Of.Path(), s.By.Path(), s.Value, difference)
			}
		}
	}
}

// reachOf is a typical change of a number at an answer.
func reachOf(n Number, a *Answer) float64 {
	var v state
	copy(v[:], a.Value[:])
	return reach(n, &v)
}

func TestSensitivitiesOfWhatIsGiven(t *testing.T) {
	p := design(sugar(t))
	a, err := Solve(p)
	if err != nil {
		t.Fatal(err)
	}
	var invalid *fault.Invalid
	if _, err := Sensitivities(p, a, []Number{FeedFlow}); !errors.As(err, &invalid) {
		t.Error(err)
	}
}

// TestCheckQuestion: the check tells the same as the solve, without solving.
func TestCheckQuestion(t *testing.T) {
	l := sugar(t)
	c, err := CheckQuestion(design(l))
	if err != nil || !contains(c.Unknowns, Area) || contains(c.Unknowns, FeedFlow) || len(c.Defaults) != 7 {
		t.Errorf("%+v: %v", c, err)
	}
	for _, p := range []Plant{design(l, without(FeedFlow), without(FeedSolids)), design(l, Given{Evaporation, 1})} {
		_, err := CheckQuestion(p)
		_, want := Solve(p)
		if err == nil || want == nil || err.Error() != want.Error() {
			t.Errorf("%v, solving %v", err, want)
		}
	}
}
