package steam

import (
	"math"
	"testing"
)

// TestJumps: where two regions meet they differ by less than the bound that
// decides whether a value may lie inside of the jump.
func TestJumps(t *testing.T) {
	const steps = 2000
	worst := map[string]float64{}
	look := func(name string, c *coordinate, apart float64) {
		worst[name+", "+c.name] = max(worst[name+", "+c.name], math.Abs(apart))
		if math.Abs(apart) >= c.jump/2 {
			t.Errorf("%s: %s jumps by %g", name, c.name, apart)
		}
	}
	for i := range steps + 1 {
		share := float64(i) / steps
		for _, c := range []*coordinate{&enthalpy, &entropy} {
			p := lineJoint()*(1+1e-9) + share*(highestPressure-lineJoint()*(1+1e-9))
			low, _ := c.in1(p, regionsEnd)
			look("1 and 3", c, c.dense(p, regionsEnd)-low)
			end := boundary23Temperature(p)
			low, _ = c.in2(p, end)
			look("2 and 3", c, c.dense(p, end)-low)
			p = math.Pow(highest5, share)
			low, _ = c.in2(p, hottest2)
			high, _ := c.in5(p, hottest2)
			look("2 and 5", c, high-low)
		}
	}
	t.Log(worst)
}
