package train

import (
	"cmp"
	"math"
	"slices"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/numeric"
	"calandria.example/calandria/engine/quantity"
	"calandria.example/calandria/engine/steam"
)

const (
	tolerance     = 1e-11 // of an equation's own terms
	iterationsMax = 80    // of one Newton run
	singular      = 1e-11 // pivot ratio below which equations depend on each other
	startsLeast   = 2     // sets of first guesses tried for each block: from both ends
	startsMost    = 16    // tried while none has led to an answer
	branchesMax   = 4     // whole answers looked at
)

// Solve answers p. It refuses with *fault.Invalid or *fault.Range what can
// not be meant, with *fault.Specification too many or too few given numbers,
// with *fault.Infeasible what no plant can meet and with *fault.NotConverged
// what it could not decide. Errors may be joined. An answer closes its
// balances to 1e-9 and is physical.
func Solve(p Plant) (*Answer, error) {
	q, err := newQuestion(p)
	if err != nil {
		return nil, err
	}
	blocks, err := q.blocks()
	if err != nil {
		return nil, err
	}
	s := search{question: q, blocks: blocks, physical: true}
	s.from(0, q.value)
	if len(s.found) == 0 {
		return nil, s.refusal()
	}
	return q.choose(s.found)
}

// choose completes the states to answers and returns the one with the lowest
// product solids, then the lowest steam flow; the others are named in its
// advisories. A state at which the liquor's figures do not hold is no answer;
// if none is left, the first one's reason is returned.
func (q *question) choose(found []state) (*Answer, error) {
	const level = 1e-9 // kg/kg, below which solids are the same
	slices.SortStableFunc(found, func(a, b state) int {
		if math.Abs(a[SolidsOut]-b[SolidsOut]) > level {
			return cmp.Compare(a[SolidsOut], b[SolidsOut])
		}
		return cmp.Compare(a[SteamFlow], b[SteamFlow])
	})
	var chosen *Answer
	var refused error
	for i := range found {
		a, err := q.answer(&found[i])
		switch {
		case err != nil && refused == nil:
			refused = err
		case err != nil:
		case chosen == nil:
			chosen = a
		default:
			chosen.nameOther(a)
		}
	}
	if chosen == nil {
		return nil, refused
	}
	return chosen, nil
}

// search walks the blocks of a question. Where a block has two roots both are
// followed to the end.
type search struct {
	question *question
	blocks   []block
	physical bool    // keep to what is physically possible
	found    []state // whole answers
	dead     []state // states at which a walk ended

	iterations int     // of all Newton runs
	residual   float64 // least of the worst residuals of failed runs
	where      relation
	rows       [][]float64
	memory     []float64
	dependent  *fault.Specification // set when the numbers given turned out to leave some open
}

// bounds are those of a number, and of solids that the liquor's figures reach
// while the search keeps to what is possible.
func (s *search) bounds(n Number) (low, high float64) {
	low, high = bounds(n)
	if s.physical && (n == SolidsOut || n == ProductSolids || n == FeedSolids) {
		high = s.question.liquor.Strongest()
	}
	return low, high
}

func (s *search) from(i int, v state) {
	if len(s.found) >= branchesMax {
		return
	}
	if i == len(s.blocks) {
		if s.physical && unphysical(&v, s.question) != nil {
			s.dead = append(s.dead, v)
			return
		}
		s.found = append(s.found, v)
		return
	}
	b := &s.blocks[i]
	roots := s.roots(b, v)
	if len(roots) == 0 {
		s.dead = append(s.dead, v)
	}
	for r := range roots {
		s.from(i+1, roots[r])
	}
}

// roots solves one block. A single curved equation is searched along its whole
// range; anything else is approached from both ends of what is possible, and
// from between while that leads nowhere.
func (s *search) roots(b *block, v state) []state {
	if s.sizeless(b, v) {
		s.dependent = &fault.Specification{Missing: 1, Closers: s.question.paths(b)}
		return nil
	}
	if len(b.numbers) == 1 {
		if root, done := s.direct(b, v); done {
			return root
		}
		if !b.plain() {
			if roots := s.scan(b, v); len(roots) > 0 {
				return roots
			}
		}
	}
	var roots []state
	for attempt := range startsMost {
		if attempt >= startsLeast && len(roots) > 0 {
			break
		}
		root := v
		s.guess(b, attempt, &root)
		if !s.newton(b, &root) {
			continue
		}
		isNew := true
		for r := range roots {
			isNew = isNew && !same(b, &roots[r], &root)
		}
		if isNew {
			roots = append(roots, root)
		}
		if b.plain() {
			break
		}
	}
	return roots
}

