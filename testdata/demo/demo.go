// Package demo carries the demo scenario into the server's binary.
package demo

import _ "embed" // the scenario

// Syrup is one effect of a syrup works that exists nowhere, asked three
// questions: requests to SolveEffect, with words for people.
//
//go:embed syrup.json
var Syrup []byte
