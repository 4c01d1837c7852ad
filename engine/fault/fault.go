// Package fault holds the closed set of errors that the engine returns. Each
// carries its figures as values, in SI units, so that a caller can word it in
// its own language and units.
package fault

import (
	"fmt"
	"strings"
)

// Fault is any error of the engine. The set is closed: Range, Invalid,
// Specification, Infeasible and NotConverged.
type Fault interface {
	error
	fault()
}

// Range says that a value lies outside of what a published equation covers,
// so that a result would be meaningless.
type Range struct {
	Quantity string  // what the value is, such as "temperature"
	Unit     string  // SI unit of Value, Min and Max; "" for a fraction, "K difference" for a difference
	Source   string  // equation or release that sets the limits
	Value    float64 // what was asked
	Min, Max float64 // the limits; both included
}

func (f *Range) fault() {}

// Error words the fault in SI units.
func (f *Range) Error() string {
	return fmt.Sprintf("%s %g %s is outside %g to %g %s (%s)", f.Quantity, f.Value, f.Unit, f.Min, f.Max, f.Unit, f.Source)
}

// Invalid says that an input can not be meant as it was given.
type Invalid struct {
	Field  string // the input, by the name that the engine gives it
	Value  string // what was given
	Limit  string // what would be accepted
	WayOut string // what to do instead
}

func (f *Invalid) fault() {}

// Error words the fault.
func (f *Invalid) Error() string {
	return fmt.Sprintf("%s is %s: %s; %s", f.Field, f.Value, f.Limit, f.WayOut)
}

// Specification says that a question has too many or too few given numbers.
type Specification struct {
	Over bool // too many, else too few
	// Conflict is an irreducible set of given fields: with any one of them
	// dropped the rest agree. Empty when too few are given.
	Conflict []string
	// Missing is how many more numbers are needed.
	Missing int
	// Closers are the fields of which any one would close the gap, or one of
	// the gaps if Missing is greater than 1.
	Closers []string
}

func (f *Specification) fault() {}

// Error words the fault.
func (f *Specification) Error() string {
	if f.Over {
		return "over-specified: drop one of " + strings.Join(f.Conflict, ", ")
	}
	return fmt.Sprintf("under-specified by %d: give one of %s", f.Missing, strings.Join(f.Closers, ", "))
}

// Cause is why a plant can not exist.
type Cause int

// The causes of an infeasible plant.
const (
	NoDrivingForce      Cause = iota + 1 // the chest is no hotter than the boiling liquor
	NegativeEvaporation                  // the liquor would have to take up water
	WeakerProduct                        // product solids below feed solids
	NegativeFlow                         // a flow, duty, area or coefficient would be negative
	OutOfBounds                          // no state within physical limits satisfies the balances
)

// Infeasible says that the numbers are consistent but no plant can meet them.
type Infeasible struct {
	Effect string  // "effect", or which one of a train
	Cause  Cause   // why
	Field  string  // the quantity that shows it, by its field name
	Amount float64 // by how much, in Unit
	Unit   string  // SI unit of Amount; "K difference" for temperatures
	Detail string  // one sentence for a person, with the figures in SI
}

func (f *Infeasible) fault() {}

// Error words the fault.
func (f *Infeasible) Error() string { return f.Detail }

// NotConverged says that no answer was found although none of the bounds
// proves that there is none.
type NotConverged struct {
	Iterations int     // steps taken in all attempts
	Residual   float64 // worst scaled residual left
	Where      string  // the equation that it belongs to
}

func (f *NotConverged) fault() {}

// Error words the fault.
func (f *NotConverged) Error() string {
	return fmt.Sprintf("no answer after %d iterations: residual %.3g left in the %s", f.Iterations, f.Residual, f.Where)
}
