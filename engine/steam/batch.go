package steam

import "calandria.example/calandria/engine/quantity"

// Enthalpies writes the specific enthalpy at each p and t into h, as Enthalpy
// does one by one and with the same digits, but faster: several points at a
// time where the machine can. The three have the same length. It returns how
// many it wrote, from the first; if it stops before the end, err says why the
// next one has no answer.
func Enthalpies(h []quantity.Enthalpy, p []quantity.Pressure, t []quantity.Temperature) (n int, err error) {
	for n < len(h) {
		end := min(n+blockLength, len(h))
		done, err := enthalpyBlock(h[n:end], p[n:end], t[n:end])
		if n += done; err != nil {
			return n, err
		}
	}
	return n, nil
}

// blockLength is how many points are sorted by region at a time.
const blockLength = 256

// sorted are the points of a block that lie in one region.
type sorted struct {
	p, t, h [blockLength + lanesWidth]float64
	place   [blockLength]uint8
	count   int
}

func (s *sorted) put(p, t float64, place int) {
	s.p[s.count], s.t[s.count], s.place[s.count] = p, t, uint8(place)
	s.count++
}

// whole fills up to a whole number of lanes, and returns how many points that
// makes.
func (s *sorted) whole() int {
	end := (s.count + lanesWidth - 1) / lanesWidth * lanesWidth
	for i := s.count; i < end; i++ {
		s.p[i], s.t[i] = s.p[0], s.t[0]
	}
	return end
}

func (s *sorted) spread(h []quantity.Enthalpy) {
	for i, place := range s.place[:s.count] {
		h[place] = quantity.Enthalpy(s.h[i])
	}
}

// enthalpyBlock sorts the points into those clear of every boundary in regions
// 1 and 2, which go several at a time, and the rest.
func enthalpyBlock(h []quantity.Enthalpy, p []quantity.Pressure, t []quantity.Temperature) (n int, err error) {
	var one, two sorted
	for n = range h {
		switch clearRegion(float64(p[n]), float64(t[n])) {
		case 1:
			one.put(float64(p[n]), float64(t[n]), n)
		case 2:
			two.put(float64(p[n]), float64(t[n]), n)
		default:
			h[n], err = Enthalpy(p[n], t[n])
		}
		if err != nil {
			break
		}
	}
	if err == nil {
		n = len(h)
	}
	region1Enthalpies(&one)
	region2Enthalpies(&two)
	one.spread(h)
	two.spread(h)
	return n, err
}

// oneByOne is the form for machines without lanes.
func oneByOne(s *sorted, enthalpy func(p, t float64) float64) {
	for i := range s.count {
		s.h[i] = enthalpy(s.p[i], s.t[i])
	}
}
