package vetting

import "testing"

func TestPublishedValues(t *testing.T) {
	results := Run()
	// R7-97 Tables 5, 15, 18, 33, 42 (18 each), 7, 9, 35, 36 (3 each), 24, 29 (9
	// each) and 3 of boundaries; SR3-03 4 tables of 6 and a boundary; R12-08
	// Tables 4 (11), 5 (6); R15-11 Tables 4 (4), 5 (9), 7 to 9 (72); R1-76 (24).
	const carried = 274
	if len(results) != carried {
		t.Errorf("%d checks, want %d: was one lost?", len(results), carried)
	}
	for _, line := range Failures(results) {
		t.Error(line)
	}
}

func TestFailuresAreNamed(t *testing.T) {
	results := Run()
	results[0].Passed = false
	if lines := Failures(results); len(lines) != 1 {
		t.Errorf("got %q, want one line", lines)
	}
}
