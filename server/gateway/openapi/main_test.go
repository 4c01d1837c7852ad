package main

import (
	"os"
	"testing"
)

// TestDescriptionIsCurrent makes the description again and compares.
func TestDescriptionIsCurrent(t *testing.T) {
	want, err := describe("../../..")
	if err != nil {
		t.Fatal(err)
	}
	got, err := os.ReadFile("../openapi.json")
	if err != nil {
		t.Fatal(err)
	}
	if string(got) != string(want) {
		t.Error("server/gateway/openapi.json is not what the protos say; run go generate ./server/gateway")
	}
}
