// Package vetting holds published check values that the engine can recompute
// anywhere, at any time: in tests, when a service starts, and on request.
package vetting

import (
	"fmt"
	"math"
)

// Check is one published value.
type Check struct {
	ID        string
	Quantity  string // what is computed, with its inputs
	Unit      string // of Published and Tolerance, as the source prints it
	Source    string // where it was published
	Published float64
	// Tolerance is half a unit of the last printed figure.
	Tolerance float64
	compute   func() (float64, error)
}

// Result is a check with what the engine makes of it.
type Result struct {
	Check
	Computed  float64
	Deviation float64 // Computed less Published
	Passed    bool
}

// Run recomputes every check, always in the same order.
func Run() []Result {
	checks := steamChecks()
	results := make([]Result, len(checks))
	for i, c := range checks {
		computed, err := c.compute()
		if err != nil {
			computed = math.NaN()
		}
		deviation := computed - c.Published
		// Half a unit of the last figure is itself only a decimal figure:
		// leave room for its binary rounding.
		const rounding = 1e-12
		results[i] = Result{
			Check: c, Computed: computed, Deviation: deviation,
			Passed: math.Abs(deviation) <= c.Tolerance+rounding*math.Abs(c.Published),
		}
	}
	return results
}

// Failures returns one line for each failed result.
func Failures(results []Result) []string {
	var lines []string
	for _, r := range results {
		if !r.Passed {
			lines = append(lines, fmt.Sprintf("%s: %s is %.12g, published %.12g %s (%s)", r.ID, r.Quantity, r.Computed, r.Published, r.Unit, r.Source))
		}
	}
	return lines
}
