package statuses

import (
	"sort"
	"strings"
)

// Near returns up to three of the known names that look like name, best first.
func Near(known []string, name string) []string {
	const longest = 80
	if len(name) > longest {
		return nil
	}
	type candidate struct {
		name     string
		distance int
	}
	var candidates []candidate
	for _, n := range known {
		distance := editDistance(name, n)
		stem := strings.SplitN(n, "_", 2)[0]
		switch {
		case distance <= 1+len(n)/4:
		case len(stem) > 3 && (strings.HasPrefix(name, stem) || name == n[:min(len(n), len(name))] && len(name) > 3):
			distance += len(n)
		default:
			continue
		}
		candidates = append(candidates, candidate{n, distance})
	}
	sort.SliceStable(candidates, func(i, j int) bool { return candidates[i].distance < candidates[j].distance })
	var names []string
	for i := range min(3, len(candidates)) {
		names = append(names, candidates[i].name)
	}
	return names
}

// editDistance counts the insertions, deletions and changes between a and b
// (Levenshtein).
func editDistance(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := range len(a) {
		diagonal := row[0]
		row[0] = i + 1
		for j := range len(b) {
			cost := diagonal
			if a[i] != b[j] {
				cost++
			}
			diagonal = row[j+1]
			row[j+1] = min(cost, row[j]+1, row[j+1]+1)
		}
	}
	return row[len(b)]
}
