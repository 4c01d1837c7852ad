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
	order := filled(n)
	low := make([]int, n)
	on := make([]bool, n)
	var stack []int
	var blocks [][]int
	next := 0
	var visit func(row int)
	visit = func(row int) {
		order[row], low[row] = next, next
		next++
		stack = append(stack, row)
		on[row] = true
		for _, column := range g.Rows[row] {
			needed := m.Row[column]
			if needed < 0 || needed == row {
				continue
			}
			if order[needed] < 0 {
				visit(needed)
				low[row] = min(low[row], low[needed])
			} else if on[needed] {
				low[row] = min(low[row], order[needed])
			}
		}
		if low[row] != order[row] {
			return
		}
		var block []int
		for {
			last := stack[len(stack)-1]
			stack = stack[:len(stack)-1]
			on[last] = false
			block = append(block, last)
			if last == row {
				break
			}
		}
		blocks = append(blocks, block)
	}
	for row := range n {
		if order[row] < 0 {
			visit(row)
		}
	}
	return blocks
}
