package train

import (
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/numeric"
)

// block is a group of equations that must be solved together, with the
// numbers that they determine.
type block struct {
	equations []equation
	numbers   []Number
}

// graph is the bipartite graph between the equations and the numbers that
// fixed leaves open. column tells which number a column is.
func (q *question) graph(fixed *[unknowns]bool) (g numeric.Graph, column []Number) {
	var index [unknowns]int
	column = make([]Number, 0, unknowns)
	for n := range unknowns {
		index[n] = -1
		if !fixed[n] {
			index[n] = len(column)
			column = append(column, n)
		}
	}
	g.Columns = len(column)
	g.Rows = make([][]int, len(q.equations))
	places := make([]int, 0, 6*len(q.equations))
	for i, e := range q.equations {
		first := len(places)
		for _, n := range e.in {
			if index[n] >= 0 {
				places = append(places, index[n])
			}
		}
		g.Rows[i] = places[first:len(places):len(places)]
	}
	return g, column
}

// overdetermined reports whether some equations have no number left to
// determine when the numbers marked in fixed are known.
func (q *question) overdetermined(fixed *[unknowns]bool) bool {
	g, _ := q.graph(fixed)
	rows, _ := g.Match().Unmatched()
	return rows > 0
}

// blocks splits the question into groups that are solved one after the other,
// or says what is too much or too little.
func (q *question) blocks() ([]block, error) {
	g, column := q.graph(&q.fixed)
	m := g.Match()
	rows, columns := m.Unmatched()
	if rows > 0 {
		return nil, &fault.Specification{Over: true, Conflict: q.conflict()}
	}
	if columns > 0 {
		return nil, &fault.Specification{Missing: columns, Closers: q.closers(g, m, column)}
	}
	if !q.sized() {
		return nil, &fault.Specification{Missing: 1, Closers: sizes()}
	}
	groups := g.Blocks(m)
	blocks := make([]block, len(groups))
	equations, numbers := make([]equation, 0, len(q.equations)), make([]Number, 0, len(q.equations))
	for i, group := range groups {
		first := len(numbers)
		for _, row := range group {
			equations = append(equations, q.equations[row])
			numbers = append(numbers, column[m.Column[row]])
		}
		blocks[i] = block{equations[first:len(numbers):len(numbers)], numbers[first:len(numbers):len(numbers)]}
	}
	return blocks, nil
}

// extensive are the numbers that grow with the plant. The equations hold for
// a plant of any size, so one of these must be given: structure alone does not
// see that.
var extensive = [...]Number{FeedFlow, ProductFlow, SteamFlow, Area, VapourFlow, Duty, Evaporation, FeedVolumeFlow, ProductVolumeFlow, Circulation}

func (q *question) sized() bool {
	for _, n := range extensive {
		if q.fixed[n] && !q.absent[n] {
			return true
		}
	}
	return false
}

// sizeless reports whether a block holds nothing that tells how large the plant
// is: its numbers all grow with the plant, and with all of them at nothing its
// equations are met.
func (s *search) sizeless(b *block, v state) bool {
	var d gradient
	for _, n := range b.numbers {
		grows := false
		for _, m := range extensive {
			grows = grows || n == m
		}
		if !grows {
			return false
		}
		v[n] = 0
	}
	for i := range b.equations {
		miss, _, err := residual(b.equations[i].relation, s.question.liquor, &v, &d)
		if err != nil || miss != 0 {
			return false
		}
	}
	return true
}

func sizes() []string {
	var paths []string
	for _, n := range extensive {
		if n < numbers {
			paths = append(paths, n.Path())
		}
	}
	return paths
}

// conflict returns an irreducible set of given fields that contradict or
// repeat each other: each is dropped in turn and stays dropped if the rest
// still conflicts. Defaults are not the caller's words and stay.
func (q *question) conflict() []string {
	fixed := q.fixed
	for n := range unknowns {
		if !fixed[n] || q.byDefault[n] || q.absent[n] {
			continue
		}
		fixed[n] = false
		if !q.overdetermined(&fixed) {
			fixed[n] = true
		}
	}
	var paths []string
	for n := range unknowns {
		if fixed[n] && !q.byDefault[n] && !q.absent[n] {
			paths = append(paths, n.Path())
		}
	}
	return paths
}

// closers returns the fields of which any one closes a gap: those of the
// under-determined part that can be fixed without a conflict.
func (q *question) closers(g numeric.Graph, m numeric.Matching, column []Number) []string {
	under := g.Under(m)
	var paths []string
	for c, n := range column {
		if !under[c] || n == drivingForce {
			continue
		}
		fixed := q.fixed
		fixed[n] = true
		if !q.overdetermined(&fixed) {
			paths = append(paths, n.Path())
		}
	}
	return paths
}