// direct solves a single equation that its number stands in to the first power,
// or that is the saturation line. done is false for any other.
func (s *search) direct(b *block, v state) (root []state, done bool) {
	n, e := b.numbers[0], b.equations[0]
	switch {
	case e.relation == vapourPressure || e.relation == steamPressure:
		if details[n].kind == pressure {
			p, err := steam.SaturationPressure(quantity.Temperature(v[e.in[1]]))
			if err != nil {
				return nil, true
			}
			v[n] = float64(p)
		} else {
			t, err := steam.SaturationTemperature(quantity.Pressure(v[e.in[0]]))
			if err != nil {
				return nil, true
			}
			v[n] = float64(t)
		}
	case e.relation.straightIn(n):
		var d gradient
		s.guess(b, 0, &v)
		miss, size, err := residual(e.relation, s.question.liquor, &v, &d)
		if err != nil || !(math.Abs(d[n])*reach(n, &v) > singular*size) {
			return nil, false
		}
		v[n] -= miss / d[n]
	default:
		return nil, false
	}
	if low, high := s.bounds(n); s.physical && !(v[n] >= low-1e-9*math.Abs(low) && v[n] <= high) {
		return nil, true
	}
	return []state{v}, true
}

// straightIn tells whether n stands in the relation to the first power only.
func (r relation) straightIn(n Number) bool {
	switch r {
	case energyBalance:
		return n == FeedFlow || n == VapourFlow || n == Duty || n == HeatLoss
	case chestBalance:
		return n == SteamFlow || n == Duty || n == Vent || n == Dryness
	case rateEquation:
		return n == Duty || n == Area || n == drivingForce
	case boilingEquilibrium:
		return n == BoilingTemperature
	case temperatureDifference:
		return n == drivingForce
	case feedVolume, productVolume:
		return n == FeedVolumeFlow || n == ProductVolumeFlow || n == FeedFlow || n == ProductFlow
	case vapourPressure, steamPressure:
		return false
	}
	return true
}

// scan finds the roots of a single equation between the bounds of its number:
// by sign changes on a grid, each narrowed by bisection and finished by
// Newton.
func (s *search) scan(b *block, v state) []state {
	const (
		cells      = 60
		bisections = 30
	)
	n := b.numbers[0]
	low, high := s.bounds(n)
	var d gradient
	at := func(x float64) float64 {
		w := v
		w[n] = x
		miss, _, err := residual(b.equations[0].relation, s.question.liquor, &w, &d)
		if err != nil {
			return math.NaN()
		}
		return miss
	}
	// Pressures span decades; temperatures and fractions do not.
	place := func(i int) float64 {
		f := float64(i) / cells
		if details[n].kind == pressure {
			return low * math.Pow(high/low, f)
		}
		return low + (high-low)*f
	}
	var roots []state
	left, before := place(0), at(place(0))
	for i := 1; i <= cells; i++ {
		right, after := place(i), at(place(i))
		if before*after <= 0 && (before != 0 || i == 1) {
			a, c, fa := left, right, before
			for range bisections {
				middle := (a + c) / 2
				if f := at(middle); f*fa > 0 {
					a, fa = middle, f
				} else {
					c = middle
				}
			}
			root := v
			root[n] = (a + c) / 2
			if s.newton(b, &root) && (len(roots) == 0 || !same(b, &roots[len(roots)-1], &root)) {
				roots = append(roots, root)
			}
		}
		left, before = right, after
	}
	return roots
}

// plain reports whether a block has one root at most: a single equation that
// is linear in its number, or a balance of flows.
func (b *block) plain() bool {
	for _, n := range b.numbers {
		switch details[n].kind {
		case fraction, temperature, pressure:
			return false
		}
	}
	return len(b.numbers) == 1
}

func same(b *block, a, c *state) bool {
	for _, n := range b.numbers {
		if math.Abs(a[n]-c[n]) > 1e-6*(math.Abs(a[n])+math.Abs(c[n])+1e-9) {
			return false
		}
	}
	return true
}

