package numeric

import (
	"math"
	"math/rand/v2"
	"testing"
)

func TestSolve(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	for n := 1; n <= 12; n++ {
		for range 50 {
			a, kept := make([][]float64, n), make([][]float64, n)
			want, b := make([]float64, n), make([]float64, n)
			for i := range n {
				a[i], kept[i] = make([]float64, n), make([]float64, n)
				want[i] = r.NormFloat64()
				for j := range n {
					a[i][j] = r.NormFloat64() * math.Pow(10, float64(r.IntN(9)-4))
					kept[i][j] = a[i][j]
				}
			}
			for i := range n {
				for j := range n {
					b[i] += kept[i][j] * want[j]
				}
			}
			right := append([]float64(nil), b...)
			if ratio := Solve(a, b); !(ratio > 0) {
				t.Fatalf("ratio %g", ratio)
			}
			for i := range n {
				sum, size := 0.0, 0.0
				for j := range n {
					sum += kept[i][j] * b[j]
					size += math.Abs(kept[i][j] * b[j])
				}
				if math.Abs(sum-right[i]) > 1e-11*size {
					t.Errorf("n %d row %d: %g, want %g", n, i, sum, right[i])
				}
			}
		}
	}
	for _, c := range []struct {
		name string
		a    [][]float64
	}{
		{"zero row", [][]float64{{0, 0}, {1, 1}}},
		{"dependent", [][]float64{{1, 2}, {2, 4}}},
		{"NaN", [][]float64{{math.NaN(), 1}, {1, 1}}},
		{"infinite", [][]float64{{math.Inf(1), 1}, {1, 1}}},
	} {
		if ratio := Solve(c.a, []float64{1, 1}); ratio > 1e-12 {
			t.Errorf("%s: ratio %g", c.name, ratio)
		}
	}
}

// TestStructure looks at systems whose parts are known by inspection.
func TestStructure(t *testing.T) {
	// x0 alone, then x1 and x2 together, then x3 from x2.
	g := Graph{Columns: 4, Rows: [][]int{{2, 3}, {1, 2}, {0, 1, 2}, {0}}}
	m := g.Match()
	if rows, columns := m.Unmatched(); rows != 0 || columns != 0 {
		t.Fatalf("%d rows and %d columns unmatched", rows, columns)
	}
	blocks := g.Blocks(m)
	place := map[int]int{}
	for i, block := range blocks {
		for _, row := range block {
			place[row] = i
		}
	}
	if len(blocks) != 3 || place[1] != place[2] || place[3] > place[1] || place[1] > place[0] {
		t.Errorf("blocks %v", blocks)
	}
	// One equation for two unknowns, one unknown well determined apart.
	g = Graph{Columns: 3, Rows: [][]int{{0, 1}, {2}}}
	under := g.Under(g.Match())
	if !under[0] || !under[1] || under[2] {
		t.Errorf("under %v", under)
	}
	// Two equations for one unknown.
	g = Graph{Columns: 1, Rows: [][]int{{0}, {0}}}
	if rows, _ := g.Match().Unmatched(); rows != 1 {
		t.Errorf("%d rows unmatched", rows)
	}
}

// TestMatchIsGreatest compares with brute force on small random graphs.
func TestMatchIsGreatest(t *testing.T) {
	r := rand.New(rand.NewPCG(9, 10))
	var best func(g Graph, row int, used uint) int
	best = func(g Graph, row int, used uint) int {
		if row == len(g.Rows) {
			return 0
		}
		most := best(g, row+1, used)
		for _, c := range g.Rows[row] {
			if used&(1<<c) == 0 {
				most = max(most, 1+best(g, row+1, used|1<<c))
			}
		}
		return most
	}
	for range 500 {
		g := Graph{Columns: 1 + r.IntN(5), Rows: make([][]int, 1+r.IntN(5))}
		for i := range g.Rows {
			for c := range g.Columns {
				if r.IntN(3) == 0 {
					g.Rows[i] = append(g.Rows[i], c)
				}
			}
		}
		rows, _ := g.Match().Unmatched()
		if got, want := len(g.Rows)-rows, best(g, 0, 0); got != want {
			t.Errorf("%v: matched %d, want %d", g.Rows, got, want)
		}
	}
}

// TestCurve: through its points, smooth, and never beyond its neighbours
// where the data rise or fall (Fritsch and Butland).
func TestCurve(t *testing.T) {
	x, y := []float64{0, 1, 1.5, 4, 5}, []float64{0, 0.1, 3, 3.1, 7}
	c := NewCurve(x, y)
	for i := range x {
		if got, _ := c.At(x[i]); math.Abs(got-y[i]) > 1e-14 {
			t.Errorf("at %g: %g, want %g", x[i], got, y[i])
		}
	}
	before := math.Inf(-1)
	for p := -1.0; p < 6; p += 0.003 {
		height, slope := c.At(p)
		if height < before {
			t.Errorf("falls at %g", p)
		}
		before = height
		const d = 1e-6
		up, _ := c.At(p + d)
		down, _ := c.At(p - d)
		if difference := (up - down) / (2 * d); math.Abs(difference-slope) > 1e-4*(1+math.Abs(slope)) {
			t.Errorf("slope at %g is %g, by differences %g", p, slope, difference)
		}
	}
	if height, slope := NewCurve([]float64{3}, []float64{8}).At(100); height != 8 || slope != 0 {
		t.Errorf("a single point: %g %g", height, slope)
	}
}

func TestPolynomial(t *testing.T) {
	// 2 - 3 x + x^3 at 2: 4, slope 9.
	if y, dy := Polynomial([]float64{2, -3, 0, 1}, 2); y != 4 || dy != 9 {
		t.Errorf("%g %g", y, dy)
	}
	if y, dy := Polynomial([]float64{5}, math.NaN()); y != 5 || dy != 0 {
		t.Errorf("a constant depends on nothing: %g %g", y, dy)
	}
}

func TestRising(t *testing.T) {
	for _, c := range []struct {
		x  []float64
		at int
		ok bool
	}{{[]float64{1, 2, 3}, 0, true}, {[]float64{1, 1}, 1, false}, {[]float64{1, math.NaN()}, 1, false}, {[]float64{math.Inf(-1)}, 0, false}, {nil, 0, true}} {
		if at, ok := Rising(c.x); at != c.at || ok != c.ok {
			t.Errorf("%v: %d %v", c.x, at, ok)
		}
	}
}
