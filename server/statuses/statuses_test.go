package statuses

import (
	"context"
	"errors"
	"fmt"
	"strings"
	"testing"

	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"

	"calandria.example/calandria/engine/fault"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// TestReasonOfErrors holds what callers are told about each kind of error; of
// an error that is not meant for them they see nothing but the id.
func TestReasonOfErrors(t *testing.T) {
	const id = "id-1"
	outside := &fault.Range{Quantity: "temperature_c", Unit: "K", Value: 700, Min: 273.15, Max: 623.15, Source: "a source"}
	invalid := &fault.Invalid{Field: "find[0]", Value: "x", Limit: "a path", WayOut: "name one"}
	for _, c := range []struct {
		name   string
		err    error
		reason calandriav1.Reason
		http   int
		known  bool
	}{
		{"deadline of a context", fmt.Errorf("solve: %w", context.DeadlineExceeded), calandriav1.Reason_REASON_DEADLINE, 504, true},
		{"deadline of the transport", status.Error(codes.DeadlineExceeded, "secret"), calandriav1.Reason_REASON_DEADLINE, 504, true},
		{"given up, by the context", context.Canceled, calandriav1.Reason_REASON_CANCELED, 499, true},
		{"given up, by the transport", status.Error(codes.Canceled, "secret"), calandriav1.Reason_REASON_CANCELED, 499, true},
		{"our own status", Invalid(&calandriav1.Violation{Detail: "words"}).Err(), calandriav1.Reason_REASON_FIELD_INVALID, 400, true},
		{"outside of an equation", outside, calandriav1.Reason_REASON_OUTSIDE_CORRELATION, 400, true},
		{"two at once", errors.Join(outside, invalid), calandriav1.Reason_REASON_FIELD_INVALID, 400, true},
		{"something else", errors.New("secret"), calandriav1.Reason_REASON_INTERNAL, 500, false},
		{"a fault beside something else", errors.Join(outside, errors.New("secret")), calandriav1.Reason_REASON_INTERNAL, 500, false},
		{"a bare status of another kind", status.Error(codes.DataLoss, "secret"), calandriav1.Reason_REASON_INTERNAL, 500, false},
	} {
		s, known := From(c.err, id)
		if got := Reason(s); got != c.reason || HTTP(got) != c.http || known != c.known {
			t.Errorf("%s: %v %d known %v, want %v %d known %v", c.name, got, HTTP(got), known, c.reason, c.http, c.known)
		}
		if strings.Contains(s.Message(), "secret") {
			t.Errorf("%s: leaks %q", c.name, s.Message())
		}
	}
}
