package main

import (
	"fmt"
	"slices"

	"calandria.example/calandria/engine/steam/release"
)

// operation is what one step of a formula does.
type operation int

const (
	input operation = iota
	constant
	add      // a + b
	subtract // a - b
	multiply // a * b
	divide   // a / b
	fused    // a * b + c, rounded once
)

// step computes one value from values of earlier steps, which it names by
// their number.
type step struct {
	operation operation
	a, b, c   int
	number    float64 // of a constant
	name      string  // of an input
}

// formula is straight-line code. Equal steps are one step, so that powers are
// shared by all sums of a formula.
type formula struct {
	steps   []step
	known   map[step]int
	results []int
}

func newFormula() *formula { return &formula{known: map[step]int{}} }

func (f *formula) put(s step) int {
	if at, ok := f.known[s]; ok {
		return at
	}
	f.steps = append(f.steps, s)
	f.known[s] = len(f.steps) - 1
	return len(f.steps) - 1
}

func (f *formula) input(name string) int        { return f.put(step{operation: input, name: name}) }
func (f *formula) constant(v float64) int       { return f.put(step{operation: constant, number: v}) }
func (f *formula) add(a, b int) int             { return f.put(step{operation: add, a: a, b: b}) }
func (f *formula) subtract(a, b int) int        { return f.put(step{operation: subtract, a: a, b: b}) }
func (f *formula) multiply(a, b int) int        { return f.put(step{operation: multiply, a: a, b: b}) }
func (f *formula) divide(a, b int) int          { return f.put(step{operation: divide, a: a, b: b}) }
func (f *formula) fused(a, b, c int) int        { return f.put(step{operation: fused, a: a, b: b, c: c}) }
func (f *formula) scaled(by float64, a int) int { return f.multiply(f.constant(by), a) }

// powers makes the powers of one base, negative ones by its reciprocal. All
// that a formula needs are announced first, so that one leads to the next.
type powers struct {
	f          *formula
	base       int
	reciprocal int // -1 until needed
	up, down   map[int]int
}

func (f *formula) powers(base int, wanted []int) *powers {
	p := &powers{f: f, base: base, reciprocal: -1, up: map[int]int{1: base}, down: map[int]int{}}
	sorted := slices.Clone(wanted)
	slices.SortFunc(sorted, func(a, b int) int { return max(a, -a) - max(b, -b) })
	for _, n := range slices.Compact(sorted) {
		if n != 0 {
			p.at(n)
		}
	}
	return p
}

// at returns base^n for n other than 0.
func (p *powers) at(n int) int {
	if n > 0 {
		return p.chain(p.up, n)
	}
	if p.reciprocal < 0 {
		p.reciprocal = p.f.divide(p.f.constant(1), p.base)
		p.down[1] = p.reciprocal
	}
	return p.chain(p.down, -n)
}

// chain makes the n-th power from those that are there, by one multiplication
// if two of them add up to n.
func (p *powers) chain(there map[int]int, n int) int {
	if at, ok := there[n]; ok {
		return at
	}
	var have []int
	for m := range there {
		if m < n {
			have = append(have, m)
		}
	}
	slices.Sort(have)
	most := have[len(have)-1]
	for i := len(have) - 1; i >= 0; i-- {
		if _, ok := there[n-have[i]]; ok {
			most = have[i]
			break
		}
	}
	there[n] = p.f.multiply(there[most], p.chain(there, n-most))
	return there[n]
}

// order is the order of a derivative by the first and the second base.
type order struct{ x, y int }

// falling is n (n-1) ... of k factors: what k derivatives bring down.
func falling(n, k int) float64 {
	product := 1
	for i := range k {
		product *= n - i
	}
	return float64(product)
}

// sum adds up terms at x and y, and their derivatives, for every order asked
// for. Terms with the same power of x share one sum in y.
func (f *formula) sum(terms []release.Term, x, y int, orders ...order) []int {
	least := orders[0]
	for _, o := range orders {
		least.x, least.y = min(least.x, o.x), min(least.y, o.y)
	}
	var atX, atY []int // the powers of x, in their order, and those of y
	for _, c := range terms {
		if falling(c.I, least.x)*falling(c.J, least.y) == 0 {
			continue
		}
		if !slices.Contains(atX, c.I) {
			atX = append(atX, c.I)
		}
		atY = append(atY, c.J-least.y)
	}
	lowered := make([]int, len(atX))
	for i, n := range atX {
		lowered[i] = n - least.x
	}
	needed := lowered
	for _, o := range orders {
		if o.x > least.x {
			needed = append(slices.Clone(needed), -1)
		}
		if o.y > least.y {
			atY = append(atY, -1)
		}
	}
	px, py := f.powers(x, needed), f.powers(y, atY)
	results := make([]int, len(orders))
	for k, o := range orders {
		var totals [2]int // two chains, since one would wait for itself
		totals[0], totals[1] = -1, -1
		for g, i := range atX {
			weight := falling(i, o.x)
			if weight == 0 {
				continue
			}
			inner := f.inner(terms, i, o.y, least.y, py)
			if inner < 0 {
				continue
			}
			which := &totals[g%2]
			power := -1
			if n := i - least.x; n != 0 {
				power = px.at(n)
			}
			if weight != 1 {
				if power >= 0 {
					power = f.scaled(weight, power)
				} else {
					power = f.constant(weight)
				}
			}
			switch {
			case power < 0 && *which < 0:
				*which = inner
			case power < 0:
				*which = f.add(*which, inner)
			case *which < 0:
				*which = f.multiply(power, inner)
			default:
				*which = f.fused(power, inner, *which)
			}
		}
		total := totals[0]
		switch {
		case total < 0:
			total = totals[1]
		case totals[1] >= 0:
			total = f.add(total, totals[1])
		}
		if total < 0 {
			panic(fmt.Sprintf("a derivative of order %v is 0 throughout", o))
		}
		for range o.x - least.x {
			total = f.multiply(total, px.at(-1))
		}
		for range o.y - least.y {
			total = f.multiply(total, py.at(-1))
		}
		results[k] = total
	}
	return results
}

// inner adds up in y the terms with x^i; -1 if all of them vanish.
func (f *formula) inner(terms []release.Term, i, orderY, leastY int, py *powers) int {
	total := -1
	for _, c := range terms {
		weight := c.N * falling(c.J, orderY)
		if c.I != i || weight == 0 {
			continue
		}
		n := c.J - leastY
		switch {
		case n == 0 && total < 0:
			total = f.constant(weight)
		case n == 0:
			total = f.add(total, f.constant(weight))
		case total < 0:
			total = f.scaled(weight, py.at(n))
		default:
			total = f.fused(f.constant(weight), py.at(n), total)
		}
	}
	return total
}