// newton solves one block from the values in v. It keeps every number inside
// of what its properties allow, and if the search is physical, inside of what
// is possible at all.
func (s *search) newton(b *block, v *state) bool {
	jacobian, step, sizes := s.room(len(b.numbers))
	worst, where, err := s.evaluate(b, v, jacobian, step, sizes)
	if err != nil {
		return false
	}
	polished := false
	for range iterationsMax {
		s.iterations++
		if worst <= tolerance {
			if polished {
				break
			}
			// One more step costs little and takes the rest of the error.
			polished = true
		}
		ratio := numeric.Solve(jacobian, step)
		if !(ratio > singular) {
			if worst <= tolerance {
				s.dependent = &fault.Specification{Missing: 1, Closers: s.question.paths(b)}
			}
			return s.fail(worst, where)
		}
		next, ok := s.advance(b, v, step, sizes, worst)
		if !ok {
			if worst <= tolerance {
				break
			}
			return s.fail(worst, where)
		}
		*v = next
		worst, where, err = s.evaluate(b, v, jacobian, step, sizes)
		if err != nil {
			return false
		}
	}
	if !(worst <= tolerance) {
		return s.fail(worst, where)
	}
	return true
}

// room returns the memory of one Newton run, the same for all of a search.
func (s *search) room(n int) (jacobian [][]float64, step, sizes []float64) {
	if len(s.rows) < n {
		s.rows, s.memory = make([][]float64, n), make([]float64, n*n+2*n)
	}
	for i := range n {
		s.rows[i] = s.memory[i*n : (i+1)*n]
	}
	return s.rows[:n], s.memory[n*n : n*n+n], s.memory[n*n+n : n*n+2*n]
}

func (s *search) fail(worst float64, where relation) bool {
	if s.residual == 0 || worst < s.residual {
		s.residual, s.where = worst, where
	}
	return false
}

func (q *question) paths(b *block) []string {
	var paths []string
	for _, n := range b.numbers {
		if n != drivingForce {
			paths = append(paths, n.Path())
		}
	}
	return paths
}

// evaluate fills the scaled Jacobian and the scaled negative residuals of a
// block. Columns are scaled by how far a number is expected to move.
func (s *search) evaluate(b *block, v *state, jacobian [][]float64, step, sizes []float64) (worst float64, where relation, err error) {
	var d gradient
	for i := range b.equations {
		miss, size, err := residual(b.equations[i].relation, s.question.liquor, v, &d)
		if err != nil {
			return 0, 0, err
		}
		if size == 0 {
			size = 1
		}
		sizes[i] = size
		step[i] = -miss / size
		if r := math.Abs(step[i]); !(r <= worst) {
			worst, where = r, b.equations[i].relation
		}
		for j, n := range b.numbers {
			jacobian[i][j] = d[n] * reach(n, v) / size
		}
	}
	return worst, where, nil
}

// reach is a typical change of a number, to scale steps and columns by.
func reach(n Number, v *state) float64 {
	switch details[n].kind {
	case temperature, difference:
		return 10
	case fraction:
		return 0.1
	case resistance:
		return 1e-3
	case length:
		return 1
	default:
		return math.Max(math.Abs(v[n]), 1e-9)
	}
}

// advance takes as much of a Newton step as bounds and descent allow.
func (s *search) advance(b *block, v *state, step, sizes []float64, worst float64) (next state, ok bool) {
	const (
		farthest = 3   // typical changes in one step, for numbers that properties depend on
		toBound  = 0.9 // of the way to a bound
		halvings = 30
	)
	length := 1.0
	for j, n := range b.numbers {
		change := step[j] * reach(n, v)
		if math.IsNaN(change) || math.IsInf(change, 0) {
			return next, false
		}
		k := details[n].kind
		if k == temperature || k == fraction {
			if far := math.Abs(step[j]); far > farthest {
				length = math.Min(length, farthest/far)
			}
		}
		if !s.physical && k != temperature && k != pressure && n != SolidsOut && n != FeedSolids {
			continue
		}
		low, high := s.bounds(n)
		if change < 0 && v[n]+change*length < low {
			length = math.Min(length, toBound*(v[n]-low)/-change)
		}
		if change > 0 && v[n]+change*length > high {
			length = math.Min(length, toBound*(high-v[n])/change)
		}
	}
	var d gradient
	for range halvings {
		next = *v
		for j, n := range b.numbers {
			next[n] = v[n] + length*step[j]*reach(n, v)
		}
		largest, valid := 0.0, true
		for i := range b.equations {
			miss, _, err := residual(b.equations[i].relation, s.question.liquor, &next, &d)
			if err != nil {
				valid = false
				break
			}
			largest = math.Max(largest, math.Abs(miss)/sizes[i])
		}
		if valid && (largest < worst*(1-1e-4*length) || largest <= tolerance/10) {
			return next, true
		}
		length /= 2
	}
	return next, false
}
