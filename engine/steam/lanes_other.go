//go:build !amd64

package steam

// lanesWidth is how many points a kernel takes at a time.
const lanesWidth = 1

func region1Enthalpies(s *sorted) { oneByOne(s, region1Enthalpy) }
func region2Enthalpies(s *sorted) { oneByOne(s, region2Enthalpy) }
