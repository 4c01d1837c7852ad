package main

import (
	"bytes"
	"fmt"
	"math"

	"calandria.example/calandria/engine/steam/release"
)

// The table of starting densities of region 3 has two sides, which meet at the
// saturation line and, above the critical temperature, at its tangent. Along
// the temperature it has cells below and above the critical temperature; across,
// cells in the root of the distance from the line, up to 100 MPa on the dense
// side and down to the boundary with region 2 on the other.
const (
	below, above = 8, 40
	across       = 24

	critical  = 647.096
	coldest3  = 623.15
	hottest3  = 863.15
	highest   = 100e6
	lineEnd   = 22.064e6   // Pa at the critical temperature
	lineSlope = 0.2683e6   // Pa/K there, from Eq. 30
	narrow    = 1e-3 * 1e6 // Pa: less is no width
)

func startTable(code *bytes.Buffer) {
	fmt.Fprintf(code, "\n// Cells of startDensity, and the line that goes on from the saturation line.\nconst (\nstartBelow, startAbove, startAcross = %d, %d, %d\nlineEnd, lineSlope, lineNarrow = %s, %s, %s\n)\n", below, above, across, number(lineEnd), number(lineSlope), number(narrow))
	code.WriteString("\n// startDensity holds densities of region 3 in kg/m3 to start from, of the dense\n// side first, by temperature, then by the root of the distance from the line.\nvar startDensity = [2][startBelow+startAbove+1][startAcross+1]float32{\n")
	for _, dense := range []bool{true, false} {
		code.WriteString("{\n")
		for i := range below + above + 1 {
			t := coldest3 + (critical-coldest3)*float64(i)/below
			if i > below {
				t = critical + (hottest3-critical)*float64(i-below)/above
			}
			code.WriteString("{")
			for j := range across + 1 {
				root := float64(j) / across
				line := linePressure(t)
				width := highest - line
				if !dense {
					width = min(boundary23(t)-line, -narrow)
				}
				fmt.Fprintf(code, "%.7g,", density(line+width*root*root, t, dense))
			}
			code.WriteString("},\n")
		}
		code.WriteString("},\n")
	}
	code.WriteString("}\n")
}

// linePressures are the pressures of the saturation line at every kelvin, by
// which most states are told liquid or vapour without Eq. 30.
func linePressures(code *bytes.Buffer) {
	const coldest, kelvins = 273.15, 350
	fmt.Fprintf(code, "\n// linePressure is Eq. 30 of IAPWS R7-97(2012) in Pa at 273.15 K and every kelvin from there.\nvar linePressure = [%d]float64{", kelvins+1)
	for i := range kelvins + 1 {
		if i%8 == 0 {
			code.WriteString("\n")
		}
		fmt.Fprintf(code, "%s, ", number(linePressure(coldest+float64(i))))
	}
	code.WriteString("\n}\n")
}

// linePressure is Eq. 30 of IAPWS R7-97(2012) and, above the critical
// temperature, its tangent.
func linePressure(t float64) float64 {
	if t >= critical {
		return lineEnd + lineSlope*(t-critical)
	}
	n := release.Saturation
	theta := t + n[8]/(t-n[9])
	a := theta*theta + n[0]*theta + n[1]
	b := n[2]*theta*theta + n[3]*theta + n[4]
	c := n[5]*theta*theta + n[6]*theta + n[7]
	return math.Pow(2*c/(-b+math.Sqrt(b*b-4*a*c)), 4) * 1e6
}

func boundary23(t float64) float64 {
	n := release.Boundary23
	return (n[0] + n[1]*t + n[2]*t*t) * 1e6
}

// density solves Eq. 28 for the density at p and t by walking in from the
// dense or from the thin end and halving, which finds the root on that side.
func density(p, t float64, dense bool) float64 {
	pressure := func(rho float64) float64 {
		delta := rho / density3
		s := release.At(release.Region3, delta, temperature3/t)
		return rho * gas * t * (release.Region3Log + delta*s.ByX)
	}
	const thin, thick, step = 20.0, 900.0, 0.5
	low, high := thin, thick
	if dense {
		for low = thick; low > thin && pressure(low) > p; low -= step {
			high = low
		}
	} else {
		for high = thin; high < thick && pressure(high) < p; high += step {
			low = high
		}
	}
	for range 50 {
		if middle := (low + high) / 2; pressure(middle) > p {
			high = middle
		} else {
			low = middle
		}
	}
	return (low + high) / 2
}
