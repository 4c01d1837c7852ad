package steam

import "golang.org/x/sys/cpu"

// lanesWidth is how many points a kernel takes at a time.
const lanesWidth = 4

func region1Enthalpies(s *sorted) {
	if !cpu.X86.HasAVX {
		oneByOne(s, region1Enthalpy)
		return
	}
	region1EnthalpyLanes(&s.p[0], &s.t[0], &s.h[0], s.whole())
}

func region2Enthalpies(s *sorted) {
	if !cpu.X86.HasAVX {
		oneByOne(s, region2Enthalpy)
		return
	}
	region2EnthalpyLanes(&s.p[0], &s.t[0], &s.h[0], s.whole())
}
