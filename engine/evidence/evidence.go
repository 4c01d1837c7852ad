// Package evidence holds what a result says about itself: the models that it
// rests on, and remarks for the person who uses it.
package evidence

// Grade says how well a model is confirmed.
type Grade int

// The grades, from the best.
const (
	Confirmed      Grade = iota + 1 // a standard, or confirmed by independent figures
	Approximate                     // usable, with a known spread
	Doubtful                        // not confirmed by anything independent
	CallerSupplied                  // the caller's own figures
)

// Model is a published model, or a caller's own figures, that a result rests
// on.
type Model struct {
	ID         string // identifier in this engine
	Revision   string // revision of the source
	Source     string // the source, for a person
	ValidRange string // where it holds, for a person
	Grade      Grade  // how well it is confirmed
	Inside     bool   // whether every use in the result lay inside ValidRange
}

// Code names what an advisory is about.
type Code int

// The codes.
const (
	OutsideRange       Code = iota + 1 // a model was extended a little beyond its range
	NoHeatOfDilution                   // the liquor's heat of dilution is not in its figures
	SecondAnswer                       // another physical answer exists
	HeldBeyondStrength                 // figures used at a strength other than their own
	FeedFlashes                        // the feed enters hotter than it boils
	SmallDrivingForce                  // the area is very sensitive to any temperature
	BoundaryJump                       // a state between two regions of the steam formulation
	Crystallisation                    // solids above what dissolves
)

// Advisory is a remark on a result that stands.
type Advisory struct {
	Code    Code
	Warning bool   // an engineer should look before the result is used; else good to know
	Field   string // path of the field that it is about, "" for the whole
	Message string // for a person, in practical units
	Limit   string // the limit that it refers to, "" if none
}
