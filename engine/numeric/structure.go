package numeric

// Graph says which unknowns (columns) stand in which equations (rows).
type Graph struct {
	Rows    [][]int // the columns of each row
	Columns int     // how many columns there are
}

// Matching pairs rows with columns; -1 stands for unpaired.
type Matching struct {
	Column []int // column of each row
	Row    []int // row of each column
}

// Match finds a matching of the greatest size by augmenting paths.
func (g Graph) Match() Matching {
	m := Matching{Column: filled(len(g.Rows)), Row: filled(g.Columns)}
	seen := make([]bool, g.Columns)
	for row := range g.Rows {
		clear(seen)
		g.augment(row, m, seen)
	}
	return m
}

func filled(n int) []int {
	s := make([]int, n)
	for i := range s {
		s[i] = -1
	}
	return s
}

func (g Graph) augment(row int, m Matching, seen []bool) bool {
	for _, column := range g.Rows[row] {
		if seen[column] {
			continue
		}
		seen[column] = true
		if m.Row[column] < 0 || g.augment(m.Row[column], m, seen) {
			m.Row[column], m.Column[row] = row, column
			return true
		}
	}
	return false
}

// Unmatched counts the rows and the columns that m leaves unpaired.
func (m Matching) Unmatched() (rows, columns int) {
	for _, c := range m.Column {
		if c < 0 {
			rows++
		}
	}
	for _, r := range m.Row {
		if r < 0 {
			columns++
		}
	}
	return rows, columns
}

// Under marks the columns of the under-determined part of the
// Dulmage-Mendelsohn partition: those that an alternating path joins to an
// unpaired column, so that each of them could be the one left open.
func (g Graph) Under(m Matching) []bool {
	under := make([]bool, g.Columns)
	rowsOf := make([][]int, g.Columns)
	for row, columns := range g.Rows {
		for _, column := range columns {
			rowsOf[column] = append(rowsOf[column], row)
		}
	}
	var reach func(column int)
	reach = func(column int) {
		if under[column] {
			return
		}
		under[column] = true
		for _, row := range rowsOf[column] {
			if next := m.Column[row]; next >= 0 {
				reach(next)
			}
		}
	}
	for column, row := range m.Row {
		if row < 0 {
			reach(column)
		}
	}
	return under
}

// Blocks returns the rows of a perfectly matched system in groups that can be
// solved one after the other: the strongly connected components of the square
// part, by Tarjan's algorithm, each after those whose unknowns it needs.
func (g Graph) Blocks(m Matching) [][]int {
	n := len(g.Rows)
	t := components{g: g, m: m, order: filled(n), low: make([]int, n), stack: make([]int, 0, n), rows: make([]int, 0, n), blocks: make([][]int, 0, n)}
	for row := range n {
		if t.order[row] < 0 {
			t.visit(row)
		}
	}
	return t.blocks
}

// components is Tarjan's algorithm at work.
type components struct {
	g          Graph
	m          Matching
	order, low []int // -1 for a row not visited; past all rows for one that is done
	stack      []int
	rows       []int // of all blocks, one block after the other
	blocks     [][]int
	next       int
}

func (t *components) visit(row int) {
	t.order[row], t.low[row] = t.next, t.next
	t.next++
	t.stack = append(t.stack, row)
	for _, column := range t.g.Rows[row] {
		needed := t.m.Row[column]
		if needed < 0 || needed == row {
			continue
		}
		if t.order[needed] < 0 {
			t.visit(needed)
			t.low[row] = min(t.low[row], t.low[needed])
		} else {
			t.low[row] = min(t.low[row], t.order[needed])
		}
	}
	if t.low[row] != t.order[row] {
		return
	}
	first := len(t.rows)
	for last := -1; last != row; {
		last = t.stack[len(t.stack)-1]
		t.stack = t.stack[:len(t.stack)-1]
		t.order[last] = len(t.g.Rows)
		t.rows = append(t.rows, last)
	}
	t.blocks = append(t.blocks, t.rows[first:len(t.rows):len(t.rows)])
}
