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
	weighted // a * b + c, rounded twice
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
	steps       []step
	depth       []int // of the longest chain of steps that leads to a value
	known       map[step]int
	reciprocals map[int]int // of bases whose reciprocal costs less than a division
	results     []int
}

func newFormula() *formula {
	return &formula{known: map[step]int{}, reciprocals: map[int]int{}}
}

func (f *formula) put(s step) int {
	if at, ok := f.known[s]; ok {
		return at
	}
	depth := 0
	if s.operation != input && s.operation != constant {
		const division = 3 // as slow as so many other steps
		depth = max(f.depth[s.a], f.depth[s.b], f.depth[s.c]) + 1
		if s.operation == divide {
			depth += division
		}
	}
	f.steps = append(f.steps, s)
	f.depth = append(f.depth, depth)
	f.known[s] = len(f.steps) - 1
	return len(f.steps) - 1
}

func (f *formula) input(name string) int  { return f.put(step{operation: input, name: name}) }
func (f *formula) constant(v float64) int { return f.put(step{operation: constant, number: v}) }
func (f *formula) add(a, b int) int       { return f.put(step{operation: add, a: a, b: b}) }
func (f *formula) subtract(a, b int) int  { return f.put(step{operation: subtract, a: a, b: b}) }
func (f *formula) multiply(a, b int) int  { return f.put(step{operation: multiply, a: a, b: b}) }
func (f *formula) divide(a, b int) int    { return f.put(step{operation: divide, a: a, b: b}) }
func (f *formula) weighted(a, b, c int) int {
	return f.put(step{operation: weighted, a: a, b: b, c: c})
}
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
		var known bool
		if p.reciprocal, known = p.f.reciprocals[p.base]; !known {
			p.reciprocal = p.f.divide(p.f.constant(1), p.base)
		}
		p.down[1] = p.reciprocal
	}
	return p.chain(p.down, -n)
}

// chain makes the n-th power from those that are there: by one multiplication
// if two of them add up to n, and then by those two that are ready first.
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
	most, soonest := have[len(have)-1], -1
	for _, m := range have {
		if other, ok := there[n-m]; ok {
			if ready := max(p.f.depth[there[m]], p.f.depth[other]); soonest < 0 || ready < soonest {
				most, soonest = m, ready
			}
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
	return f.sumFrom(least, terms, x, y, orders)
}

// reduced is sum with every derivative multiplied by its bases, as often as it
// is derived by them: x^2 y (d3/dx2dy), which takes no division.
func (f *formula) reduced(terms []release.Term, x, y int, orders ...order) []int {
	return f.sumFrom(order{}, terms, x, y, orders)
}

// sumFrom adds up the powers that are left after deriving least times, and
// divides by the bases for every order beyond, unless least is none.
func (f *formula) sumFrom(least order, terms []release.Term, x, y int, orders []order) []int {
	divide := least != order{}
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
		if divide && o.x > least.x {
			needed = append(slices.Clone(needed), -1)
		}
		if divide && o.y > least.y {
			atY = append(atY, -1)
		}
	}
	px, py := f.powers(x, needed), f.powers(y, atY)
	results := make([]int, len(orders))
	for k, o := range orders {
		var t totals
		for _, i := range atX {
			weight := falling(i, o.x)
			inner := f.inner(terms, i, o.y, least.y, py)
			if weight == 0 || inner < 0 {
				continue
			}
			switch n := i - least.x; {
			case n != 0 && weight != 1:
				t.weighted(f, f.scaled(weight, px.at(n)), inner)
			case n != 0:
				t.weighted(f, px.at(n), inner)
			case weight != 1:
				t.weighted(f, f.constant(weight), inner)
			default:
				t.add(f, inner)
			}
		}
		total := t.whole(f)
		if total < 0 {
			panic(fmt.Sprintf("a derivative of order %v is 0 throughout", o))
		}
		if divide {
			for range o.x - least.x {
				total = f.multiply(total, px.at(-1))
			}
			for range o.y - least.y {
				total = f.multiply(total, py.at(-1))
			}
		}
		results[k] = total
	}
	return results
}

// inner adds up in y the terms with x^i; -1 if all of them vanish.
func (f *formula) inner(terms []release.Term, i, orderY, leastY int, py *powers) int {
	var t totals
	for _, c := range terms {
		weight := c.N * falling(c.J, orderY)
		if c.I != i || weight == 0 {
			continue
		}
		if n := c.J - leastY; n == 0 {
			t.add(f, f.constant(weight))
		} else {
			t.weighted(f, f.constant(weight), py.at(n))
		}
	}
	return t.whole(f)
}

// totals adds up in two chains in turn, since one would wait for itself.
type totals struct {
	chains []int
	next   int
}

const chains = 2

func (t *totals) weighted(f *formula, a, b int) {
	if len(t.chains) < chains {
		t.chains = append(t.chains, f.multiply(a, b))
		return
	}
	t.chains[t.next] = f.weighted(a, b, t.chains[t.next])
	t.next = (t.next + 1) % chains
}

func (t *totals) add(f *formula, a int) {
	if len(t.chains) < chains {
		t.chains = append(t.chains, a)
		return
	}
	t.chains[t.next] = f.add(t.chains[t.next], a)
	t.next = (t.next + 1) % chains
}

// whole is the sum of the chains; -1 if nothing was added.
func (t *totals) whole(f *formula) int {
	if len(t.chains) == 0 {
		return -1
	}
	total := t.chains[0]
	for _, c := range t.chains[1:] {
		total = f.add(total, c)
	}
	return total
}
