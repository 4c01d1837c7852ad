package steam

import (
	"math"
	"math/rand/v2"
	"testing"

	"calandria.example/calandria/engine/quantity"
)

// mixed draws points of all regions in a random order.
func mixed(n int, seed uint64) (p []quantity.Pressure, t []quantity.Temperature) {
	r := rand.New(rand.NewPCG(seed, 4))
	for len(p) < n {
		s, err := randomState([]int{1, 2, 3, 5}[r.IntN(4)], r)
		if err != nil || s.Saturated {
			continue
		}
		p, t = append(p, s.Pressure), append(t, s.Temperature)
	}
	return p, t
}

// TestEnthalpies: the batch has the digits of the scalar form, for every length
// and mixture of regions.
func TestEnthalpies(t *testing.T) {
	for _, n := range []int{0, 1, 2, 3, 4, 5, 7, 8, 9, 255, 256, 257, 258, 1000, 20_011} {
		p, temperature := mixed(n, uint64(n))
		h := make([]quantity.Enthalpy, n)
		if done, err := Enthalpies(h, p, temperature); done != n || err != nil {
			t.Fatalf("%d of %d: %v", done, n, err)
		}
		for i := range h {
			if want, err := Enthalpy(p[i], temperature[i]); err != nil || h[i] != want {
				t.Fatalf("%d of %d, at %g Pa and %g K: %v, one by one %v: %v", i, n, p[i], temperature[i], h[i], want, err)
			}
		}
	}
}

// TestEnthalpiesStop: at a point without answer the batch stops, with all
// before it written and the reason that the scalar form gives.
func TestEnthalpiesStop(t *testing.T) {
	for _, bad := range []int{0, 1, 255, 256, 300, 599} {
		p, temperature := mixed(600, uint64(bad))
		temperature[bad] = quantity.Temperature(math.NaN())
		h := make([]quantity.Enthalpy, len(p))
		done, err := Enthalpies(h, p, temperature)
		_, want := Enthalpy(p[bad], temperature[bad])
		if done != bad || err == nil || err.Error() != want.Error() {
			t.Errorf("stopped at %d, want %d: %v", done, bad, err)
		}
		for i := range h[:bad] {
			if alone, err := Enthalpy(p[i], temperature[i]); err != nil || h[i] != alone {
				t.Errorf("%d: %v, one by one %v: %v", i, h[i], alone, err)
			}
		}
	}
}

// TestLanes holds the kernels of several points to those of one, on whatever
// machine this runs.
func TestLanes(t *testing.T) {
	for region, scalar := range map[int]func(p, t float64) float64{1: region1Enthalpy, 2: region2Enthalpy} {
		inputs := draw(region)
		for from := 0; from+blockLength <= len(inputs.p); from += blockLength - 1 {
			var s, plain sorted
			for i := range blockLength - from%3 {
				s.put(float64(inputs.p[from+i]), float64(inputs.t[from+i]), i)
			}
			plain = s
			oneByOne(&plain, scalar)
			if region == 1 {
				region1Enthalpies(&s)
			} else {
				region2Enthalpies(&s)
			}
			for i := range s.count {
				if s.h[i] != plain.h[i] {
					t.Fatalf("region %d: %v, one by one %v", region, s.h[i], plain.h[i])
				}
			}
		}
	}
}
