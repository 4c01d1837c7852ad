package train

import (
	"math"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/numeric"
)

// Sensitivity is how much a number that was solved for moves with one that was
// fixed, all others held: d(Of)/d(By), in SI units.
type Sensitivity struct {
	Of, By Number
	Value  float64
}

// Check is what a question is about before it is solved.
type Check struct {
	Unknowns []Number // what would be solved for
	Defaults []Given  // what takes its default
}

// CheckQuestion looks at the structure of p and solves nothing. It refuses what
// Solve would refuse for the numbers given, too many or too few of them.
func CheckQuestion(p Plant) (Check, error) {
	q, err := newQuestion(p)
	if err != nil {
		return Check{}, err
	}
	c := Check{}
	for n := range numbers {
		switch {
		case q.byDefault[n]:
			c.Defaults = append(c.Defaults, Given{n, q.value[n]})
		case !q.fixed[n]:
			c.Unknowns = append(c.Unknowns, n)
		}
	}
	if q.levelByDefault() {
		c.Defaults = append(c.Defaults, Given{LiquorLevel, 0})
	}
	if !q.fixed[LiquorLevel] {
		c.Unknowns = append(c.Unknowns, LiquorLevel)
	}
	_, err = q.blocks()
	return c, err
}

// Sensitivities returns how the numbers of move with every number that p fixes
// or leaves at its default, at the answer a of p: exactly, from the derivatives
// of all equations there. A number of that was fixed itself is refused with
// *fault.Invalid; an answer at which the equations depend on each other with
// *fault.NotConverged.
func Sensitivities(p Plant, a *Answer, of []Number) ([]Sensitivity, error) {
	q, err := newQuestion(p)
	if err != nil {
		return nil, err
	}
	var v state
	copy(v[:], a.Value[:])
	for n := numbers; n < unknowns; n++ {
		v[n] = a.At(n)
		if q.absent[n] {
			v[n] = math.NaN()
		}
	}
	var open, fixed []Number
	place := [unknowns]int{}
	for n := range unknowns {
		switch {
		case q.absent[n]:
		case q.fixed[n]:
			fixed = append(fixed, n)
		default:
			place[n] = len(open)
			open = append(open, n)
		}
	}
	for _, n := range of {
		if q.absent[n] {
			return nil, &fault.Invalid{Field: n.Path(), Value: "not a part of this plant", Limit: "a number that is solved for", WayOut: "give a number of that part, or leave it out"}
		}
		if q.fixed[n] {
			return nil, &fault.Invalid{Field: n.Path(), Value: "given", Limit: "a number that is solved for", WayOut: "ask for the sensitivities of what the question leaves out"}
		}
	}
	slopes := make([]gradient, len(q.equations))
	sizes := make([]float64, len(q.equations))
	for i, e := range q.equations {
		_, size, err := residual(e.relation, q.liquor, &v, &slopes[i])
		if err != nil {
			return nil, err
		}
		sizes[i] = math.Max(size, math.SmallestNonzeroFloat64)
	}
	var list []Sensitivity
	s := search{}
	for _, by := range fixed {
		jacobian, step, _ := s.room(len(open))
		for i := range q.equations {
			step[i] = -slopes[i][by] / sizes[i]
			for j, n := range open {
				jacobian[i][j] = slopes[i][n] * reach(n, &v) / sizes[i]
			}
		}
		if ratio := numeric.Solve(jacobian, step); !(ratio > singular) {
			return nil, &fault.NotConverged{Residual: ratio, Where: "rank of the equations at the answer"}
		}
		for _, n := range of {
			list = append(list, Sensitivity{n, by, step[place[n]] * reach(n, &v)})
		}
	}
	return list, nil
}
