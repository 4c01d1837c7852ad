package vetting

import "testing"

func TestPublishedValues(t *testing.T) {
	results := Run()
	const carried = 42 // R7-97 Tables 5 and 15 (18 each), 35 and 36 (3 each)
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
