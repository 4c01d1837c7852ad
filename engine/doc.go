// Package engine holds the version of the calculation engine; the engine
// itself is the packages below it, each named for a part of an evaporation
// plant or for the physics of one:
//
//	quantity   typed SI quantities
//	fault      the closed set of errors that the engine returns
//	numeric    linear algebra, matching and Newton's method
//	steam      water and steam, IAPWS R7-97(2012)
//	liquor     what is being concentrated: boiling-point rise and enthalpy
//	train      the plant: unknowns, equations, specification, solution
//	vetting    published check values that the engine recomputes anywhere
//
// Everything below is pure: no input or output, no logging, no clock, no
// goroutine, no global state that changes. All of it is safe for concurrent
// use and computes in SI units.
package engine

// Version names this engine in every answer. It changes whenever any number
// that the engine returns may change.
const Version = "0.1.0"
